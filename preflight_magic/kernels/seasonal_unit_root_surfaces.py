"""p-values of HEGY statistics: simulated quantiles as surfaces in the sample size, for any seasonal period.

The limits of the t-ratios at frequencies zero and pi and of the F statistic of a pair do not depend on the period, and
statistics at different frequencies are independent in the limit (Smith, Taylor and del Barrio Castro 2009). So three
tabulated laws give the limit of the joint statistics of any period by convolution. What a finite sample changes depends
on the number of cycles, the number of values and the number of lags.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache, lru_cache
from typing import Literal

import numpy as np
from scipy.special import ndtr, ndtri

from preflight_magic.kernels.distributions import Bound
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.tables import read

Kind = Literal["zero", "pi", "pair", "seasonal", "all"]
_JOINT = ("seasonal", "all")
_LOWER = ("zero", "pi")  # they reject in the lower tail
_GRID = 1 << 13
_SQUARE_LIMIT = 6.0  # generous mean of one squared t-ratio, with its share of the tail in `_TAIL`
_TAIL = 120.0


def surface_basis(s: FloatArray | float, n: FloatArray | float, lags: FloatArray | float, joint: bool) -> FloatArray:
    """What a quantile in a finite sample adds to its limit, but for the coefficients.

    Parameters
    ----------
    s, n, lags : float or ndarray, shape (cells,)
        Seasonal period, length of the series, lagged seasonal differences in the regression.
    joint : bool
        Whether a joint statistic: its law narrows around the mean like one over the square root of the period, so a
        shift of the mean shows at every level.

    Returns
    -------
    ndarray, shape (9,) or (cells, 9)
    """
    size = np.asarray(n, dtype=np.float64)
    cycles, share = s / size, lags / size
    narrow = (1.0 if joint else 0.0) / np.sqrt(s)
    columns = (cycles, cycles**2, 1.0 / size, share, share**2, share * cycles)
    more = (narrow * cycles, narrow * cycles**2, narrow * share)
    basis: FloatArray = np.stack([*columns, *more], axis=-1)
    return basis


def hegy_p_values(
    found: Sequence[tuple[Kind, float]],
    terms: Literal["n", "c", "ct"],
    dummies: bool,
    s: int,
    n: int,
    lags: int,
) -> list[tuple[float, Bound]]:
    """Probabilities of the statistics of one regression under a unit root at every frequency.

    Parameters
    ----------
    found : sequence of (kind, statistic)
    terms : {"n", "c", "ct"}
    dummies : bool
    s, n, lags : int
        Seasonal period, length of the series, lagged seasonal differences in the regression.

    Returns
    -------
    list of (p_value, bound)
        Of the lower tail for ``zero`` and ``pi``, of the upper tail for the F statistics. Beyond the outermost levels
        of the table these are returned, as a bound.
    """
    case = terms + ("D" if dummies else "")
    answers: list[tuple[float, Bound]] = []
    known: dict[Kind, FloatArray] = {}
    for kind, statistic in found:
        if kind not in known:
            known[kind] = hegy_quantiles(kind, case, s, n, lags)
        quantiles = known[kind]
        scores = _scores()
        z = float(np.interp(statistic, quantiles, scores))
        p = float(ndtr(z if kind in _LOWER else -z))
        inside = quantiles[0] <= statistic <= quantiles[-1]
        answers.append((p, "exact" if inside else "at most" if p < 0.5 else "at least"))
    return answers


def hegy_critical_values(kind: Kind, case: str, s: int, n: int, lags: int) -> dict[str, float]:
    """Critical values at the usual levels, in the tail in which the statistic rejects.

    Parameters
    ----------
    kind, case, s, n, lags
        As for `hegy_quantiles`.

    Returns
    -------
    dict
        By level: ``1%``, ``5%`` and ``10%``.
    """
    quantiles, sign = hegy_quantiles(kind, case, s, n, lags), 1.0 if kind in _LOWER else -1.0
    levels = (("1%", 0.01), ("5%", 0.05), ("10%", 0.1))
    return {name: float(np.interp(sign * ndtri(level), _scores(), quantiles)) for name, level in levels}


def hegy_quantiles(kind: Kind, case: str, s: int, n: int, lags: int) -> FloatArray:
    """Quantiles at the tabulated levels.

    Parameters
    ----------
    kind : {"zero", "pi", "pair", "seasonal", "all"}
    case : {"n", "c", "ct", "cD", "ctD"}
        Terms, with ``D`` for dummies.
    s, n, lags : int
        Seasonal period, length of the series, lagged seasonal differences in the regression.

    Returns
    -------
    ndarray, shape (levels,), rising
    """
    if kind == "seasonal" and s < 4:  # the square of the t-ratio at pi, or the one pair
        return _squared(hegy_quantiles("pi", case, s, n, lags)) if s == 2 else hegy_quantiles("pair", case, s, n, lags)
    limit, coefficients = _surface(kind, case)
    change = coefficients @ surface_basis(float(s), float(n), float(lags), kind in _JOINT)
    quantiles = joint_limit(kind, case, s) * (1.0 + change) if kind in _JOINT else limit + change
    rising: FloatArray = np.maximum.accumulate(quantiles)
    return rising


def _squared(quantiles: FloatArray) -> FloatArray:
    """Quantiles of the square of a statistic."""
    scores = _scores()
    root = np.linspace(0.0, float(np.abs(quantiles).max()), 2048)
    cumulative = ndtr(_extended(root, quantiles, scores)) - ndtr(_extended(-root, quantiles, scores))
    found: FloatArray = np.interp(ndtr(scores), cumulative, root) ** 2
    return found


@lru_cache(maxsize=128)
def joint_limit(kind: Kind, case: str, s: int) -> FloatArray:
    """Limiting quantiles of a joint statistic, by convolution of the laws at the frequencies.

    Parameters
    ----------
    kind : {"seasonal", "all"}
    case : {"n", "c", "ct", "cD", "ctD"}
    s : int

    Returns
    -------
    ndarray, shape (levels,)
    """
    step = (_SQUARE_LIMIT * s + _TAIL) / _GRID
    edges = step * np.arange(_GRID + 1, dtype=np.float64)
    counts: dict[Kind, int] = {"zero": int(kind == "all"), "pi": int(s % 2 == 0), "pair": (s - 1) // 2}
    transform = np.ones(_GRID + 1, dtype=np.complex128)
    for part, count in counts.items():
        transform *= np.fft.rfft(_masses(part, case, edges), 2 * _GRID) ** count
    cumulative = np.clip(np.fft.irfft(transform)[:_GRID].cumsum(), 0.0, 1.0)
    cumulative = np.concatenate([[0.0], np.maximum.accumulate(cumulative)])
    # Each mass stands half a step before the right edge of its cell.
    places = edges + step * (sum(counts.values()) - 1) / 2.0
    keep = np.concatenate([[True], np.diff(cumulative) > 1e-12])
    # On the scale of the square root, which a squared t-ratio fills evenly near zero.
    roots = np.interp(ndtr(_scores()), cumulative[keep], np.sqrt(places[keep]))
    found: FloatArray = roots**2 / (s if kind == "all" else s - 1)
    return found


def _masses(kind: Kind, case: str, edges: FloatArray) -> FloatArray:
    """Probability in each cell of a squared t-ratio, or of twice the F statistic of a pair."""
    limit, scores = _surface(kind, case)[0], _finer(_finer(_scores()))
    root = np.sqrt(edges)
    if kind == "pair":
        places = _finer(_finer(np.sqrt(2.0 * np.maximum(limit, 0.0))))
        inside = ndtr(_extended(root, places, scores))
        cumulative = np.where(root < places[0], ndtr(scores[0]) * (root / max(places[0], 1e-9)) ** 2, inside)
    else:
        limit = _finer(_finer(limit))
        cumulative = ndtr(_extended(root, limit, scores)) - ndtr(_extended(-root, limit, scores))
    masses: FloatArray = np.diff(cumulative)
    return masses


def _finer(values: FloatArray) -> FloatArray:
    """Values at twice as many places: cubic interpolation half way, straight at both ends."""
    between = (values[:-1] + values[1:]) / 2.0
    between[1:-1] = (9.0 * (values[1:-2] + values[2:-1]) - values[:-3] - values[3:]) / 16.0
    found = np.empty(2 * values.size - 1)
    found[::2], found[1::2] = values, between
    return found


def _extended(x: FloatArray, places: FloatArray, scores: FloatArray) -> FloatArray:
    """Scores at x, straight between the places and beyond them."""
    inside = np.interp(x, places, scores)
    low = (scores[1] - scores[0]) / (places[1] - places[0])
    high = (scores[-1] - scores[-2]) / (places[-1] - places[-2])
    found: FloatArray = inside + low * np.minimum(x - places[0], 0.0) + high * np.maximum(x - places[-1], 0.0)
    return found


@cache
def _surface(kind: Kind, case: str) -> tuple[FloatArray, FloatArray]:
    """Limits, shape (levels,), and coefficients, shape (levels, 9); joint statistics have no limit of their own."""
    rows = [row for row in read("seasonal_unit_root") if row["kind"] == kind and row["terms"] == case]
    limit = np.array([float(row["limit"] or "nan") for row in rows])
    coefficients = np.array([[float(row[name]) for name in "abcdefghi"] for row in rows])
    return limit, coefficients


@cache
def _scores() -> FloatArray:
    rows = read("seasonal_unit_root")
    return np.array([float(row["score"]) for row in rows if row["kind"] == "zero" and row["terms"] == "n"])
