"""Do integrated series move together? Engle and Granger, Johansen, and the mark of a spurious regression."""

from __future__ import annotations

import warnings
from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.arma_parameters import Array


@dataclass(frozen=True)
class EngleGranger:
    """Test of no cointegration between one series and others, by the residuals of their regression.

    Attributes
    ----------
    statistic, p_value : float
    critical_values : dict from level to float
    lags : int or None
        Most lags of the augmented regression; their number is chosen by AIC.
    nobs : int
    """

    statistic: float
    p_value: float
    critical_values: dict[str, float]
    lags: int | None
    nobs: int


@dataclass(frozen=True)
class Johansen:
    """Trace tests of the number of cointegrating relations.

    Attributes
    ----------
    statistics : tuple of float
        For at most 0, 1, ... relations.
    critical_values : tuple of float
        At 5 %.
    rank : int
        Relations: the first number that the tests, in order, do not reject.
    lags : int
        Lagged differences.
    nobs : int
    """

    statistics: tuple[float, ...]
    critical_values: tuple[float, ...]
    rank: int
    lags: int
    nobs: int


def engle_granger(target: Array, others: Array) -> EngleGranger | None:
    """Engle and Granger (1987), Econometrica 55, 251-276; p-values of MacKinnon (1994, 2010), with a constant.

    Parameters
    ----------
    target : ndarray, shape (n,)
    others : ndarray, shape (n, k)

    Returns
    -------
    EngleGranger or None
        None where the series are too short or follow each other exactly.
    """
    from statsmodels.tsa.stattools import coint

    if len(target) < 20 + 2 * others.shape[1]:
        return None
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        statistic, p_value, critical = coint(target, others, trend="c", autolag="aic")
    if not np.isfinite(statistic):
        return None
    levels = dict(zip(("1%", "5%", "10%"), (float(one) for one in critical), strict=True))
    return EngleGranger(float(statistic), float(p_value), levels, None, len(target))


def johansen(values: Array) -> Johansen | None:
    """Johansen (1991), Econometrica 59, 1551-1580: trace tests with an unrestricted constant.

    Parameters
    ----------
    values : ndarray, shape (n, k)
        k from 2 to 12, for which critical values are tabled.

    Returns
    -------
    Johansen or None
        None where there are too few values, or too many series. The lags are those of the vector autoregression in
        levels with the least BIC, less one.
    """
    from statsmodels.tsa.api import VAR
    from statsmodels.tsa.vector_ar.vecm import coint_johansen

    n, k = values.shape
    most = min(6, n // (5 * k) - 1)
    if not 2 <= k <= 12 or most < 1:
        return None
    scaled = (values - values.mean(axis=0)) / values.std(axis=0)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            lags = max(int(VAR(scaled).select_order(most).bic) - 1, 0)
            found = coint_johansen(scaled, 0, lags)
    except (np.linalg.LinAlgError, ValueError):
        return None
    statistics, critical = np.asarray(found.lr1, dtype=float), np.asarray(found.cvt, dtype=float)[:, 1]
    if not np.isfinite(statistics).all():
        return None
    kept = np.flatnonzero(statistics <= critical)
    rank = int(kept[0]) if kept.size else k
    return Johansen(tuple(statistics.tolist()), tuple(critical.tolist()), rank, lags, n)


def levels_regression(target: Array, other: Array) -> tuple[float, float]:
    """R squared and Durbin-Watson statistic of a regression in levels.

    Granger and Newbold (1974), Spurious regressions in econometrics, Journal of Econometrics 2, 111-120: where the
    first exceeds the second, the regression is suspect.
    """
    X = np.column_stack([np.ones(len(target)), other])
    left = target - X @ np.linalg.lstsq(X, target, rcond=None)[0]
    total = float(((target - target.mean()) ** 2).sum())
    rest = float(left @ left)
    if not total > 0.0 or not rest > 1e-20 * total:
        return 1.0, 0.0
    return 1.0 - rest / total, float((np.diff(left) ** 2).sum()) / rest
