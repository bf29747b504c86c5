"""Are the p-values of KPSS, Canova-Hansen and HEGY uniform under their null hypotheses?"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.canova_hansen import canova_hansen
from preflight_magic.kernels.seasonal_unit_root import hegy
from preflight_magic.kernels.unit_root import kpss
from tests.bench.calibration import distance

RUNS, LENGTH, FARTHEST = 2000, 400, 0.03
Draw = Callable[[np.random.Generator], np.ndarray]
PValues = Callable[[np.ndarray], dict[str, float]]


def white(rng: np.random.Generator) -> np.ndarray:
    """White noise."""
    return rng.standard_normal(LENGTH)


def pattern(period: int, coefficient: float) -> Draw:
    """A fixed pattern with AR(1) errors."""

    def draw(rng: np.random.Generator) -> np.ndarray:
        errors = lfilter([1.0], [1.0, -coefficient], rng.standard_normal(LENGTH + 100))[100:]
        return np.resize(3.0 * rng.standard_normal(period), LENGTH) + errors

    return draw


def seasonal_walk(period: int) -> Draw:
    """A random walk for each season."""

    def draw(rng: np.random.Generator) -> np.ndarray:
        return rng.standard_normal((-(-LENGTH // period), period)).cumsum(axis=0).ravel()[:LENGTH]

    return draw


def kpss_p(y: np.ndarray) -> dict[str, float]:
    """About a constant and about a line."""
    return {terms: kpss(y, terms, 0).p_value for terms in ("c", "ct")}  # type: ignore[union-attr]


def canova_hansen_p(period: int) -> PValues:
    """Joint, at the longest and at the shortest cycle."""

    def p_values(y: np.ndarray) -> dict[str, float]:
        found = canova_hansen(y, period, lagged=True)
        assert found is not None
        first, last = found.frequencies[0], found.frequencies[-1]
        return {"joint": found.p_value, f"cycle {first.cycle:g}": first.p_value, f"cycle {last.cycle:g}": last.p_value}

    return p_values


def hegy_p(period: int, terms: str, lags: int | None) -> PValues:
    """At zero, pi and one pair, and jointly."""

    def p_values(y: np.ndarray) -> dict[str, float]:
        found = hegy(y, period, terms, lags=lags)  # type: ignore[arg-type]
        assert found is not None
        each = {one.kind: one.p_value for one in found.roots}
        return {**each, "seasonal": found.seasonal.p_value, "all": found.all.p_value}

    return p_values


CASES: dict[str, tuple[Draw, PValues]] = {
    "KPSS, white noise": (white, kpss_p),
    "Canova-Hansen, s = 4, white noise": (pattern(4, 0.0), canova_hansen_p(4)),
    "Canova-Hansen, s = 4, AR(.5)": (pattern(4, 0.5), canova_hansen_p(4)),
    "Canova-Hansen, s = 12, white noise": (pattern(12, 0.0), canova_hansen_p(12)),
    "Canova-Hansen, s = 12, AR(.5)": (pattern(12, 0.5), canova_hansen_p(12)),
    "HEGY, s = 4, c": (seasonal_walk(4), hegy_p(4, "c", 0)),
    "HEGY, s = 12, ct": (seasonal_walk(12), hegy_p(12, "ct", 0)),
    "HEGY, s = 12, ct, 5 lags": (seasonal_walk(12), hegy_p(12, "ct", 5)),
}


@pytest.mark.slow
@pytest.mark.parametrize("case", CASES)
def test_p_values_are_uniform(case: str) -> None:
    draw, p_values = CASES[case]
    rng = np.random.default_rng(1995)
    drawn = [p_values(draw(rng)) for _ in range(RUNS)]
    for name in drawn[0]:
        p = np.array([one[name] for one in drawn])
        assert distance(p) < FARTHEST, name
        assert abs(np.mean(p < 0.05) - 0.05) < 0.015, name
