from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.arma import ArmaFit
from preflight_magic.kernels.arma_roots import CommonFactor
from preflight_magic.kernels.restricted_likelihood import difference
from preflight_magic.model import (
    Difference,
    Evidence,
    Log,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Root,
    Step,
    TimeSeries,
)
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.roots import RUNG
from tests.sentences import assert_reads_well

REFERENCES = Path(__file__).parents[1] / "references"
INF, NAN = float("inf"), float("nan")


# --------------------------------------------------------------------------------------------------- judge
def evidence(*roots: Root, **changed: object) -> Evidence:
    measures: dict[str, object] = {
        "order": "ARMA(1,1)",
        "roots": roots,
        "psi_sum": 3.0,
        "half_life": 2.5,
        "variance_implied": 1.0,
        "variance_sample": 1.1,
        "common_factors": (),
        "ma_at_one": NAN,
        "seasonal_ma_at_one": NAN,
        "differences": 0,
        "seasonal_difference": 0,
        "season": 12,
    }
    return Evidence(measures | changed)


def ar(modulus: float, error: float = 0.02, period: float = INF) -> Root:
    return Root("AR", modulus, period, error)


def ma(modulus: float, error: float = 0.02, period: float = INF) -> Root:
    return Root("MA", modulus, period, error)


def seasonal(part: str, coefficient: float, error: float = 0.1) -> Root:
    modulus = coefficient ** (1 / 12)
    return Root(part, modulus, 12.0, error * modulus / (12 * coefficient), True)  # type: ignore[arg-type]


ONE_MORE = "near-unit root: one more difference may be needed"
TOO_MANY = "over-differenced: one difference too many"
ALREADY = "over-differenced: it may already have been differenced"
PATTERN = "a fixed pattern was differenced"
CASES = [
    (evidence(), "clear", "white noise"),
    (evidence(ar(0.7)), "clear", "stationary, largest AR root 0.70"),
    (evidence(ma(0.7)), "clear", "stationary, no AR root"),
    (evidence(seasonal("AR", 0.5)), "clear", "stationary, seasonal AR root 0.50"),
    (evidence(Root("AR", 0.5 ** (1 / 12), 24.0, 0.01, True)), "clear", "stationary, seasonal AR root 0.50"),
    (evidence(Root("AR", 0.99, 24.0, 0.02, True)), "clear", "stationary, seasonal AR root 0.89"),
    (evidence(ar(0.96)), "inconclusive", ONE_MORE),
    (evidence(ar(0.94)), "clear", "stationary, largest AR root 0.94"),
    (evidence(ar(0.91, 0.1)), "inconclusive", ONE_MORE),
    (evidence(ar(0.96, NAN)), "inconclusive", ONE_MORE),
    (evidence(ar(0.96, period=2.0)), "clear", "stationary, largest AR root 0.96"),
    (evidence(ar(0.99, period=12.0)), "inconclusive", "a cycle that hardly fades"),
    (evidence(ar(0.9, period=12.0)), "clear", "stationary, largest AR root 0.90"),
    (evidence(ma(0.97), ma_at_one=0.1, differences=1), "inconclusive", TOO_MANY),
    (evidence(ma(0.999, NAN), ma_at_one=0.0, seasonal_difference=12), "inconclusive", TOO_MANY),
    (evidence(ma(0.97), ma_at_one=0.6, differences=1), "clear", "stationary, no AR root"),
    (evidence(ma(0.97), ma_at_one=0.1), "inconclusive", ALREADY),
    # the comparison of plans contradicts a root, or speaks for it
    (evidence(ar(0.96), share_more=0.04), "clear", "stationary, largest AR root 0.96"),
    (evidence(ar(0.96), share_more=0.06), "inconclusive", ONE_MORE),
    (evidence(ma(0.97), ma_at_one=0.1, differences=1, share_less=0.04), "clear", "stationary, no AR root"),
    (evidence(ma(0.97), ma_at_one=0.1, differences=1, share_less=0.06), "inconclusive", TOO_MANY),
    (evidence(ma(0.97), ma_at_one=0.6, differences=1, share_less=0.69), "clear", "stationary, no AR root"),
    (evidence(ma(0.97), ma_at_one=2.1, differences=1, share_less=0.71), "inconclusive", TOO_MANY),
    (evidence(ma(0.97), ma_at_one=2.3, differences=1, share_less=0.99), "clear", "stationary, no AR root"),
    (evidence(ma(0.97), ma_at_one=2.1, share_summed=0.71), "inconclusive", ALREADY),
    (evidence(ma(0.97), ma_at_one=0.1, share_summed=0.69), "clear", "stationary, no AR root"),
    (evidence(seasonal("AR", 0.97), share_wandering=0.04), "clear", "stationary, seasonal AR root 0.97"),
    (
        evidence(seasonal("MA", 0.97), seasonal_ma_at_one=0.1, seasonal_difference=12, share_fixed=0.01),
        "clear",
        "stationary, no AR root",
    ),
    (
        evidence(seasonal("MA", 0.97), seasonal_ma_at_one=0.1, seasonal_difference=12, share_fixed=0.2),
        "inconclusive",
        PATTERN,
    ),
    (
        evidence(seasonal("MA", 0.97), seasonal_ma_at_one=0.1, seasonal_difference=12, differences=1),
        "inconclusive",
        PATTERN,
    ),
    (evidence(seasonal("MA", 0.97), seasonal_ma_at_one=0.1), "clear", "stationary, no AR root"),
    (evidence(seasonal("AR", 0.97)), "inconclusive", "the season may wander"),
    (evidence(seasonal("AR", 0.97), seasonal_difference=12), "inconclusive", "the season still wanders"),
    (evidence(ar(1.0, NAN), psi_sum=INF, half_life=INF, variance_implied=INF), "inconclusive", ONE_MORE),
    (evidence(ar(0.7), psi_sum=INF, variance_implied=INF), "clear", "not stationary"),
    (evidence(ar(0.7), variance_implied=2.5), "clear", "model and sample differ in variance"),
    (evidence(ar(0.7), variance_implied=0.5), "clear", "model and sample differ in variance"),
    (
        evidence(ar(0.97), ma(0.95), common_factors=(CommonFactor(ar(0.97), ma(0.95), 0.02, 0.05),)),
        "clear",
        "the order may be too high",
    ),
    (
        evidence(ar(0.97), ma(0.95), common_factors=(CommonFactor(ar(0.97), ma(0.95), 0.02, NAN),)),
        "clear",
        "the order may be too high",
    ),
]


