import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.calendar_length import calendar_gain
from preflight_magic.stamps import days_of

MARGIN = 14.0


def counted(n: int, freq: str = "M") -> dict[str, np.ndarray]:
    index = pd.period_range("1991-01", periods=n, freq=freq)
    found = {unit: days_of(index, unit) for unit in ("days", "workdays")}
    assert all(one is not None for one in found.values())
    return found  # type: ignore[return-value]


def gains(totals: np.ndarray, period: int = 12) -> dict[str, float]:
    found = calendar_gain(totals, counted(len(totals), "M" if period == 12 else "Q"), period)
    assert found is not None
    return dict(found.gains)


def noise(n: int, rng: np.random.Generator, phi: float = 0.0) -> np.ndarray:
    return np.asarray(lfilter([1.0], [1.0, -phi], rng.normal(size=n + 100))[100:])


RATES = {
    "flat": lambda n, rng: np.exp(0.02 * noise(n, rng)),
    "line": lambda n, rng: np.exp(0.4 * np.arange(n) / n + 0.02 * noise(n, rng, 0.5)),
    "smooth season": lambda n, rng: np.exp(0.2 * np.cos(2 * np.pi * np.arange(n) / 12) + 0.02 * noise(n, rng)),
    "walk": lambda n, rng: np.exp(0.02 * noise(n, rng).cumsum()),
    "free season": lambda n, rng: np.exp(np.resize(0.2 * rng.normal(size=12), n) + 0.005 * noise(n, rng)),
}


@pytest.mark.parametrize("unit", ["days", "workdays"])
@pytest.mark.parametrize("rate", RATES)
def test_totals_of_daily_rates_follow_their_days(rate: str, unit: str) -> None:
    rng = np.random.default_rng(3)
    hits = 0
    for _ in range(20):
        found = gains(RATES[rate](120, rng) * counted(120)[unit])
        hits += found[unit] > MARGIN and found[unit] == max(found.values())
    assert hits >= 17


ORDINARY = {
    "noise": lambda n, rng: 20 + noise(n, rng),
    "autoregression": lambda n, rng: 30 + noise(n, rng, 0.8),
    "line": lambda n, rng: 20 + 0.1 * np.arange(n) + noise(n, rng, 0.5),
    "walk, far": lambda n, rng: 100 + noise(n, rng).cumsum(),
    "walk, near": lambda n, rng: 4 * np.sqrt(n) + noise(n, rng).cumsum(),
    "growth": lambda n, rng: np.exp(0.01 * np.arange(n) + 0.03 * noise(n, rng, 0.5)),
    "fixed season": lambda n, rng: 30 + np.resize(3 * rng.normal(size=12), n) + noise(n, rng, 0.3),
    "fixed season in logs": lambda n, rng: np.exp(np.resize(0.1 * rng.normal(size=12), n) + 0.02 * noise(n, rng)),
    "season, walk": lambda n, rng: 80 + np.resize(2 * rng.normal(size=12), n) + noise(n, rng).cumsum(),
}


@pytest.mark.parametrize("kind", ORDINARY)
def test_ordinary_series_do_not(kind: str) -> None:
    rng = np.random.default_rng(4)
    largest = [max(gains(ORDINARY[kind](n, rng)).values()) for n in (48, 96, 144) for _ in range(35)]
    assert sum(gain > MARGIN for gain in largest) <= (0 if "walk" in kind else 1)


def test_quarters_and_gaps() -> None:
    rng = np.random.default_rng(5)
    totals = np.exp(0.004 * noise(80, rng)) * counted(80, "Q")["days"]
    totals[[10, 30, 31]] = np.nan
    assert gains(totals, 4)["days"] > MARGIN


def test_the_unit_does_not_matter_and_one_wild_value_does_not_decide() -> None:
    rng = np.random.default_rng(6)
    totals = RATES["smooth season"](120, rng) * counted(120)["days"]
    plain = gains(totals)
    for factor in (1e-12, 1e12):
        assert gains(factor * totals) == pytest.approx(plain, abs=1e-6)
    totals[70] *= 3.0
    assert gains(totals)["days"] > MARGIN


def test_the_waves_tell_the_pattern() -> None:
    rng = np.random.default_rng(7)
    days = counted(120)

    def waves(rate: str) -> int:
        found = calendar_gain(RATES[rate](120, rng) * days["days"], days, 12)
        assert found is not None
        return found.waves

    assert (waves("flat"), waves("smooth season"), waves("free season")) == (0, 1, 6)


def test_too_few_values_and_none_that_vary_are_not_compared() -> None:
    days = counted(36)
    assert calendar_gain(np.full(36, 3.0), days, 12) is None
    short = np.full(36, np.nan)
    short[:12] = np.arange(1.0, 13.0)
    assert calendar_gain(short, days, 12) is None
    exact = calendar_gain(5.0 * days["days"], days, 12)
    assert exact is not None
    assert exact.best == "days"
