"""Diebold-Mariano with its correction, by formula; scales of errors, by hand."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import t as student

from preflight_magic.kernels.forecast_comparison import diebold_mariano, naive_scale


def test_by_hand() -> None:
    first = np.array([1.0, 4.0, 2.0, 5.0, 3.0, 6.0])
    second = np.array([2.0, 2.0, 2.0, 2.0, 2.0, 2.0])
    found = diebold_mariano(first, second, 1)
    assert found is not None
    # d = -1, 2, 0, 3, 1, 4: mean 1.5, variance over n 35/12; statistic 1.5 / sqrt(35/12/6) times sqrt((6 + 1 - 2)/6)
    # by Harvey, Leybourne and Newbold (1997), equation 9, with h = 1
    assert found.statistic == pytest.approx(1.5 / np.sqrt(35 / 72) * np.sqrt(5 / 6))
    assert found.p_value == pytest.approx(2 * student.sf(found.statistic, 5))
    assert found.degrees == 5


@pytest.mark.parametrize("h", [2, 4])
def test_overlapping_losses_by_formula(h: int) -> None:
    rng = np.random.default_rng(h)
    d = np.convolve(rng.normal(0.4, 1.0, 60), np.ones(h), "valid")
    found = diebold_mariano(d, np.zeros_like(d), h)
    assert found is not None
    n, c = len(d), d - d.mean()
    # Diebold and Mariano (1995): the rectangular window with h - 1 lags; Harvey, Leybourne and Newbold (1997): the rest
    variance = (c @ c + 2 * sum(c[k:] @ c[:-k] for k in range(1, h))) / n
    corrected = np.sqrt((n + 1 - 2 * h + h * (h - 1) / n) / n) * d.mean() / np.sqrt(variance / n)
    assert found.statistic == pytest.approx(corrected)
    assert found.p_value == pytest.approx(2 * student.sf(abs(corrected), n - 1))


def test_swapping_changes_the_sign_alone() -> None:
    rng = np.random.default_rng(5)
    one, two = rng.normal(size=20) ** 2, rng.normal(size=20) ** 2
    there, back = diebold_mariano(one, two, 2), diebold_mariano(two, one, 2)
    assert there is not None
    assert back is not None
    assert there.statistic == pytest.approx(-back.statistic)
    assert there.p_value == pytest.approx(back.p_value)


def test_size_within_two_standard_errors() -> None:
    # Normal loss differences without overlap: the corrected statistic is then Student's t exactly.
    rejected = 0
    for seed in range(400):
        one, two = np.random.default_rng(seed).normal(size=(2, 12))
        found = diebold_mariano(one, two, 1)
        assert found is not None
        rejected += found.p_value < 0.05
    assert abs(rejected / 400 - 0.05) <= 2 * np.sqrt(0.05 * 0.95 / 400)


def test_where_nothing_can_be_said() -> None:
    same = np.arange(5.0)
    assert diebold_mariano(same, same, 1) is None
    assert diebold_mariano(same[:1], same[1:2], 1) is None
    assert diebold_mariano(same, same - 1.0, 1) is None
    # n + 1 - 2 h + h (h - 1) / n is positive for every h below n; the long-run variance need not be
    assert diebold_mariano(np.tile([1.0, -1.0], 6), np.zeros(12), 2) is None


def test_scales() -> None:
    values = np.array([1.0, 3.0, np.nan, 6.0, 4.0, 9.0])
    # changes 2, -2, 5 where both values are observed
    assert naive_scale(values, 1) == pytest.approx((3.0, 11.0))
    # at lag 2: 3, 1, 3 -> only pairs (3, 6), (6, 9)
    assert naive_scale(values, 2) == pytest.approx((3.0, 9.0))
    # no whole season: the change from step to step
    assert naive_scale(values, 12) == pytest.approx((3.0, 11.0))
    assert np.isnan(naive_scale(np.ones(8), 1)).all()
    assert np.isnan(naive_scale(np.array([np.nan, 1.0, np.nan]), 1)).all()
