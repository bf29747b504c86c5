"""Is there a season at all? An F test of the pattern in a regression with lags."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import fdtrc

from preflight_magic.kernels.power_transform import lagged_design, residual_sum
from preflight_magic.kernels.restricted_likelihood import Array


@dataclass(frozen=True)
class Presence:
    """F test of no pattern; NaN where the series is too short for it."""

    statistic: float
    p_value: float
    numerator: int
    denominator: int

    @property
    def nobs(self) -> int:
        """Rows of the regression: it has a constant, a line and three lags besides the pattern."""
        return self.numerator + self.denominator + 5

    @property
    def standardised(self) -> float:
        """p-value standardised to 100 values, ``p sqrt(n / 100)``, at most a half.

        A p-value speaks the less for a season the longer the series is. Good (1992), The Bayes/non-Bayes compromise: a
        brief review, Journal of the American Statistical Association 87, 597-606.
        """
        return float(np.minimum(self.p_value * (self.nobs / 100.0) ** 0.5, 0.5))


def season_presence(values: Array, period: int) -> Presence:
    """F test of the seasonal contrasts in a regression on constant, line and three lags.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.
    period : int
        At least 2.

    Returns
    -------
    Presence
        The null is that no position of the cycle differs from another; the lags keep the level from passing for a
        season. Fisher's F test in a dynamic regression (common practice), exact only for large samples.
    """
    design, response, rank = lagged_design(values, period, (1, 2, 3))
    if rank < 0:
        return Presence(float("nan"), float("nan"), period - 1, 0)
    others = np.r_[0, 1, period + 1 : design.shape[1]]
    full, without = residual_sum(design, response), residual_sum(design[:, others], response)
    degrees = len(response) - rank
    if full <= 1e-20 * max(without, 1e-300):
        return Presence(float("inf") if without > 0 else 0.0, 0.0 if without > 0 else 1.0, period - 1, degrees)
    statistic = ((without - full) / (period - 1)) / (full / degrees)
    return Presence(statistic, float(fdtrc(period - 1, degrees, max(statistic, 0.0))), period - 1, degrees)