@pytest.mark.parametrize(("found", "verdict", "headline"), CASES, ids=range(len(CASES)))
def test_judgements(found: Evidence, verdict: str, headline: str) -> None:
    judged = RUNG.judge(found, Thresholds())
    assert (judged.verdict, judged.headline) == (verdict, headline)
    assert judged.steps == ()
    assert_reads_well(judged.headline, whole=False)
    assert_reads_well(judged.reason)


def test_reasons_have_the_numbers() -> None:
    def reason(found: Evidence) -> str:
        return RUNG.judge(found, Thresholds()).reason

    assert "0.960 with a standard error of 0.02" in reason(evidence(ar(0.96)))
    assert "halved only after 2.5 steps" in reason(evidence(ar(0.96)))
    assert "0.970 with a standard error of 0.1" in reason(evidence(seasonal("AR", 0.97)))
    assert "no finite sum" in reason(evidence(ar(1.0, NAN), psi_sum=INF, half_life=INF, variance_implied=INF))
    assert "costs only 0.10" in reason(evidence(ma(0.97), ma_at_one=0.1, differences=1))
    assert "cycle of 8.5 steps" in reason(evidence(ar(0.8, period=8.5)))


def test_the_bound_is_that_of_the_thresholds() -> None:
    assert RUNG.judge(evidence(ar(0.9)), Thresholds(near_unit_modulus=0.85)).headline == ONE_MORE


def test_a_problem_is_told() -> None:
    judged = RUNG.judge(Evidence(problem="nothing varies in the 20 values left after the plan."), Thresholds())
    assert (judged.verdict, judged.headline) == ("inconclusive", "not examined")
    assert_reads_well(judged.reason)


# ------------------------------------------------------------------------------------------------- examine
def examined(
    values: np.ndarray,
    steps: tuple[Step, ...] = (),
    given: np.ndarray | None = None,
    nuisance: np.ndarray | None = None,
) -> Evidence:
    index = pd.period_range("2010-01", periods=len(values if given is None else given), freq="M")
    series = TimeSeries("freight", pd.Series(values if given is None else given, index=index), None)
    transformed = pd.Series(values, index=index[len(index) - len(values) :])
    return RUNG.examine(series, Context(steps=steps, transformed=transformed, nuisance=nuisance))


def ar1(phi: float, n: int, seed: int) -> np.ndarray:
    noise = np.random.default_rng(seed).normal(size=n + 200)
    return np.asarray(lfilter([1.0], [1.0, -phi], noise)[200:])


def headlines(make: object, steps: tuple[Step, ...], count: int = 30) -> list[str]:
    return [RUNG.judge(examined(make(seed), steps), Thresholds()).headline for seed in range(count)]  # type: ignore[operator]


ONCE = (Difference(1),)


def test_measures_of_an_autoregression() -> None:
    found = examined(5.0 + ar1(0.6, 200, 2)).measures
    assert found["order"] == "ARMA(1,0)"
    (root,) = found["roots"]  # type: ignore[misc]
    assert root.modulus == pytest.approx(0.6, abs=3 * root.standard_error)
    (phi,) = found["ar"]  # type: ignore[misc]
    assert (found["ma"], found["seasonal_ar"], found["seasonal_ma"]) == ((), (), ())
    assert found["psi_sum"] == pytest.approx(1 / (1 - phi))
    assert found["half_life"] == pytest.approx(np.log(0.5) / np.log(phi))
    fit = found["fit"]
    assert isinstance(fit, ArmaFit)
    assert found["variance_implied"] == pytest.approx(fit.variance / (1 - phi**2))
    assert found["variance_sample"] == pytest.approx(found["variance_implied"], rel=0.3)
    assert found["mean_fitted"] is True
    assert found["mean"] == pytest.approx(5.0, abs=0.6)
    assert len(fit.innovations) == 200


