"""Undoing a plan on a forecast."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CheckError
from preflight_magic.plan.apply import levels
from preflight_magic.plan.fixed_part import fixed_part, lags_of
from preflight_magic.plan.points import undo_points
from preflight_magic.plan.regular import regular
from preflight_magic.plan.timeline import as_float, join_forecast
from preflight_magic.plan.words import called
from preflight_magic.stamps import stamp_text

if TYPE_CHECKING:
    from preflight_magic.plan.plan import Plan

Array = npt.NDArray[np.float64]


def back_transform(plan: Plan, forecast: pd.Series, history: pd.Series, variance: object = None) -> pd.Series:
    """Undo the plan on a forecast; see `Plan.back_transform`."""
    with np.errstate(all="ignore"):
        return _undone(plan, forecast, history, variance)


def _undone(plan: Plan, forecast: pd.Series, history: pd.Series, variance: object) -> pd.Series:
    future, past = as_float(forecast), regular(plan.repairs, as_float(history))
    spread = _variance(variance, future)
    if future.empty:
        return future
    timeline = join_forecast(past, future)
    past = past.loc[past.index < future.index[0]]
    _check_length(plan, past)
    steps = levels(plan, past, past, history)
    x = future.to_numpy() + fixed_part(plan.steps, steps[-1].reindex(timeline), history)[len(past) :]
    for level, lag in reversed(list(zip(steps, lags_of(plan.steps), strict=False))):
        x = _undo_difference(x, level.rename(history.name), lag, plan)
    values = undo_points(plan.steps, x, spread, timeline, history)
    return pd.Series(values, index=forecast.index, name=forecast.name, copy=True)


def _check_length(plan: Plan, past: pd.Series) -> None:
    """Raise a CheckError if the observed span is too short to undo the differences from."""
    needed = sum(lags_of(plan.steps))
    length = len(past.loc[past.first_valid_index() :])
    if length < needed:
        raise CheckError(
            f"{called(past)} has {length} values of history, and undoing the differences of '{plan}' needs {needed}; "
            "give a longer history."
        )


def _undo_difference(x: Array, past: pd.Series, lag: int, plan: Plan) -> Array:
    """Add to every value the one `lag` steps before it; `past` holds the values before the first."""
    used = past.iloc[-lag:]
    missing = used.index[: len(x)][used.iloc[: len(x)].isna()]
    if len(missing):
        remedy = "forecast from the stamp after the last observed value" if plan.repairs else "put FillGaps in the plan"
        raise CheckError(
            f"{called(past)} has no value at or before {stamp_text(missing[0])} that undoing 'difference {lag}' needs; "
            f"{remedy}."
        )
    values = np.concatenate([used.to_numpy(), x])
    for first in range(lag, len(values), lag):
        block = values[first : first + lag]
        block += values[first - lag : first][: len(block)]
    return values[lag:]


def _variance(variance: object, forecast: pd.Series) -> Array | None:
    """Error variance for every row of the forecast."""
    if variance is None:
        return None
    if isinstance(variance, pd.Series):
        if len(variance) != len(forecast) or not (variance.index == forecast.index).all():
            raise CheckError("The variance has another index than the forecast; give it on the forecast's index.")
        variance = as_float(variance).to_numpy()
    try:
        values = np.asarray(variance, dtype="float64")
    except (TypeError, ValueError):
        raise CheckError("The variance is not a number for every row of the forecast; give numbers.") from None
    if values.ndim > 1 or (values.ndim == 1 and len(values) != len(forecast)):
        raise CheckError(
            f"The variance has shape {values.shape} and the forecast {len(forecast)} rows; give a number, or one a row."
        )
    if (values < 0).any():
        raise CheckError(f"The variance holds {np.nanmin(values):g}, below zero; give the squared standard error.")
    return np.broadcast_to(values, (len(forecast),)).astype("float64")
