"""The reference forecast: the ARMA model of the roots rung, brought back to the original units by the plan."""

from __future__ import annotations

import operator
from statistics import NormalDist
from typing import TYPE_CHECKING, cast

import numpy as np
import pandas as pd

from preflight_magic.kernels.arma_forecast import forecast
from preflight_magic.kernels.whiten import psi_weights
from preflight_magic.model import CheckError, Difference, Log, Logit, PerDay, Power
from preflight_magic.plan.plan import Plan
from preflight_magic.stamps import stamp_text

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from preflight_magic.kernels.arma import ArmaFit
    from preflight_magic.series_report import SeriesReport


def reference_forecast(report: SeriesReport, horizon: int, coverage: float) -> pd.DataFrame:
    """Forecast a checked series with the ARMA model of its roots rung.

    Parameters
    ----------
    report : SeriesReport
    horizon : int
        Steps ahead.
    coverage : float
        Probability of the interval, between 0 and 1.

    Returns
    -------
    DataFrame
        ``median``, ``mean``, ``lower``, ``upper`` in the original units on the future index. Errors are taken as
        normal after the plan; what is uncertain about the coefficients is not in the interval.

    Raises
    ------
    CheckError
        For a series that could not be checked, or options out of range.
    """
    if report.problem is not None:
        raise CheckError(report.problem)
    steps, share = _whole(horizon), _share(coverage)
    if steps < 1:
        raise CheckError(f"horizon is {horizon!r}; give a whole number of steps, at least 1.")
    if not 1e-9 < share < 1.0 - 1e-9:
        raise CheckError(f"coverage is {coverage!r}; give a probability between 0 and 1, such as 0.9.")
    with np.errstate(all="ignore"):
        return _forecast(report, steps, share)


def _whole(value: object) -> int:
    try:
        return operator.index(value)  # type: ignore[arg-type]
    except TypeError:
        return 0


def _share(value: object) -> float:
    try:
        return float(value)  # type: ignore[arg-type]
    except (TypeError, ValueError):
        return 0.0


def _forecast(report: SeriesReport, horizon: int, coverage: float) -> pd.DataFrame:
    history = report.series
    try:
        index = following(history.index, horizon)
    except (OverflowError, ValueError, MemoryError) as error:
        raise CheckError(
            f"horizon is {horizon}, and there are not so many stamps after {stamp_text(history.index[-1])}; give fewer "
            "steps."
        ) from error
    path, variance = _path(report, horizon)
    plan = report.plan
    points = Plan(plan.repairs, tuple(step for step in plan.steps if isinstance(step, PerDay | Log | Power | Logit)))
    others = Plan((), tuple(step for step in plan.steps if step not in points.steps))
    middle = pd.Series(path, index=index, name=history.name)
    level = others.back_transform(middle, points.apply(history))
    distance = NormalDist().inv_cdf(0.5 + coverage / 2.0) * np.sqrt(variance)
    return pd.DataFrame(
        {
            "median": points.back_transform(level, history),
            "mean": points.back_transform(level, history, variance),
            "lower": points.back_transform(level - distance, history),
            "upper": points.back_transform(level + distance, history),
        }
    )


def following(index: pd.Index, steps: int) -> pd.Index:
    """Stamps that follow a regular index.

    Parameters
    ----------
    index : PeriodIndex, DatetimeIndex or integer Index
    steps : int

    Returns
    -------
    Index
    """
    if isinstance(index, pd.PeriodIndex):
        return pd.period_range(index[-1] + 1, periods=steps, freq=index.freq)
    if isinstance(index, pd.DatetimeIndex):
        freq = index.freq or pd.infer_freq(index)
        return pd.date_range(index[-1], periods=steps + 1, freq=freq)[1:]
    step = int(index[1] - index[0])
    return pd.RangeIndex(int(index[-1]) + step, int(index[-1]) + step * (steps + 1), step)


def _path(report: SeriesReport, steps: int) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Mean path of the transformed series, and the error variance after undoing differences."""
    transformed = report.transformed.to_numpy(dtype=float)
    fit = cast("ArmaFit | None", report.findings["roots"].measures.get("fit"))
    if fit is None:
        # nothing varies enough for a model: what remains stays at its mean
        mean = float(transformed.mean()) if len(transformed) else 0.0
        return np.full(steps, mean), np.zeros(steps)
    path, _ = forecast(fit, transformed, steps)
    ar, ma = fit.polynomials
    for step in report.plan.steps:
        if isinstance(step, Difference):
            ar = np.convolve(ar, np.r_[1.0, np.zeros(step.lag - 1), -1.0])
    return path, fit.variance * np.cumsum(psi_weights(ar, ma, steps) ** 2)
