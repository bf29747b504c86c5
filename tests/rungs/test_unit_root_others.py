"""What is said of the tests of a unit root beside ADF and KPSS, and that each can be repeated elsewhere."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter
from statsmodels.tsa import stattools

from preflight_magic.kernels.plan_likelihood import compare
from preflight_magic.kernels.unit_root import adf
from preflight_magic.ladder import prior_of
from preflight_magic.model import Difference, Evidence, HypothesisTest, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.unit_root import RUNG
from tests.sentences import assert_reads_well

BOUNDS = Thresholds(significance=0.05)
NAMES = ("DF-GLS", "Phillips-Perron", "Zivot-Andrews", "union of rejections")


def one(name: str, p: float, terms: str = "ct", **options: object) -> HypothesisTest:
    return HypothesisTest(name, "a unit root", -1.0, p, "exact", 90, 3, terms, options={"series": "log"} | options)


def reason(adf: float, others: dict[str, float], d: int = 1, without_line: float | None = None) -> str:
    tests = [one("ADF", adf), one("KPSS", 0.2)]
    tests += [] if without_line is None else [one("ADF", without_line, "c")]
    options = {"Zivot-Andrews": {"break": "2015-04"}}
    tests += [one(name, p, **options.get(name, {})) for name, p in others.items()]
    found = RUNG.judge(Evidence({"d_shares": {d: 0.95, 1 - d: 0.05}, "n": 90}, tuple(tests)), BOUNDS).reason
    assert_reads_well(found)
    return found


@pytest.mark.parametrize("p", [0.01, 0.4])
def test_agreement_is_told_once(p: float) -> None:
    assert "say the same as ADF" in reason(p, dict.fromkeys(NAMES, p), without_line=p)
    assert "differ from ADF" not in reason(p, dict.fromkeys(NAMES, p), without_line=p)


@pytest.mark.parametrize(
    ("name", "adf", "p", "said"),
    [
        ("DF-GLS", 0.3, 0.01, "DF-GLS rejects (p = 0.010): it has more power"),
        (
            "DF-GLS",
            0.01,
            0.3,
            "DF-GLS does not reject (p = 0.300): it has little power where the series starts far off its line",
        ),
        ("Phillips-Perron", 0.3, 0.01, "with a moving average near -1 it rejects too often"),
        ("Phillips-Perron", 0.01, 0.3, "Phillips-Perron does not reject (p = 0.300)"),
        ("Zivot-Andrews", 0.3, 0.01, "a break, dated 2015-04, looks like a unit root"),
        ("Zivot-Andrews", 0.01, 0.3, "its search for a break costs power"),
        ("union of rejections", 0.3, 0.01, "Union of rejections rejects (p = 0.010)"),
        ("union of rejections", 0.01, 0.3, "it asks more of each of its four tests"),
    ],
)
def test_a_test_that_differs_is_named_with_the_known_reason(name: str, adf: float, p: float, said: str) -> None:
    found = reason(adf, dict.fromkeys(NAMES, adf) | {name: p})
    assert said in found
    assert sum(found.count(f"{other} {does}") for other in NAMES for does in ("rejects", "does not reject")) <= 1


def test_wrong_terms_are_told() -> None:
    assert "a trend that a constant cannot follow" in reason(0.01, {"DF-GLS": 0.01}, d=0, without_line=0.5)
    assert "a line not needed costs power" in reason(0.3, {"DF-GLS": 0.3}, without_line=0.01)


def test_without_the_others_nothing_is_said_of_them() -> None:
    assert "ADF with" not in reason(0.3, {}, without_line=0.01)
    assert "other tests" not in reason(0.3, {})


def examined(values: np.ndarray, steps: tuple[Difference, ...] = (), period: int = 1) -> list[HypothesisTest]:
    index = pd.period_range("2010-01", periods=len(values), freq="M")
    comparison = compare(values, period, prior_of(BOUNDS))
    series = TimeSeries("x", pd.Series(values, index=index), None, (period,))
    return list(RUNG.examine(series, Context(comparison=comparison, steps=steps)).tests)


def test_every_test_is_shown_of_the_level_and_those_of_roots_of_the_difference() -> None:
    walk = np.random.default_rng(4).standard_normal(150).cumsum()
    found = {(test.test, test.terms, str(test.options["series"])) for test in examined(walk)}
    both = {(name, terms) for name in ("ADF", "KPSS", "DF-GLS", "Phillips-Perron") for terms in ("c", "ct")}
    level = both | {("Zivot-Andrews", "ct"), ("union of rejections", "ct")}
    assert {(name, terms) for name, terms, series in found if series == "as given"} == level
    assert {(name, terms) for name, terms, series in found if series == "as given, differenced once"} == both


def test_adf_is_shown_with_the_lags_of_the_modified_aic() -> None:
    noise = np.random.default_rng(3).standard_normal(121)
    walk = (noise[1:] - 0.8 * noise[:-1]).cumsum()
    shown = [test for test in examined(walk) if test.test == "ADF" and test.options["series"] == "as given"]
    assert [test.terms for test in shown] == ["c", "ct"]
    for test in shown:
        assert test.options["lag choice"] == "modified AIC"
        modified, plain = adf(walk, test.terms, criterion="MAIC"), adf(walk, test.terms, criterion="AIC")
        assert modified is not None
        assert plain is not None
        assert (test.statistic, test.lags) == (modified.statistic, modified.lags)
        # A moving average at -0.8 needs many lags: Ng and Perron (2001), Econometrica 69.
        assert test.lags > plain.lags
        assert test.p_value > plain.p_value


def test_a_break_is_dated_in_the_index() -> None:
    values = np.random.default_rng(4).standard_normal(90)
    values[60:] += 9.0
    found = next(test for test in examined(values) if test.test == "Zivot-Andrews")
    assert found.options["break"] == "2015-01"
    assert found.p_value < 0.05


def test_a_seasonal_difference_does_not_move_the_break() -> None:
    rng = np.random.default_rng(6)
    values = np.resize(rng.standard_normal((1, 12)), 180) + 0.1 * rng.standard_normal(180)
    values[100:] += 0.1 * np.arange(1.0, 81.0) ** 2  # after the difference a line begins here
    found = next(test for test in examined(values, (Difference(12),), 12) if test.test == "Zivot-Andrews")
    assert abs(pd.Period(found.options["break"], "M").ordinal - pd.Period("2018-05", "M").ordinal) <= 3


def test_zivot_andrews_as_shown_is_that_of_statsmodels() -> None:
    walk = lfilter([1.0], [1.0, -0.6], np.random.default_rng(8).standard_normal(120)).cumsum()
    found = next(test for test in examined(walk) if test.test == "Zivot-Andrews")
    options = found.options
    assert found.lags  # statsmodels takes no lags for no answer
    again = stattools.zivot_andrews(walk, trim=options["trimming"], maxlag=found.lags, regression="ct", autolag=None)
    assert found.statistic == pytest.approx(float(again[0]), rel=1e-8)
