import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter
from statsmodels.stats.diagnostic import acorr_ljungbox

from preflight_magic.model import Calendar, Difference, Evidence, HypothesisTest, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.residuals import EXACT, RUNG
from tests.sentences import assert_reads_well


def one_test(name: str, p_value: float, lags: int | None = 10) -> HypothesisTest:
    return HypothesisTest(name, "", 1.0, p_value, "exact", 100, lags, "c")


def evidence(*tests: HypothesisTest, outliers: tuple[str, ...] = (), largest: float = 2.5) -> Evidence:
    measures = {"innovations": 100, "largest": largest, "outliers": len(outliers), "outliers_at": outliers}
    return Evidence(measures, tests)


LB, ARCH, JB = "Ljung-Box", "ARCH-LM", "Jarque-Bera"
FINE = (one_test(LB, 0.5), one_test(LB, 0.3, 24), one_test(ARCH, 0.4, 4), one_test(JB, 0.6, None))
CASES = [
    (evidence(*FINE), "clear", "nothing left to explain"),
    (evidence(one_test(LB, 0.001), *FINE[1:]), "inconclusive", "correlation left"),
    # three lags are one question asked three times
    (evidence(one_test(LB, 0.02), one_test(LB, 0.5, 12), one_test(LB, 0.5, 24)), "clear", "nothing left to explain"),
    (evidence(*FINE[:2], one_test(ARCH, 0.01, 4)), "inconclusive", "the spread of the innovations changes"),
    # two lags and the ARCH test are three questions
    (evidence(*FINE[:2], one_test(ARCH, 0.02, 4)), "clear", "nothing left to explain"),
    # where columns were taken out, the test that allows for them decides
    (evidence(one_test(LB, 1e-9), one_test(EXACT, 0.4), *FINE[2:]), "clear", "nothing left to explain"),
    (evidence(one_test(LB, 0.9), one_test(EXACT, 0.001), *FINE[2:]), "inconclusive", "correlation left"),
    (evidence(*FINE[:3], one_test(JB, 1e-9, None)), "clear", "not normal"),
    (evidence(*FINE, outliers=("2014-03",), largest=5.2), "clear", "1 outlier left"),
    (
        evidence(
            one_test(LB, 1e-6), one_test(ARCH, 0.01), one_test(JB, 0.001, None), outliers=tuple("abcde"), largest=9.0
        ),
        "inconclusive",
        "correlation left, the spread of the innovations changes, 5 outliers left, not normal",
    ),
    (evidence(), "clear", "nothing left to explain"),
]


@pytest.mark.parametrize(("found", "verdict", "headline"), CASES, ids=range(len(CASES)))
def test_judgements(found: Evidence, verdict: str, headline: str) -> None:
    judged = RUNG.judge(found, Thresholds())
    assert (judged.verdict, judged.headline) == (verdict, headline)
    assert judged.steps == ()
    assert_reads_well(judged.headline, whole=False)
    assert_reads_well(judged.reason)
    assert "accept" not in judged.reason


def test_significance_is_that_of_the_thresholds() -> None:
    found = evidence(one_test(LB, 0.03))
    assert RUNG.judge(found, Thresholds()).verdict == "inconclusive"
    assert RUNG.judge(found, Thresholds(significance=0.01)).verdict == "clear"


def examined(innovations: np.ndarray | None, fitted: int = 2, steps: tuple[Difference, ...] = ()) -> Evidence:
    n = 0 if innovations is None else len(innovations)
    index = pd.period_range("2010-01", periods=n, freq="M")
    series = TimeSeries("freight", pd.Series(np.zeros(n), index=index), Calendar("monthly", "M", "month", (12,)))
    context = Context(
        steps=steps,
        transformed=pd.Series(np.zeros(n), index=index),
        innovations=innovations,
        fitted_parameters=fitted,
    )
    return RUNG.examine(series, context)


def test_tests_can_be_repeated_with_another_library() -> None:
    values = np.random.default_rng(1).normal(size=150)
    found = examined(values)
    boxes = [test for test in found.tests if test.test == LB]
    assert [test.lags for test in boxes] == [10, 24]
    theirs = acorr_ljungbox(values, lags=[10, 24], model_df=2)
    assert [test.statistic for test in boxes] == pytest.approx(theirs["lb_stat"].tolist())
    assert [test.p_value for test in boxes] == pytest.approx(theirs["lb_pvalue"].tolist())
    assert {test.test for test in found.tests} == {LB, ARCH, JB}
    seasonal = examined(values, steps=(Difference(12),))
    assert [test.lags for test in seasonal.tests if test.test == LB] == [10, 12, 24]


def test_outliers_are_dated() -> None:
    values = np.random.default_rng(2).normal(size=100)
    values[26] = -6.0
    values[30] = np.nan
    found = examined(values)
    assert found.measures["outliers_at"] == ("2012-03",)
    assert found.measures["largest"] == 6.0
    assert found.measures["innovations"] == 99


def test_what_is_left_is_seen() -> None:
    noise = np.random.default_rng(3).normal(size=300)
    judged = RUNG.judge(examined(lfilter([1.0], [1.0, -0.5], noise)), Thresholds())
    assert judged.headline.startswith("correlation left")
    clean = [RUNG.judge(examined(np.random.default_rng(s).normal(size=120)), Thresholds()).verdict for s in range(40)]
    assert clean.count("inconclusive") <= 6


@pytest.mark.parametrize("n", [1, 2, 5, 8, 12, 20])
def test_short_series_do_no_harm(n: int) -> None:
    judged = RUNG.judge(examined(np.random.default_rng(n).normal(size=n)), Thresholds())
    assert_reads_well(judged.reason)


def test_without_innovations_there_is_nothing_to_examine() -> None:
    for found in (examined(None), examined(np.full(10, np.nan))):
        assert found.problem
        assert_reads_well(RUNG.judge(found, Thresholds()).reason)
