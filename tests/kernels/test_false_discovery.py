"""Shares of false rejections."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import false_discovery_control
from statsmodels.stats.multitest import multipletests

from preflight_magic.kernels.false_discovery import adjusted


def test_example_of_the_paper():
    # Benjamini and Hochberg (1995), section 3.2: 15 hypotheses, of which the first four are rejected at 0.05.
    p = [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528]
    p += [0.7590, 1.0000]
    assert (adjusted(p) <= 0.05).sum() == 4
    assert adjusted(p)[3] == pytest.approx(15 * 0.0095 / 4)


@pytest.mark.parametrize("m", [1, 2, 7, 400])
def test_same_as_scipy_and_statsmodels(m):
    p = np.random.default_rng(m).beta(0.5, 1.0, m).round(3)
    np.testing.assert_allclose(adjusted(p), false_discovery_control(p), rtol=1e-14)
    np.testing.assert_allclose(adjusted(p), multipletests(p, method="fdr_bh")[1], rtol=1e-14)


def test_missing_tests_do_not_count():
    found = adjusted([0.04, np.nan, 0.01, np.nan])
    np.testing.assert_allclose(found, [0.04, np.nan, 0.02, np.nan])
    assert np.isnan(adjusted([np.nan])).all()
    assert adjusted([]).size == 0


def test_share_of_false_rejections_is_held():
    rng = np.random.default_rng(4)
    shares = []
    for _ in range(400):
        p = rng.random(200)
        p[:40] = rng.beta(0.05, 1.0, 40)
        rejected = adjusted(p) <= 0.1
        shares.append(rejected[40:].sum() / max(rejected.sum(), 1))
    # Expected 0.1 * 160 / 200 = 0.08; the mean of 400 has a standard error of about 0.002.
    assert 0.06 < np.mean(shares) < 0.09
