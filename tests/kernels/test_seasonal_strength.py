import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from statsmodels.tsa.seasonal import STL, seasonal_decompose

from preflight_magic.kernels.seasonal_strength import average_strength, stl_strength


def series(n: int = 120, period: int = 12, size: float = 2.0, slope: float = 0.05) -> np.ndarray:
    rng = np.random.default_rng(1)
    return size * np.resize(rng.standard_normal(period), n) + slope * np.arange(n) + rng.standard_normal(n)


@pytest.mark.parametrize("robust", [False, True])
def test_stl_strength_is_that_of_the_decomposition(robust: bool) -> None:
    y = series()
    parts = STL(y, period=12, robust=robust).fit()
    found = stl_strength(y, 12, robust)
    assert found is not None
    # Wang, Smith and Hyndman (2006).
    assert found.seasonal == pytest.approx(1.0 - np.var(parts.resid) / np.var(parts.seasonal + parts.resid), rel=1e-6)
    assert found.trend == pytest.approx(1.0 - np.var(parts.resid) / np.var(parts.trend + parts.resid), rel=1e-6)


@pytest.mark.parametrize("period", [4, 7, 12])
@pytest.mark.parametrize("n", [84, 90])
def test_average_strength_is_that_of_the_classical_decomposition(period: int, n: int) -> None:
    y = series(n, period)
    parts = seasonal_decompose(y, period=period)
    rest, seasonal, trend = (np.asarray(one) for one in (parts.resid, parts.seasonal, parts.trend))
    seen = np.isfinite(rest)
    found = average_strength(y, period)
    assert found is not None
    expected = 1.0 - np.var(rest[seen]) / np.var((seasonal + rest)[seen])
    assert found.seasonal == pytest.approx(expected, rel=1e-9)
    assert found.trend == pytest.approx(1.0 - np.var(rest[seen]) / np.var((trend + rest)[seen]), rel=1e-9)


@pytest.mark.parametrize("strength", [stl_strength, average_strength])
def test_strength_grows_with_the_pattern(strength) -> None:
    found = [strength(series(size=size, slope=0.0), 12) for size in (0.0, 0.5, 2.0, 20.0)]
    sizes = [one.seasonal for one in found]
    assert sizes == sorted(sizes)
    assert sizes[-1] > 0.99
    assert sizes[0] < 0.6
    assert strength(series(slope=1.0), 12).trend > 0.99


@pytest.mark.parametrize("strength", [stl_strength, average_strength])
@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e5)])
def test_neither_unit_nor_origin_is_seen(strength, scale: float, constant: float) -> None:
    plain, other = strength(series(), 12), strength(scale * series() + constant, 12)
    assert other.seasonal == pytest.approx(plain.seasonal, rel=1e-6)
    assert other.trend == pytest.approx(plain.trend, rel=1e-6)


@pytest.mark.parametrize("strength", [stl_strength, average_strength])
def test_what_cannot_carry_it_is_none(strength) -> None:
    assert strength(np.full(60, 0.1), 12) is None
    assert strength(series(24), 12) is None
    assert strength(np.full(60, np.nan), 12) is None
    y = series()
    y[[4, 50, 51]] = np.nan
    assert strength(y, 12).seasonal == pytest.approx(strength(series(), 12).seasonal, abs=0.1)
    with pytest.raises(ValueError, match="period"):
        strength(series(), 1)


def test_statsmodels_waits_until_stl_is_asked_for() -> None:
    code = (
        "import sys, numpy as np; from preflight_magic.kernels.seasonal_strength import average_strength; "
        "assert average_strength(np.sin(np.arange(60.0)), 12) is not None; assert 'statsmodels' not in sys.modules"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=Path(__file__).parents[2], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr
