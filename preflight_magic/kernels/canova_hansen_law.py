"""p-values of Canova-Hansen statistics: their limit, moved and stretched to the moments of a finite sample.

Where cycles are few, the long-run variance that divides the statistic is estimated from few values: the mean of the
statistic is too large and its spread much too small for the limit. A simulated surface holds both moments.
"""

from __future__ import annotations

from functools import cache
from math import exp
from typing import Literal

import numpy as np

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.quadratic_forms import cramer_von_mises_p_value
from preflight_magic.kernels.tables import read

Kind = Literal["joint", "pair", "pi"]

FORMULA = "a x + b x^2 + c v + d v^2 + e x v + f w + g w^2 + h v w + i / n with x = k / n, v = m l / n and w = l / n"
COEFFICIENTS = "abcdefghi"
_MOST_X, _MOST_V, _MOST_W = 0.4, 1.0, 0.2  # the table goes no further


def moment_basis(degrees: int, n: int, columns: int, bandwidth: int) -> FloatArray:
    """Regressors of the logarithm of a moment, in the order of `FORMULA`.

    Parameters
    ----------
    degrees, n, columns, bandwidth : int
        Degrees of freedom of the statistic, observations, columns of the regression, last autocovariance.

    Returns
    -------
    ndarray, shape (9,)
    """
    x, w = min(columns / n, _MOST_X), min(bandwidth / n, _MOST_W)
    v = min(degrees * w, _MOST_V)
    return np.array([x, x * x, v, v * v, x * v, w, w * w, v * w, 1.0 / n])


def canova_hansen_p_value(statistic: float, kind: Kind, degrees: int, n: int, columns: int, bandwidth: int) -> float:
    """Probability of a larger statistic under a fixed pattern.

    Parameters
    ----------
    statistic : float
    kind : {"joint", "pair", "pi"}
    degrees : int
        Of freedom: period less one, 2 or 1.
    n, columns, bandwidth : int
        Observations, columns of the regression, last autocovariance in the long-run variance.

    Returns
    -------
    float

    References
    ----------
    Limit, generalised von Mises: Canova and Hansen (1995), Journal of Business and Economic Statistics 13, with mean
    ``m / 6`` and variance ``m / 45``. Moments in a finite sample: our own simulation, tests/simulation.
    """
    if kind == "joint" and degrees < 3:
        kind = "pair" if degrees == 2 else "pi"  # there is nothing to join
    basis = moment_basis(degrees, n, columns, bandwidth)
    mean, spread = (exp(float(one @ basis)) for one in _moments()[kind])
    moved = degrees / 6.0 + (statistic - mean * degrees / 6.0) / spread
    return cramer_von_mises_p_value(max(moved, 0.0), degrees)


@cache
def _moments() -> dict[str, tuple[FloatArray, FloatArray]]:
    found: dict[str, dict[str, FloatArray]] = {}
    for row in read("canova_hansen"):
        found.setdefault(row["kind"], {})[row["moment"]] = np.array([float(row[name]) for name in COEFFICIENTS])
    return {kind: (both["mean"], both["spread"]) for kind, both in found.items()}
