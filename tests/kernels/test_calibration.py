"""Tests as the rungs show them err about as often as they should: a sample of tests/bench/calibration.py."""

import numpy as np
import pytest

from tests.bench.calibration import NULL, distance, p_values, size

RUNS = 600
CLOSE = 0.015
ERROR = 2.5 * (0.05 * 0.95 / RUNS) ** 0.5
# Lags by the modified AIC reject somewhat too seldom where the errors are white: Ng and Perron (2001), Econometrica 69.
SELDOM = ("ADF", "DF-GLS", "Zivot-Andrews", "union of rejections", "HEGY")
# In fifty values the skewness and the kurtosis of normal values are far from normal themselves, and so are sums of
# squares of squares: Jarque and Bera (1987), International Statistical Review 55, give finite-sample points for that.
FEW = {"Jarque-Bera": 0.02, "ARCH-LM": 0.02}


@pytest.mark.slow
@pytest.mark.parametrize("series", NULL)
@pytest.mark.parametrize("n", [50, 100])
def test_size_of_what_is_shown(series: str, n: int) -> None:
    found = p_values(*NULL[series], n, RUNS)
    assert found or n == 50
    for name, p in found.items():
        share = size(p)
        assert share < 0.05 + CLOSE + ERROR, name
        lowest = 0.01 if name.startswith(SELDOM) else next((low for key, low in FEW.items() if key in name), None)
        assert share > (0.05 - CLOSE - ERROR if lowest is None else lowest), name


def test_distance_and_size_of_known_values() -> None:
    assert distance((np.arange(1000) + 0.5) / 1000) == pytest.approx(0.0005)
    assert distance(np.full(10, 0.2)) == pytest.approx(0.8)
    assert size(np.array([0.01, 0.04, 0.05, 0.9])) == 0.5
