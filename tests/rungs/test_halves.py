import numpy as np
import pandas as pd
import pytest

from preflight_magic.kernels.halves import Moment
from preflight_magic.model import Difference, Evidence, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.halves import RUNG
from tests.sentences import assert_reads_well


def evidence(**z: float) -> Evidence:
    return Evidence({"moments": tuple(Moment(name.replace("_", " "), 1.0, 2.0, value) for name, value in z.items())})


CASES = [
    (evidence(mean=0.5, variance=-1.0), "clear", "both halves alike"),
    # two moments: the 5% bound is 2.24, not 1.96
    (evidence(mean=2.1, variance=-1.0), "clear", "both halves alike"),
    (evidence(mean=2.3, variance=-1.0), "inconclusive", "mean differs between the halves"),
    (evidence(mean=-3.0, variance=4.0), "inconclusive", "mean and variance differ between the halves"),
    (evidence(mean=-3.0, variance=4.0, third=5.0), "inconclusive", "3 moments differ between the halves"),
    (evidence(mean=float("nan"), variance=1.0), "clear", "both halves alike"),
    (evidence(mean=float("nan")), "inconclusive", "not examined"),
]


@pytest.mark.parametrize(("found", "verdict", "headline"), CASES, ids=range(len(CASES)))
def test_judgements(found: Evidence, verdict: str, headline: str) -> None:
    judged = RUNG.judge(found, Thresholds())
    assert (judged.verdict, judged.headline) == (verdict, headline)
    assert judged.steps == ()
    assert_reads_well(judged.headline, whole=False)
    assert_reads_well(judged.reason)


def test_significance_is_that_of_the_thresholds() -> None:
    assert RUNG.judge(evidence(mean=2.3), Thresholds(significance=0.01)).verdict == "clear"


def examined(values: np.ndarray, steps: tuple[Difference, ...] = ()) -> Evidence:
    series = pd.Series(values, index=pd.period_range("2010-01", periods=len(values), freq="M"))
    return RUNG.examine(TimeSeries("freight", series, None), Context(steps=steps, transformed=series))


def test_moments_and_stamps() -> None:
    found = examined(np.random.default_rng(1).normal(size=120), (Difference(12),))
    names = [moment.name for moment in found.measures["moments"]]  # type: ignore[attr-defined]
    assert names == ["mean", "variance", *(f"autocovariance at lag {lag}" for lag in (1, 2, 12))]
    assert found.measures["first_from"] == pd.Period("2010-01", "M")
    assert found.measures["second_from"] == pd.Period("2015-01", "M")


def test_a_change_of_spread_is_seen() -> None:
    values = np.random.default_rng(2).normal(size=200) * np.repeat([1.0, 3.0], 100)
    judged = RUNG.judge(examined(values), Thresholds())
    assert judged.verdict == "inconclusive"
    assert "variance" in judged.headline
    assert_reads_well(judged.reason)


def test_short_or_constant_series_are_a_problem() -> None:
    for values in (np.arange(10.0), np.ones(40), np.zeros(0)):
        found = examined(values)
        assert found.problem
        assert_reads_well(RUNG.judge(found, Thresholds()).reason)
    assert RUNG.examine(TimeSeries("freight", pd.Series(dtype=float), None), Context()).problem
