"""How presence and kind of a season are judged."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.model import Difference, Evidence, RemovePattern, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.season import RUNG
from tests.sentences import assert_reads_well

BOUNDS = Thresholds(season_p=0.001, even_share=0.7)
FIXED, WANDERING = {"fixed": 0.82, "difference": 0.18}, {"difference": 0.9, "fixed": 0.1}


def evidence(asked, period, p, split=None):
    measures = {"asked": asked, "period": period, "presence_p": p, "presence_standardised": p * 1.2}
    return Evidence(measures | ({} if split is None else {"season_shares": split}))


@pytest.mark.parametrize(
    ("asked", "period", "p", "split", "verdict", "steps", "said"),
    [
        (1, 1, math.nan, None, "clear", (), "without a seasonal period"),
        (12, 1, math.nan, None, "clear", (), "too few complete cycles of 12"),
        (12, 12, math.nan, None, "clear", (), "too few complete cycles of 12"),
        (
            12,
            12,
            0.15,
            {"none": 1.0},
            "clear",
            (),
            "p = 0.150, standardised to 100 values 0.180; below 0.001 is wanted",
        ),
        (12, 12, 0.00098, {"none": 1.0}, "clear", (), "p < 0.001, standardised to 100 values 0.0012"),
        (12, 12, 1e-20, FIXED, "transform", (RemovePattern(12),), "82 % of the evidence is for a fixed pattern, 18 %"),
        (4, 4, 1e-20, WANDERING, "transform", (Difference(4),), "for a wandering one, 10 % for a fixed pattern."),
        (12, 12, 1e-5, {"fixed": 0.69, "difference": 0.31}, "inconclusive", (RemovePattern(12),), "too even to call"),
        (12, 12, 1e-5, {"difference": 0.51, "fixed": 0.49}, "inconclusive", (Difference(12),), "too even to call"),
        (24, 168, 1e-9, {"fixed": 1.0}, "transform", (RemovePattern(168),), "differ within a longer season of 168"),
        (12, 12, 1e-5, {"fixed": 1.0}, "transform", (RemovePattern(12),), "over 99 % of the evidence"),
    ],
)
def test_judgement(asked, period, p, split, verdict, steps, said):
    found = RUNG.judge(evidence(asked, period, p, split), BOUNDS)
    assert (found.verdict, found.steps) == (verdict, steps)
    assert said in found.reason
    assert_reads_well(found.reason)
    assert_reads_well(found.headline, whole=False)


def test_without_a_comparison():
    found = RUNG.judge(RUNG.examine(TimeSeries("x", pd.Series(np.arange(9.0)), None), Context()), BOUNDS)
    assert (found.verdict, found.steps) == ("inconclusive", ())
    assert_reads_well(found.reason)


def days(yearly, seed=0):
    rng = np.random.default_rng(seed)
    t = np.arange(3 * 365)
    values = 200.0 + yearly * np.sin(2 * np.pi * t / 365.25) + 8.0 * (t % 7 >= 5) + 3.0 * rng.standard_normal(len(t))
    return pd.Series(values, pd.date_range("2022-01-03", periods=len(t), freq="D"), name="passengers")


def test_a_yearly_cycle_of_days_is_told_beside_the_week():
    found = pf.check(days(30.0), progress=False)["passengers"].findings["season"]
    assert found.headline.endswith(", and a yearly cycle")
    assert "yearly cycle of 365.25 steps" in found.reason
    # a step of the week alone: which one, the year decides too, since a difference takes most of its cycle away
    assert found.steps in ((RemovePattern(7),), (Difference(7),))
    assert_reads_well(found.reason)


def test_days_without_a_yearly_cycle_have_none():
    found = pf.check(days(0.0), progress=False)["passengers"].findings["season"]
    assert found.headline == "a fixed pattern"
    assert found.measures["year_standardised"] > 0.005


def test_two_years_are_needed_to_speak_of_a_yearly_cycle():
    assert "year" not in pf.check(days(30.0)[:700], progress=False)["passengers"].findings["season"].measures
