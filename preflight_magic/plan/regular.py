"""Repairs of the time index: what makes the rows of a series regular. They are never undone."""

from __future__ import annotations

from typing import assert_never

import pandas as pd

from preflight_magic.model import (
    CheckError,
    FillGaps,
    MergeDuplicates,
    ReadDates,
    RegularCalendar,
    Repair,
    Sort,
)
from preflight_magic.plan.words import called
from preflight_magic.stamps import stamp_text


def regular(repairs: tuple[Repair, ...], y: pd.Series) -> pd.Series:
    """Rows of a series after the repairs of its index.

    Parameters
    ----------
    repairs : tuple of Repair
    y : Series, shape (n,)
        float64.

    Returns
    -------
    Series, shape (m,)
        NaN where a stamp was put in; `y` itself where there is nothing to repair.

    Raises
    ------
    CheckError
        If the stamps cannot be read, or rows with the same stamp differ.
    """
    for repair in repairs if len(y) else ():
        match repair:
            case ReadDates():
                y = y.set_axis(_dates(y))
            case Sort():
                y = y if y.index.is_monotonic_increasing else y.sort_index(kind="stable")
            case MergeDuplicates():
                y = y if y.index.is_unique else _merged(y)
            case RegularCalendar():
                y = _complete(y, repair)
            case FillGaps():
                pass
            case _:
                assert_never(repair)
    return y


def _dates(y: pd.Series) -> pd.Index:
    if isinstance(y.index, pd.DatetimeIndex):
        return y.index
    try:
        return pd.to_datetime(y.index, format="ISO8601")
    except (ValueError, TypeError):
        raise CheckError(
            f"{called(y)} has an index of {y.index.dtype} values that do not read as dates in ISO form; convert it "
            "with pd.to_datetime."
        ) from None


def _merged(y: pd.Series) -> pd.Series:
    groups = y.groupby(level=0)
    least, most = groups.min(), groups.max()
    apart = least < most
    if apart.any():
        at = apart.index[int(apart.to_numpy().argmax())]
        raise CheckError(
            f"{called(y)} has rows with the same stamp that differ, {least[at]:g} and {most[at]:g} at "
            f"{stamp_text(at)}; merge them with groupby(level=0).sum(), or mean() where they are levels."
        )
    return groups.first()


def _complete(y: pd.Series, repair: RegularCalendar) -> pd.Series:
    first, last = y.index[0], y.index[-1]
    if not y.index.is_monotonic_increasing or not y.index.is_unique:
        return y  # told by the check of the whole time axis
    try:
        if repair.kind == "numbers":
            index: pd.Index = pd.RangeIndex(int(first), int(last) + 1)
        elif repair.kind == "periods":
            index = pd.period_range(first, last, freq=repair.freq)
        else:
            index = pd.date_range(first, last, freq=repair.freq)
        lost = ~y.index.isin(index)
    except (ValueError, TypeError) as error:
        raise CheckError(
            f"{called(y)} has an index that is no calendar of {repair.freq or 'whole numbers'} ({error}); give it the "
            "kind of index that the plan was made for."
        ) from None
    if lost.any():
        raise CheckError(
            f"{called(y)} has a row at {stamp_text(y.index[int(lost.argmax())])}, which is no stamp of the calendar "
            f"{repair.freq or 'that counts by one'}; drop it, or collect the rows by calendar."
        )
    if len(index) == len(y) and y.index.dtype == index.dtype and getattr(y.index, "freq", None) is not None:
        return y
    return y.reindex(index.rename(y.index.name))
