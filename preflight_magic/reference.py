"""The reference forecast: ARMA models brought back to the original units by their plans."""

from __future__ import annotations

import operator
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from preflight_magic.model import CheckError
from preflight_magic.reference_parts import averaged, plan_alone
from preflight_magic.stamps import stamp_text

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport

_FURTHEST = 10_000
"""Steps ahead beyond which a forecast is refused: it takes memory by their square, and says nothing."""
_ONE_DEVIATION = 0.6827
"""Probability of an interval of one standard deviation on each side."""
_AGREEMENT = 0.25
"""Standard deviations between the median of the plan alone and that of all plans within which they agree: what
averaging could gain there is at most 1/16 of the squared error."""


def reference_forecast(report: SeriesReport, horizon: int, coverage: float, average: bool) -> pd.DataFrame:
    """Forecast a checked series with the ARMA models of its plans.

    Parameters
    ----------
    report : SeriesReport
    horizon : int
        Steps ahead.
    coverage : float
        Probability of the interval, between 0 and 1.
    average : bool
        Whether plans that the evidence does not rule out are averaged; else the plan of the report stands alone.
        Where both medians agree, those of the plan alone are given, with the interval of the average.

    Returns
    -------
    DataFrame
        ``median``, ``mean``, ``lower``, ``upper`` in the original units on the future index.

    Raises
    ------
    CheckError
        For a series that could not be checked, or options out of range.
    """
    if report.problem is not None:
        raise CheckError(report.problem)
    check_options(horizon, coverage)
    # A person's own `np.seterr` must not stop it.
    with np.errstate(all="ignore"):
        return _forecast(report, horizon, coverage, average)


def _forecast(report: SeriesReport, horizon: int, coverage: float, average: bool) -> pd.DataFrame:
    try:
        index = following(report.series.index, horizon)
    except (OverflowError, ValueError) as error:
        last = stamp_text(report.series.index[-1])
        raise CheckError(
            f"horizon is {horizon}, and pandas has not so many stamps after {last}; give fewer steps."
        ) from error
    alone = plan_alone(report, index).table(coverage)
    mixture = averaged(report, index) if average and report.plan == report.recommended else None
    if mixture is None:
        return alone
    table = mixture.table(coverage)
    deviation = mixture.table(_ONE_DEVIATION)
    near = _AGREEMENT * (deviation["upper"] - deviation["lower"]) / 2.0
    if ((alone["median"] - table["median"]).abs() <= near).all():
        table[["median", "mean"]] = alone[["median", "mean"]]
    return table


def check_options(horizon: object, coverage: object) -> None:
    """Raise a CheckError unless the horizon is a whole number from 1 up and the coverage a probability."""
    try:
        steps = 0 if isinstance(horizon, bool) else operator.index(horizon)  # type: ignore[arg-type]
    except TypeError:
        steps = 0
    if not 1 <= steps <= _FURTHEST:
        raise CheckError(f"horizon is {horizon!r}; give a whole number of steps, from 1 to {_FURTHEST:,}.")
    try:
        share = float(coverage)  # type: ignore[arg-type]
    except (TypeError, ValueError):
        share = 0.0
    # Quantiles closer to the end than this are no numbers.
    if not 1e-9 < share < 1.0 - 1e-9:
        raise CheckError(f"coverage is {coverage!r}; give a probability between 0 and 1, such as 0.9.")


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
