import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.arma import ArmaFit, fit
from preflight_magic.kernels.arma_parameters import Order
from preflight_magic.kernels.arma_roots import inverse_roots
from preflight_magic.kernels.root_bootstrap import root_bootstrap


def fitted(ar: list[float], ma: list[float], order: Order, n: int, seed: int, mean: bool = True) -> ArmaFit:
    noise = np.random.default_rng(seed).standard_normal(n + 400)
    found = fit(lfilter(ma, ar, noise)[400:], order, mean=mean)
    assert found is not None
    return found


def test_seed_decides() -> None:
    found = fitted([1.0, -0.9], [1.0], Order(1), 60, 1)
    once, again, other = (root_bootstrap(found, replications=99, seed=seed) for seed in (4, 4, 5))
    assert once == again
    assert once.intervals != other.intervals
    assert (once.coverage, once.replications, once.seed) == (0.9, 99, 4)


def test_far_from_the_circle_it_is_the_interval_of_the_delta_method() -> None:
    found = fitted([1.0, -0.5], [1.0], Order(1), 500, 3)
    (one,) = root_bootstrap(found).intervals
    # 1.645 standard errors cover 90 % of a normal distribution.
    assert one.lower == pytest.approx(one.root.modulus - 1.645 * one.root.standard_error, abs=0.015)
    assert one.upper == pytest.approx(one.root.modulus + 1.645 * one.root.standard_error, abs=0.015)


def test_near_the_circle_it_leans_to_one_as_the_estimate_leans_away() -> None:
    found = fitted([1.0, -0.97], [1.0], Order(1), 80, 0)
    (one,) = root_bootstrap(found).intervals
    assert one.upper - one.root.modulus > 1.1 * (one.root.modulus - one.lower)
    assert one.upper <= 1.0


def test_a_moving_average_at_the_edge_has_an_interval_that_reaches_one() -> None:
    values = np.diff(np.random.default_rng(2).standard_normal(100))
    found = fit(values, Order(0, 1), mean=True)
    assert found is not None
    (one,) = root_bootstrap(found, replications=99).intervals
    assert one.root.modulus > 0.999
    assert np.isnan(one.root.standard_error)
    # Of a root at 0.8 some 15 % of the estimates end at one here, so 0.9 cannot be excluded and 0.6 can.
    assert 0.6 < one.lower < 0.9
    assert one.upper == 1.0


def test_every_root_has_its_interval() -> None:
    ar = np.convolve([1.0, -1.4, 0.72], [1.0, 0.0, 0.0, 0.0, -0.6])
    found = fitted(list(ar), [1.0], Order(2, 0, 1, 0, 4), 120, 6, mean=False)
    both = root_bootstrap(found, replications=99)
    assert [one.root for one in both.intervals] == list(
        inverse_roots(found.order, found.coefficients, found.covariance)
    )
    assert all(one.lower < one.root.modulus < one.upper for one in both.intervals)
    # A seasonal root of 0.6 in the lag of 4 is 0.6**(1/4) = 0.88 a step.
    seasonal = next(one for one in both.intervals if one.root.seasonal)
    assert seasonal.lower < 0.6**0.25 < seasonal.upper
    large = root_bootstrap(found, replications=99, from_modulus=0.89)
    assert large.intervals == tuple(one for one in both.intervals if one.root.modulus >= 0.89)
    assert len(large.intervals) == 1


def test_wider_coverage_gives_a_wider_interval() -> None:
    found = fitted([1.0], [1.0, -0.7], Order(0, 1), 80, 7)
    narrow, wide = (root_bootstrap(found, coverage=level, replications=99).intervals[0] for level in (0.5, 0.95))
    assert wide.lower < narrow.lower < narrow.upper < wide.upper


def test_missing_values_need_their_columns() -> None:
    values = lfilter([1.0], [1.0, -0.8], np.random.default_rng(9).standard_normal(90))
    gaps = np.eye(90)[:, [20, 21, 22, 23, 50]]
    found = fit(values, Order(1), mean=True, nuisance=gaps)
    assert found is not None
    with pytest.raises(ValueError, match="nuisance columns"):
        root_bootstrap(found)
    (one,) = root_bootstrap(found, nuisance=gaps, replications=99).intervals
    assert one.lower < one.root.modulus < one.upper


def test_white_noise_has_no_roots() -> None:
    assert root_bootstrap(fitted([1.0], [1.0], Order(), 50, 2)).intervals == ()


def test_refuses_what_makes_no_interval() -> None:
    found = fitted([1.0, -0.5], [1.0], Order(1), 50, 2)
    with pytest.raises(ValueError, match="coverage"):
        root_bootstrap(found, coverage=1.0)
    with pytest.raises(ValueError, match="replications"):
        root_bootstrap(found, replications=50)


@pytest.mark.simulation
@pytest.mark.parametrize(
    ("ar", "ma", "order", "mean", "truth"),
    [
        ([1.0, -0.96], [1.0], Order(1), True, 0.96),
        ([1.0], [1.0, -0.95], Order(0, 1), False, 0.95),
    ],
    ids=["AR", "MA"],
)
def test_the_intervals_cover_the_truth_as_often_as_they_say(
    ar: list[float], ma: list[float], order: Order, mean: bool, truth: float
) -> None:
    runs = 30
    hits, lower = 0, 0.0
    for run in range(runs):
        one = root_bootstrap(fitted(ar, ma, order, 60, 1000 + run, mean), replications=99).intervals[0]
        hits += one.lower <= truth <= one.upper
        lower += one.lower / runs
    # 27 are expected at 90 %; three standard errors of the count are 5.
    assert hits >= 22
    assert lower > truth - 0.25  # and not because they hold everything
