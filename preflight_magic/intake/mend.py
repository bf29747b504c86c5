"""Repairs of a time index, each named and allowed or not, and the rows of a table laid on what comes of them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.intake.calendar import recognise, refuse_business_periods
from preflight_magic.intake.dates import plain, readable
from preflight_magic.intake.remedies import LacksStampsError, Remedies
from preflight_magic.model import Calendar, CheckError, IndexRepair, MergeDuplicates, ReadDates, RegularCalendar, Sort
from preflight_magic.stamps import stamp_text

REPAIRS = ("read dates", "sort", "merge duplicates", "regular calendar", "fill gaps")
"""Names of the repairs that a person may allow, in the order in which they are made."""

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Mended:
    """A regular index, and where each row of the table lies on it.

    Attributes
    ----------
    calendar : Calendar
    index : pandas.Index, shape (m,)
    place : numpy.ndarray of int or None, shape (n,)
        Position of each row of the table in `index`; None where they are the same.
    repairs : tuple of IndexRepair
    local_clock : bool
        The repeated stamps are an hour that a change of the clocks repeats.
    """

    calendar: Calendar
    index: pd.Index
    place: npt.NDArray[np.intp] | None
    repairs: tuple[IndexRepair, ...]
    local_clock: bool = False

    def lay(self, numbers: Floats, remedies: Remedies) -> tuple[Floats, str | None]:
        """Values on the regular index, NaN where there is none, and why they cannot be laid there.

        Parameters
        ----------
        numbers : numpy.ndarray, shape (n,)
        remedies : Remedies
        """
        if self.place is None:
            return numbers, None
        seen = ~np.isnan(numbers)
        laid = np.full(len(self.index), np.nan)
        laid[self.place[seen]] = numbers[seen]
        apart = seen.copy()
        apart[seen] = laid[self.place[seen]] != numbers[seen]
        if not apart.any():
            return laid, None
        row = int(apart.argmax())
        stamp = stamp_text(self.index[self.place[row]])
        told = f"rows with the same stamp differ, at {stamp} for example {numbers[row]:g} and {laid[self.place[row]]:g}"
        if self.local_clock:
            return laid, f"{told}, where clocks are set back; {remedies.zone}"
        return laid, f"{told}; {remedies.merge}"


def mend(index: pd.Index, remedies: Remedies, allowed: frozenset[str]) -> Mended:
    """Recognise the calendar of a time index, after the repairs it needs.

    Parameters
    ----------
    index : pandas.Index, shape (n,)
    remedies : Remedies
        How the table is called in the code that errors propose.
    allowed : frozenset of str
        Names of the repairs allowed.

    Raises
    ------
    CheckError
        Where no allowed repair makes the index regular: names the first odd stamp and the code that would mend it.
    """
    repairs: list[IndexRepair] = []
    refuse_business_periods(index, remedies)
    index = plain(index)
    dates = readable(index) if "read dates" in allowed else None
    if dates is not None:
        index = dates
        repairs.append(ReadDates())
    place = np.arange(len(index), dtype=np.intp)
    if not _orderable(index):
        return Mended(*recognise(index, remedies), None, tuple(repairs))
    clock = False
    if not index.is_monotonic_increasing and "sort" in allowed:
        order = np.argsort(index.asi8 if hasattr(index, "asi8") else index.to_numpy(), kind="stable")
        place[order] = np.arange(len(index))
        index = index.take(order)
        repairs.append(Sort())
    if index.is_monotonic_increasing and not index.is_unique and "merge duplicates" in allowed:
        again = index.duplicated()
        clock = _set_back(index, again)
        place = (np.cumsum(~again) - 1)[place]
        index = index[~again]
        repairs.append(MergeDuplicates())
        if len(index) < 2:
            raise CheckError(
                f"the index holds one stamp only, {stamp_text(index[0])}; put the dates there, or name the column that "
                "tells the series apart with series=."
            )
    try:
        calendar, regular = recognise(index, remedies)
    except LacksStampsError as found:
        if "regular calendar" not in allowed:
            raise
        calendar, regular = found.calendar, found.regular
        place = regular.get_indexer(index)[place]
        repairs.append(RegularCalendar(calendar.freq, found.kind))
    moved = any(not isinstance(one, ReadDates) for one in repairs)
    return Mended(calendar, regular, place if moved else None, tuple(repairs), clock)


def _orderable(index: pd.Index) -> bool:
    """Whether the stamps are of a kind that has an order, and none is missing."""
    known = isinstance(index, pd.DatetimeIndex | pd.PeriodIndex) or pd.api.types.is_integer_dtype(index.dtype)
    return known and not isinstance(index, pd.MultiIndex) and not bool(index.isna().any())


def _set_back(index: pd.Index, again: npt.NDArray[np.bool_]) -> bool:
    """Whether what repeats is one hour at night, as a local clock shows it when it is set back."""
    if not isinstance(index, pd.DatetimeIndex) or index.tz is not None:
        return False
    repeated = index[again]
    hours = set(zip(repeated.date, repeated.hour, strict=True))
    one_a_day = len({day for day, _ in hours}) == len(hours)
    return one_a_day and int(repeated.hour.max()) < 4 and len(set(index.hour)) > 1
