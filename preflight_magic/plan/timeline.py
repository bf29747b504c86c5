"""The time axis of a plan: history and series, or history and forecast, on one regular index."""

from __future__ import annotations

import numpy as np
import pandas as pd

from preflight_magic.model import CheckError
from preflight_magic.plan.words import called
from preflight_magic.stamps import stamp_text


def as_float(series: pd.Series) -> pd.Series:
    """Copy of a numeric series as float64, NaN where a value is missing.

    Raises
    ------
    CheckError
        If the values are not real numbers.
    """
    if not isinstance(series, pd.Series):
        raise CheckError(f"A plan works on a pandas Series, not on {type(series).__name__}; pick one column.")
    if pd.api.types.is_complex_dtype(series.dtype) or pd.api.types.is_datetime64_any_dtype(series.dtype):
        raise CheckError(f"{called(series)} holds {series.dtype} values; give real numbers.")
    try:
        values = series.to_numpy(dtype="float64", na_value=np.nan)
    except (TypeError, ValueError):
        raise CheckError(
            f"{called(series)} holds values that are no numbers; convert them with pd.to_numeric."
        ) from None
    return pd.Series(values, index=series.index, name=series.name, copy=True)


def join(history: pd.Series, series: pd.Series) -> pd.Index:
    """Union of two time indexes, checked to be one regular index.

    Raises
    ------
    CheckError
        If the indexes are of different kinds, not sorted, not unique, or leave out a stamp between them.
    """
    if history.index is series.index:
        _check_regular(series.index, series)
        return series.index
    one, two = history.index, series.index
    if _kind(one, history) != _kind(two, series):
        raise CheckError(
            f"{called(series)} has an index of {_kind(two, series)} and its history one of {_kind(one, history)}; "
            "give both the same kind of index."
        )
    for part in (history, series):
        if not part.index.is_monotonic_increasing or not part.index.is_unique:
            raise CheckError(f"{called(part)} has stamps that are repeated or out of order; sort them and merge them.")
    union = one.union(two)
    _check_regular(union, series, getattr(one, "freq", None) or getattr(two, "freq", None))
    return union


def join_forecast(history: pd.Series, forecast: pd.Series) -> pd.Index:
    """Index of the history before the forecast, and of the forecast, checked to follow one upon the other.

    Raises
    ------
    CheckError
        If the history has no value, or the forecast does not begin right after it.
    """
    last = history.last_valid_index()
    if last is None:
        raise CheckError(f"{called(history)} has no observed value to follow; give the observed series as history.")
    if _kind(history.index, history) != _kind(forecast.index, forecast):
        raise CheckError(
            f"The forecast has an index of {_kind(forecast.index, forecast)} and {_lower(history)} one of "
            f"{_kind(history.index, history)}; the forecast's index must follow the history's."
        )
    start = forecast.index[0]
    if not start > last:
        raise CheckError(
            f"The forecast begins at {stamp_text(start)} and {_lower(history)} is observed until {stamp_text(last)}; "
            "the forecast's index must follow the history's."
        )
    past = history.loc[history.index < start]
    try:
        return join(past, forecast)
    except CheckError:
        raise CheckError(
            f"The forecast begins at {stamp_text(start)} and {_lower(history)} ends at "
            f"{stamp_text(past.index[-1])}; the forecast's index must be regular and follow the history's."
        ) from None


def _lower(series: pd.Series) -> str:
    text = called(series)
    return text[0].lower() + text[1:]


def _kind(index: pd.Index, series: pd.Series) -> str:
    if isinstance(index, pd.PeriodIndex):
        return f"periods ({index.freqstr})"
    if isinstance(index, pd.DatetimeIndex):
        return "timestamps" if index.tz is None else f"timestamps ({index.tz})"
    if pd.api.types.is_integer_dtype(index.dtype):
        return "integers"
    raise CheckError(
        f"{called(series)} has an index of {index.dtype} values; give it periods, timestamps or integers as index."
    )


def _check_regular(index: pd.Index, series: pd.Series, freq: pd.offsets.BaseOffset | None = None) -> None:
    _kind(index, series)
    if not index.is_monotonic_increasing or not index.is_unique:
        raise CheckError(f"{called(series)} has stamps that are repeated or out of order; sort them and merge them.")
    if len(index) < 2:
        return
    if isinstance(index, pd.DatetimeIndex):
        _check_timestamps(index, series, index.freq or freq)
        return
    count = index.asi8 if isinstance(index, pd.PeriodIndex) else index.to_numpy(dtype="int64")
    steps = np.diff(count)
    size = getattr(getattr(index, "freq", None), "n", steps.min())
    if (steps != size).any():
        raise _gap(series, index[int(np.argmax(steps != size))])


def _check_timestamps(index: pd.DatetimeIndex, series: pd.Series, freq: pd.offsets.BaseOffset | None) -> None:
    if index.freq is not None:
        return
    if freq is not None:
        expected = pd.date_range(index[0], index[-1], freq=freq)
        if len(expected) == len(index) and (expected == index).all():
            return
    # A frequency attached to a short piece may be narrower than that of the whole (Monday to Friday looks daily).
    if len(index) > 2 and pd.DatetimeIndex(index, freq="infer").freq is None:
        steps = np.diff(index.asi8)
        raise _gap(series, index[int(np.argmax(steps > 1.2 * np.median(steps)))])
    if freq is not None and len(index) > 1:
        raise _gap(series, index[-2])


def _gap(series: pd.Series, before: object) -> CheckError:
    return CheckError(
        f"{called(series)} has no regular index together with its history: the stamp after {stamp_text(before)} is not "
        "the next one; make the index regular (asfreq or reindex) and leave missing values as NaN."
    )
