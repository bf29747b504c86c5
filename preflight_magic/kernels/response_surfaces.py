"""p-values and critical values from simulated quantiles, each a surface in the sample size.

A table holds, for each case and level, the coefficients of a quantile of the statistic in a series of n values as a
function of n and of the lags, in the manner of Cheung and Lai (1995), Journal of Business and Economic Statistics 13.
Between the levels of the table the normal quantile of the p-value runs straight in the statistic; MacKinnon (1996),
Journal of Applied Econometrics 11, fits it locally in much the same way.
"""

from __future__ import annotations

from functools import cache, lru_cache

import numpy as np
from scipy.special import ndtr, ndtri

from preflight_magic.kernels.distributions import Bound
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.tables import read

SHORTEST = 20
"""Length from which the tables are simulated; a shorter series is read as one of this length."""
LAG_SHARE = 4
"""More lags than one in so many values are read as that many: the tables go no further."""
FORMULA = "a + b / n + c / n^2 + d / n^3 + e p + f p^2 + g p / n + h / (n - 2 - 2 lags)^2 with p = lags / n"
COEFFICIENTS = "abcdefgh"

_NAMED = ("1%", "5%", "10%")


def surface_basis(n: FloatArray | float, lags: FloatArray | float) -> FloatArray:
    """Regressors of a response surface, in the order of `FORMULA`.

    Parameters
    ----------
    n, lags : float or ndarray, shape (cells,)
        Length of the series and lagged differences in the regression.

    Returns
    -------
    ndarray, shape (8,) or (cells, 8)
    """
    x = 1.0 / np.asarray(n, dtype=np.float64)
    share = lags * x
    # What is left of the degrees of freedom decides how heavy the tails are in a short series.
    freedom = 1.0 / (1.0 / x - 2.0 - 2.0 * lags)
    columns = [np.ones_like(x), x, x**2, x**3, share, share**2, share * x, freedom**2]
    basis: FloatArray = np.stack(columns, axis=-1)
    return basis


def lower_tail(statistic: float, table: str, case: str, n: int, lags: int = 0) -> tuple[float, Bound]:
    """Probability of a smaller statistic under the null hypothesis.

    Parameters
    ----------
    statistic : float
    table : str
        Name of the file without its suffix.
    case : str
        Which rows of it.
    n : int
        Length of the series.
    lags : int
        Lagged differences in the regression.

    Returns
    -------
    p_value : float
    bound : {"exact", "at most", "at least"}
        Beyond the outermost levels of the table these are returned, as a bound.
    """
    levels, quantiles = _quantiles(table, case, n, lags)
    if statistic <= quantiles[0]:
        return float(levels[0]), "at most"
    if statistic >= quantiles[-1]:
        return float(levels[-1]), "at least"
    return float(ndtr(np.interp(statistic, quantiles, _probits(table, case)))), "exact"


def critical_values(table: str, case: str, n: int, lags: int = 0) -> dict[str, float]:
    """Quantiles at the usual levels.

    Parameters
    ----------
    table, case, n, lags
        As for `lower_tail`.

    Returns
    -------
    dict
        By level: ``1%``, ``5%`` and ``10%``.
    """
    levels, quantiles = _quantiles(table, case, n, lags)
    return {name: float(quantiles[levels.searchsorted(float(name[:-1]) / 100.0 - 1e-9)]) for name in _NAMED}


@lru_cache(maxsize=256)
def _quantiles(table: str, case: str, n: int, lags: int) -> tuple[FloatArray, FloatArray]:
    levels, coefficients = _surfaces(table, case)
    n = max(n, SHORTEST)
    lags = min(lags, n // LAG_SHARE)
    basis = surface_basis(n, lags)
    # Surfaces of neighbouring levels could cross in a very short series.
    quantiles: FloatArray = np.maximum.accumulate(coefficients @ basis)
    quantiles.setflags(write=False)
    return levels, quantiles


@cache
def _surfaces(table: str, case: str) -> tuple[FloatArray, FloatArray]:
    rows = [row for row in read(table) if row["case"] == case]
    levels = np.array([float(row["level"]) for row in rows])
    return levels, np.array([[float(row[name]) for name in COEFFICIENTS] for row in rows])


@cache
def _probits(table: str, case: str) -> FloatArray:
    found: FloatArray = ndtri(_surfaces(table, case)[0])
    return found
