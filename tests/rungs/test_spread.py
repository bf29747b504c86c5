"""How the gain of the log is judged."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Evidence, Log, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.spread import RUNG
from tests.sentences import assert_reads_well

BOUNDS = Thresholds(log_margin=7.0, log_even=2.0)


@pytest.mark.parametrize(
    ("gain", "smallest", "verdict", "steps", "said"),
    [
        (278.84, 5.0, "transform", (Log(),), "the log lowers -2 log likelihood by 278.8; more than 7 speaks for it."),
        (9.1, 5.0, "transform", (Log(),), "lowers -2 log likelihood by 9.1"),
        (8.9, 5.0, "inconclusive", (Log(),), "too close to call"),
        (7.1, 5.0, "inconclusive", (Log(),), "too close to call"),
        (7.0, 5.0, "inconclusive", (), "too close to call"),
        (5.1, 5.0, "inconclusive", (), "a log needs more than 7"),
        (4.9, 5.0, "clear", (), "the log lowers -2 log likelihood by 4.9; a log needs more than 7."),
        (0.0, 5.0, "clear", (), "lowers"),
        (-20.2, 5.0, "clear", (), "the log raises -2 log likelihood by 20.2"),
        (-math.inf, 0.0, "clear", (), "The smallest value is zero, so no logarithm can be taken."),
        (-math.inf, -3.0, "clear", (), "The smallest value is negative"),
        (math.nan, 5.0, "clear", (), "Too few values"),
    ],
)
def test_judgement(gain, smallest, verdict, steps, said):
    found = RUNG.judge(Evidence({"log_gain": gain, "smallest": smallest}), BOUNDS)
    assert (found.verdict, found.steps) == (verdict, steps)
    assert said in found.reason
    assert_reads_well(found.reason)
    assert_reads_well(found.headline, whole=False)


@pytest.mark.parametrize("significance", [0.001, 0.2])
def test_significance_changes_nothing(significance):
    evidence = Evidence({"log_gain": 8.0, "smallest": 1.0})
    assert RUNG.judge(evidence, Thresholds(significance=significance)) == RUNG.judge(evidence, Thresholds())


def test_without_a_comparison():
    series = TimeSeries("x", pd.Series(np.arange(9.0)), None)
    found = RUNG.judge(RUNG.examine(series, Context()), BOUNDS)
    assert (found.verdict, found.steps) == ("inconclusive", ())
    assert_reads_well(found.reason)