def test_a_mean_is_fitted_unless_it_was_removed_or_differenced_twice() -> None:
    values = ar1(0.3, 80, 2)
    assert examined(values).measures["mean_fitted"] is True
    assert examined(values, ONCE).measures["mean_fitted"] is True
    assert examined(values, ONCE * 2).measures["mean_fitted"] is False
    assert examined(values, (Difference(12), Difference(1))).measures["mean_fitted"] is False
    assert examined(values, (RemoveTrend(),)).measures["mean_fitted"] is False


def test_seasonal_terms_need_a_seasonal_step() -> None:
    values = np.asarray(lfilter([1.0], [1.0, *[0.0] * 11, -0.8], np.random.default_rng(1).normal(size=340))[100:])
    assert "at 12" not in str(examined(values).measures["order"])
    assert "at 12" in str(examined(values, (Difference(12),)).measures["order"])
    assert examined(values, (RemovePattern(12),)).measures["season"] == 12


def test_one_difference_too_many_is_noted() -> None:
    def too_many(seed: int) -> np.ndarray:
        return np.diff(ar1(0.0, 109, seed))

    assert headlines(too_many, ONCE).count(TOO_MANY) >= 23
    # a random walk differenced once, and an invertible moving average
    assert headlines(lambda seed: ar1(0.0, 108, seed), ONCE).count(TOO_MANY) <= 3
    assert headlines(lambda seed: lfilter([1, -0.6], [1], ar1(0.0, 109, seed))[1:], ONCE).count(TOO_MANY) <= 4


def test_a_random_walk_left_alone_is_noted() -> None:
    assert headlines(lambda seed: ar1(0.0, 150, seed).cumsum(), ()).count(ONE_MORE) >= 12
    assert headlines(lambda seed: ar1(0.5, 150, seed), ()).count(ONE_MORE) <= 1


def test_a_differenced_pattern_is_noted() -> None:
    def patterned(seed: int) -> np.ndarray:
        values = 5 * np.sin(np.arange(133) * np.pi / 6) + ar1(0.0, 133, seed).cumsum()
        return np.diff(values[12:] - values[:-12])

    steps = (Difference(12), Difference(1))
    assert headlines(patterned, steps, 15).count(PATTERN) >= 10


def test_removed_pattern_line_and_shift_leave_no_trace() -> None:
    t = np.arange(96)
    late = (t >= 40) * 1.0
    columns = np.column_stack([np.eye(12)[t % 12], t / 96, late])
    at = pd.Period("2013-05", "M")
    steps = (RemoveTrend(), RemoveShift(at), RemovePattern(12))
    orders = []
    for seed in range(15):
        values = ar1(0.0, 96, seed)
        left = values - columns @ np.linalg.lstsq(columns, values, rcond=None)[0]
        orders.append(str(examined(left, steps).measures["order"]))
    assert sum("at 12" in order for order in orders) <= 3


def test_missing_values_are_skipped() -> None:
    values = np.log(np.array(pd.read_csv(REFERENCES / "air_passengers.csv", comment="#").iloc[:, 1], dtype=float))
    gaps = np.array([30, 31, 32, 80])
    given = np.exp(values)
    given[gaps] = np.nan
    filled = np.where(np.isnan(given), values.mean(), values)
    columns = np.eye(144)[:, gaps]
    for lag in (12, 1):
        filled, columns = difference(filled, lag), difference(columns, lag)
    steps = (Log(), Difference(12), Difference(1))
    found = examined(filled, steps, given, columns)
    assert found.measures["gaps"] == "skipped"
    # the whole series: -0.40, -0.56 (Box and Jenkins 1976, by least squares 0.4 and 0.6)
    assert found.measures["seasonal_ma"][0] == pytest.approx(-0.55, abs=0.06)  # type: ignore[index]
    fit = found.measures["fit"]
    assert isinstance(fit, ArmaFit)
    assert np.isnan(fit.innovations[gaps - 13]).all()


@pytest.mark.parametrize(
    "values", [np.zeros(0), np.full(30, 4.0), np.arange(5.0), 1e-17 * np.arange(30.0) + 0.0], ids=range(4)
)
def test_what_cannot_be_fitted_is_a_problem(values: np.ndarray) -> None:
    found = examined(values, (), np.linspace(100.0, 130.0, 31))
    assert found.problem
    assert_reads_well(RUNG.judge(found, Thresholds()).reason)


def test_without_a_transformed_series_there_is_nothing_to_examine() -> None:
    assert RUNG.examine(TimeSeries("freight", pd.Series(dtype=float), None), Context()).problem
