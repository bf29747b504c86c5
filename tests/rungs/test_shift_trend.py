"""How shares for a shift and a trend are judged."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Evidence, RemoveShift, RemoveTrend, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.shift_trend import RUNG
from tests.sentences import assert_reads_well

BOUNDS = Thresholds(even_share=0.7)
AT = pd.Period("2019-04", "M")
SHIFT = RemoveShift(AT)
TREND = RemoveTrend()


def evidence(shift, trend, differences, t=23.46):
    measures = {"shift_shares": shift, "trend_shares": trend, "differences": differences, "trend_t": math.nan}
    if "shift" in shift:
        measures |= {"shift_at": AT, "shift_text": "2019-04", "shift_f": 90.0, "shift_t": t}
    return Evidence(measures)


NO_SHIFT = {"no shift": 0.999, "shift": 0.001}
FLAT = {"no trend": 0.97, "trend": 0.03}


@pytest.mark.parametrize(
    ("shift", "trend", "differences", "verdict", "steps", "headline"),
    [
        (NO_SHIFT, FLAT, 0, "clear", (), "no trend, no level shift"),
        (NO_SHIFT, FLAT, 1, "clear", (), "no trend, no level shift"),
        (NO_SHIFT, {"trend": 0.9, "no trend": 0.1}, 0, "transform", (TREND,), "a linear trend"),
        (NO_SHIFT, {"trend": 0.9, "no trend": 0.1}, 1, "clear", (), "drift"),
        (NO_SHIFT, {"second": 0.8, "trend": 0.2}, 2, "clear", (), "nothing to remove"),
        (NO_SHIFT, {"second": 0.6, "trend": 0.3, "no trend": 0.1}, 2, "inconclusive", (), "nothing to remove"),
        ({"shift": 0.95, "no shift": 0.05}, FLAT, 0, "transform", (SHIFT,), "a level shift at 2019-04"),
        ({"shift": 0.65, "no shift": 0.35}, FLAT, 0, "inconclusive", (SHIFT,), "a level shift at 2019-04"),
        ({"no shift": 0.65, "shift": 0.35}, FLAT, 0, "inconclusive", (), "no trend, no level shift"),
        (
            {"shift": 0.95, "no shift": 0.05},
            {"trend": 0.9, "no trend": 0.1},
            0,
            "transform",
            (TREND, SHIFT),
            "a linear trend and a level shift at 2019-04",
        ),
        (NO_SHIFT, {"no trend": 0.55, "trend": 0.45}, 0, "inconclusive", (), "no trend, no level shift"),
        (NO_SHIFT, {"trend": 0.69, "no trend": 0.31}, 0, "inconclusive", (TREND,), "a linear trend"),
        ({"no shift": 1.0}, FLAT, 0, "clear", (), "no trend, no level shift"),
        ({"no shift": 1.0}, {"second": 1.0}, 2, "clear", (), "nothing to remove"),
    ],
)
def test_judgement(shift, trend, differences, verdict, steps, headline):
    found = RUNG.judge(evidence(shift, trend, differences), BOUNDS)
    assert (found.verdict, found.steps, found.headline) == (verdict, steps, headline)
    assert ("too even to call" in found.reason) == (verdict == "inconclusive")
    assert_reads_well(found.reason)


def test_doubt_is_told_with_its_shares():
    found = RUNG.judge(evidence(NO_SHIFT, {"second": 0.6, "trend": 0.3, "no trend": 0.1}, 2), BOUNDS)
    assert "60 % of the evidence is for a second difference, which follows any slope, 30 % for a trend." in found.reason


def test_drift_needs_no_step():
    found = RUNG.judge(evidence(NO_SHIFT, {"trend": 0.9, "no trend": 0.1}, 1), BOUNDS)
    assert found.reason.endswith("It is the mean of the changes, so no step of its own is needed.")


@pytest.mark.parametrize(
    ("t", "said"),
    [(23.46, "(t = 23.5)"), (-8.71, "(t = -8.7)"), (7.7e10, "(t > 1000)"), (-1e9, "(t < -1000)"), (1000, "= 1000.0)")],
)
def test_size_of_the_shift(t, said):
    found = RUNG.judge(evidence({"shift": 0.95, "no shift": 0.05}, FLAT, 0, t), BOUNDS)
    assert f"The level changes at 2019-04 {said}"[:28] in found.reason
    assert said in found.reason


def test_without_a_comparison():
    found = RUNG.judge(RUNG.examine(TimeSeries("x", pd.Series(np.arange(9.0)), None), Context()), BOUNDS)
    assert (found.verdict, found.steps) == ("inconclusive", ())
    assert_reads_well(found.reason)
