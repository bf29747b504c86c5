"""Size at nominal 5 % of every test that is shown, and how far its p-values are from uniform; prints a table.

Run ``OPENBLAS_NUM_THREADS=1 python -m tests.bench.calibration [replications]`` from the root of the project. Each
series is drawn where the null hypothesis holds, and tested as the rungs test it: with their terms, lags and bandwidths.
Then follow series that the null hypothesis allows but that are known to be hard, as with a moving average.

Sizes are shares of p-values below 0.05 at n = 50, 100 and 400; the last column is the Kolmogorov distance of the
p-values from uniform at n = 400.
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator

import numpy as np
from scipy.signal import lfilter

from preflight_magic.kernels.correlation import ljung_box
from preflight_magic.kernels.residual_tests import arch_lm, jarque_bera
from preflight_magic.kernels.seasonal_evidence import seasonal_evidence
from preflight_magic.kernels.seasonal_presence import season_presence
from preflight_magic.kernels.trend_evidence import trend_evidence
from preflight_magic.kernels.unit_root_evidence import level_tests, root_tests

LENGTHS = (50, 100, 400)
SEED = 20261201
Draw = Callable[[np.random.Generator, int], np.ndarray]
PValues = Callable[[np.ndarray], dict[str, float]]


def white(rng: np.random.Generator, n: int) -> np.ndarray:
    """White noise."""
    return rng.standard_normal(n)


def walk(rng: np.random.Generator, n: int) -> np.ndarray:
    """A random walk."""
    return rng.standard_normal(n).cumsum()


def autoregression(coefficient: float) -> Draw:
    """A stationary AR(1)."""
    return lambda rng, n: np.asarray(lfilter([1.0], [1.0, -coefficient], rng.standard_normal(n + 100))[100:])


def moving_walk(theta: float) -> Draw:
    """A walk whose changes are a moving average."""
    return lambda rng, n: np.asarray(lfilter([1.0, theta], [1.0], rng.standard_normal(n + 1))[1:].cumsum())


def pattern(period: int, draw: Draw) -> Draw:
    """A fixed pattern, three standard deviations in size, and errors."""
    return lambda rng, n: np.resize(3.0 * rng.standard_normal(period), n) + draw(rng, n)


def seasonal_walk(period: int, theta: float = 0.0) -> Draw:
    """A random walk for each season, its steps with a seasonal moving average."""

    def draw(rng: np.random.Generator, n: int) -> np.ndarray:
        steps = rng.standard_normal((-(-n // period) + 1, period))
        return np.asarray((steps[1:] + theta * steps[:-1]).cumsum(axis=0).ravel()[:n])

    return draw


def of_roots(y: np.ndarray) -> dict[str, float]:
    """All tests of a unit root of the level."""
    return {f"{one.test} {one.terms}": one.p_value for one in level_tests(y, "", str) if one.test != "KPSS"}


def of_stationarity(y: np.ndarray) -> dict[str, float]:
    """KPSS about a constant and about a line."""
    return {f"{one.test} {one.terms}": one.p_value for one in root_tests(y, "") if one.test == "KPSS"}


def of_trend(y: np.ndarray) -> dict[str, float]:
    """The robust test of a trend."""
    found = trend_evidence(y, 1, None, False, False, "").test
    return {} if found is None else {found.test: found.p_value}


def of_pattern(period: int) -> PValues:
    """The F test of a pattern."""
    return lambda y: {f"F test of the pattern, s = {period}": season_presence(y, period).p_value}


def of_season(period: int, name: str, differences: int) -> PValues:
    """HEGY or Canova-Hansen, jointly and at the longest and the shortest cycle."""

    def p_values(y: np.ndarray) -> dict[str, float]:
        found = seasonal_evidence(y, period, differences, "")
        each = found.hegy if name == "HEGY" else found.canova_hansen
        named = {f"cycle {cycle}": each[cycle] for cycle in sorted(each, key=float)[:: max(len(each) - 1, 1)]}
        joint = next((test.p_value for test in found.tests if test.test == name), None)
        named |= {} if joint is None else {"joint": joint}
        return {f"{name}, s = {period}, {part}": value for part, value in named.items()}

    return p_values


def of_innovations(y: np.ndarray) -> dict[str, float]:
    """Tests of the residuals, where nothing was fitted."""
    short, long = (min(lags, y.size // 5) for lags in (10, 24))  # as the rung takes them
    found = {
        "Ljung-Box, 10 lags": ljung_box(y, short),
        "Ljung-Box, 10, 20 and 24 lags": ljung_box(y, long),
        "ARCH-LM, 4 lags": arch_lm(y, 4),
        "Jarque-Bera": jarque_bera(y),
    }
    return {name: one.p_value for name, one in found.items() if one is not None}


NULL: dict[str, tuple[Draw, PValues]] = {
    "random walk": (walk, of_roots),
    "white noise": (white, of_stationarity),
    "white noise, no trend": (white, of_trend),
    "random walk, no trend": (walk, of_trend),
    "white noise, no season of 4": (white, of_pattern(4)),
    "white noise, no season of 12": (white, of_pattern(12)),
    "a walk for each of 4 seasons": (seasonal_walk(4), of_season(4, "HEGY", 0)),
    "a walk for each of 12 seasons": (seasonal_walk(12), of_season(12, "HEGY", 0)),
    "fixed pattern of 4, white noise": (pattern(4, white), of_season(4, "Canova-Hansen", 0)),
    "fixed pattern of 12, white noise": (pattern(12, white), of_season(12, "Canova-Hansen", 0)),
    "fixed pattern of 4, random walk": (pattern(4, walk), of_season(4, "Canova-Hansen", 1)),
    "fixed pattern of 12, random walk": (pattern(12, walk), of_season(12, "Canova-Hansen", 1)),
    "normal white noise": (white, of_innovations),
}
"""Series under the null hypothesis, and the tests of it."""

HARD: dict[str, tuple[Draw, PValues]] = {
    "walk, MA(-.5) in the changes": (moving_walk(-0.5), of_roots),
    "walk, MA(.5) in the changes": (moving_walk(0.5), of_roots),
    "AR(.5)": (autoregression(0.5), of_stationarity),
    "AR(.8)": (autoregression(0.8), of_stationarity),
    "AR(.5), no trend": (autoregression(0.5), of_trend),
    "AR(.8), no trend": (autoregression(0.8), of_trend),
    "walk, MA(-.5), no trend": (moving_walk(-0.5), of_trend),
    "4 walks, seasonal MA(-.4)": (seasonal_walk(4, -0.4), of_season(4, "HEGY", 0)),
    "12 walks, seasonal MA(-.4)": (seasonal_walk(12, -0.4), of_season(12, "HEGY", 0)),
    "pattern of 12, AR(.5)": (pattern(12, autoregression(0.5)), of_season(12, "Canova-Hansen", 0)),
    "pattern of 4, walk with MA(-.5)": (pattern(4, moving_walk(-0.5)), of_season(4, "Canova-Hansen", 1)),
}
"""Series that the null hypothesis allows, and that are known to be hard."""


def p_values(draw: Draw, test: PValues, n: int, replications: int) -> dict[str, np.ndarray]:
    """p-values by test, shape (replications,); tests that the series cannot carry are left out."""
    rng = np.random.default_rng([SEED, n])
    found: dict[str, list[float]] = {}
    for _ in range(replications):
        for name, value in test(draw(rng, n)).items():
            found.setdefault(name, []).append(value)
    return {name: np.array(values) for name, values in found.items() if len(values) == replications}


def size(p: np.ndarray) -> float:
    """Share below 0.05."""
    return float(np.mean(p < 0.05))


def distance(p: np.ndarray) -> float:
    """Kolmogorov distance from uniform."""
    place, ordered = np.arange(p.size + 1) / p.size, np.sort(p)
    return max(float((place[1:] - ordered).max()), float((ordered - place[:-1]).max()))


def rows(cases: dict[str, tuple[Draw, PValues]], replications: int) -> Iterator[tuple[str, str, list[float], float]]:
    """Series, test, size at each length (NaN where the test cannot be carried), distance at the longest."""
    for series, (draw, test) in cases.items():
        by_length = [p_values(draw, test, n, replications) for n in LENGTHS]
        for name, last in by_length[-1].items():
            sizes = [size(found[name]) if name in found else float("nan") for found in by_length]
            yield series, name, sizes, distance(last)


def main() -> None:
    """Print both tables."""
    replications = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    error = (0.05 * 0.95 / replications) ** 0.5
    print(f"{replications} series a cell, seed {SEED}; a size of 0.05 has the standard error {error:.4f}\n")
    for cases in (NULL, HARD):
        heads = "".join(f" n = {n} |" for n in LENGTHS)
        print(f"| series | test |{heads} distance, n = {LENGTHS[-1]} |")
        print("| --- | --- |" + " --- |" * (len(LENGTHS) + 1))
        for series, name, sizes, far in rows(cases, replications):
            shown = " | ".join("" if np.isnan(one) else f"{one:.3f}" for one in sizes)
            print(f"| {series} | {name} | {shown} | {far:.3f} |", flush=True)
        print()


if __name__ == "__main__":
    main()
