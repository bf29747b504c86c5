"""Which calendar a time index follows: recognised, or refused with the first irregular stamp and a remedy."""

from __future__ import annotations

import numpy as np
import pandas as pd

from preflight_magic.intake.dates import plain, refusal, written_as_number
from preflight_magic.intake.frequencies import DAY_MINUTES, calendar_of
from preflight_magic.intake.irregular import gap_days, interrupted, irregular, unknown_step
from preflight_magic.intake.remedies import LacksStampsError, Remedies
from preflight_magic.model import Calendar, CheckError
from preflight_magic.stamps import counted, stamp_text

_MONTHS = ("JAN", "FEB", "MAR", "APR", "MAY", "JUN", "JUL", "AUG", "SEP", "OCT", "NOV", "DEC")
_WEEKDAYS = ("MON", "TUE", "WED", "THU", "FRI", "SAT", "SUN")
FEWEST_KNOWN = 0.5
"""Share of the stamps of a calendar below which an index is not taken for that calendar."""

_LARGEST_NUMBER = 2**62


def recognise(index: pd.Index, remedies: Remedies | None = None) -> tuple[Calendar, pd.Index]:
    """Recognise the calendar of a time index.

    Parameters
    ----------
    index : pandas.Index, shape (n,)
        Dates, periods or consecutive integers.
    remedies : Remedies, optional
        How the table is called in the code that errors propose.

    Returns
    -------
    calendar : Calendar
    index : pandas.Index, shape (n,)
        The same stamps; dates carry their frequency.

    Raises
    ------
    CheckError
        Where stamps are missing, unsorted, repeated or irregular: names the first one.
    """
    remedies = remedies or Remedies()
    refuse_business_periods(index, remedies)
    index = plain(index)
    if isinstance(index, pd.DatetimeIndex | pd.PeriodIndex):
        _refuse_disorder(index, remedies)
        return _dates(index, remedies) if isinstance(index, pd.DatetimeIndex) else _periods(index, remedies)
    if pd.api.types.is_integer_dtype(index.dtype) and not isinstance(index, pd.MultiIndex):
        _refuse_disorder(index, remedies)
        return _counter(index, remedies)
    raise refusal(index, remedies.stamps, f"{remedies.base}.reset_index()")


# ------------------------------------------------------------------------------------------- order of the stamps
def _refuse_disorder(index: pd.Index, remedies: Remedies) -> None:
    missing = np.flatnonzero(np.asarray(index.isna()))
    if missing.size:
        raise CheckError(
            f"the index lacks {counted(missing.size, 'stamp')}, the first in row {missing[0] + 1}; drop such rows with "
            f"`{remedies.present}`."
        )
    if not index.is_monotonic_increasing:
        row = next(i for i in range(1, len(index)) if index[i] < index[i - 1])
        raise CheckError(
            f"the index is not sorted: {stamp_text(index[row])} in row {row + 1} follows "
            f"{stamp_text(index[row - 1])}; sort it with `{remedies.sort}`."
        )
    if not index.is_unique:
        row = int(np.flatnonzero(index.duplicated())[0])
        raise CheckError(
            f"the index repeats {stamp_text(index[row])} in row {row + 1}; keep the first row of each stamp with "
            f"`{remedies.unique}`, or merge the repeated rows."
        )


# ------------------------------------------------------------------------------------------ integers and periods
def _counter(index: pd.Index, remedies: Remedies) -> tuple[Calendar, pd.Index]:
    first, last = int(index[0]), int(index[-1])
    if max(abs(first), abs(last)) >= _LARGEST_NUMBER:
        raise CheckError(
            f"the index counts from {first} to {last}, too far to be counted on; number the rows with "
            f"{remedies.mend('.reset_index(drop=True)')}."
        )
    numbers = index if isinstance(index, pd.RangeIndex) else pd.Index(index.to_numpy(dtype=np.int64), name=index.name)
    steps = np.diff(numbers.to_numpy())
    odd = np.flatnonzero(steps != 1)
    calendar = Calendar("counter", None, "step")
    if not odd.size:
        return calendar, numbers
    before, found = numbers[odd[0]], numbers[odd[0] + 1]
    told = f"the index does not count by one: after {before} comes {found}"
    form = written_as_number(numbers)
    if form is not None:
        text = f"{remedies.stamps}.astype(str)"
        raise CheckError(
            f"{told}, as dates do; read them with `{remedies.stamps} = pd.to_datetime({text}, format='{form}')`."
        )
    told += f", {before + 1} is expected; mend it with "
    if (steps == steps[0]).all() or len(numbers) < FEWEST_KNOWN * (last - first + 1):
        raise CheckError(f"{told}{remedies.mend('.reset_index(drop=True)')}.")
    message = f"{told}{remedies.mend(f'.reindex(range({first}, {last + 1}))')}."
    raise LacksStampsError(message, calendar, pd.RangeIndex(first, last + 1, name=index.name), "numbers")


def refuse_business_periods(index: pd.Index, remedies: Remedies) -> None:
    """Refuse periods of business days, before anything is done with them: pandas warns of each use."""
    if isinstance(index.dtype, pd.PeriodDtype) and isinstance(index.dtype.freq, pd.offsets.BusinessDay):
        raise CheckError(
            "the index holds business-day periods, which pandas gives up; use dates with "
            f"{remedies.mend('.to_timestamp()')}."
        )


def _periods(index: pd.PeriodIndex, remedies: Remedies) -> tuple[Calendar, pd.Index]:
    calendar = calendar_of(index.freqstr)
    if calendar is None:
        raise unknown_step(f"periods of {index.freqstr!r}", remedies)
    ordinals = index.asi8
    # Periods of several minutes or hours count in single ones.
    step = (index[0] + 1).ordinal - index[0].ordinal
    odd = np.flatnonzero(np.diff(ordinals) != step)
    if odd.size:
        before, found = index[odd[0]], index[odd[0] + 1]
        first, last = (stamp_text(stamp, calendar.kind) for stamp in (index[0], index[-1]))
        remedy = f'.reindex(pd.period_range("{first}", "{last}", freq="{index.freqstr}"))'
        message = (
            f"the index is {calendar.kind}, but after {stamp_text(before)} comes {stamp_text(found)} where "
            f"{stamp_text(before + 1)} is expected; put in what is missing with {remedies.mend(remedy)}."
        )
        size = (ordinals[-1] - ordinals[0]) // step + 1
        if (np.diff(ordinals) % step).any() or len(index) < FEWEST_KNOWN * size:
            raise CheckError(message)
        regular = pd.period_range(index[0], index[-1], freq=index.freq, name=index.name)
        raise LacksStampsError(message, calendar, regular, "periods")
    return calendar, index


# --------------------------------------------------------------------------------------------------------- dates
def _dates(index: pd.DatetimeIndex, remedies: Remedies) -> tuple[Calendar, pd.Index]:
    stated = calendar_of(index.freqstr) if index.freqstr else None
    if stated is not None:
        return stated, index
    wall, zoned = index.tz_localize(None), index.tz is not None
    best: tuple[float, str, pd.DatetimeIndex] | None = None
    for freq in _candidates(wall):
        # Hours are steps of absolute time, everything longer of local dates.
        stamps = index if freq.endswith(("h", "min")) else wall
        expected = _whole(stamps, freq)
        if expected is None:
            continue
        common = int(stamps.isin(expected).sum())
        score = common / (len(expected) + len(stamps) - common)
        if score == 1.0:
            calendar = calendar_of(freq)
            assert calendar is not None
            return calendar, _local(index, freq, remedies)
        if best is None or score > best[0]:
            best = score, freq, expected
    if best is None or best[0] < FEWEST_KNOWN:
        raise irregular(wall, zoned, remedies)
    stamps = index if best[2].tz is not None else wall
    found = interrupted(stamps, best[1], best[2], zoned, remedies)
    calendar = calendar_of(best[1])
    if calendar is None or not stamps.isin(best[2]).all():
        raise found
    regular = pd.DatetimeIndex(best[2], name=index.name)
    if zoned and regular.tz is None:
        regular = _local(_in_zone(regular, index, remedies), best[1], remedies)
    raise LacksStampsError(str(found), calendar, regular, "dates")


def _whole(stamps: pd.DatetimeIndex, freq: str) -> pd.DatetimeIndex | None:
    """Every stamp of a calendar from the first to the last; None where most of them are lacking, or past all dates."""
    usual = float(np.median(gap_days(stamps if stamps.tz is None else stamps.tz_convert(None))))
    # As days, since the difference of two dates of nanoseconds may be too long for one.
    if stamps[-1].to_julian_date() - stamps[0].to_julian_date() > 4 * usual * (len(stamps) + 25):
        return None
    try:
        return pd.date_range(stamps[0], stamps[-1], freq=freq)
    except (OverflowError, ValueError):
        return None


def _in_zone(regular: pd.DatetimeIndex, index: pd.DatetimeIndex, remedies: Remedies) -> pd.DatetimeIndex:
    try:
        return regular.tz_localize(index.tz)
    except ValueError as error:
        raise _no_such_hour(regular, index.tz, remedies) from error


def _local(index: pd.DatetimeIndex, freq: str, remedies: Remedies) -> pd.DatetimeIndex:
    """The index with its frequency; a zone whose clocks change at the hour of its stamps has none."""
    try:
        return pd.DatetimeIndex(index, freq=freq)
    except ValueError as error:
        raise _no_such_hour(index, index.tz, remedies) from error


def _no_such_hour(index: pd.DatetimeIndex, zone: object, remedies: Remedies) -> CheckError:
    return CheckError(
        f"the index is local time of {zone} from {stamp_text(index[0])} on, and the clocks change there at the very "
        f"hour of its stamps; leave the zone out with {remedies.mend('.tz_localize(None)')}."
    )


def _candidates(wall: pd.DatetimeIndex) -> list[str]:
    """Frequencies worth trying, by the median distance of the stamps."""
    if len(wall) < 2:
        return []
    gap = float(np.median(gap_days(wall)))
    month = int(np.bincount(wall.month).argmax()) - 1
    if gap > 300:
        return [f"{base}-{_MONTHS[month]}" for base in ("YS", "YE", "BYS", "BYE")] if gap < 400 else []
    if gap > 80:
        # Anchors as pandas writes them: the first quarter of the year by its start, the last by its end.
        start, end = _MONTHS[month % 3], _MONTHS[9 + month % 3]
        return [f"QS-{start}", f"QE-{end}", f"BQS-{start}", f"BQE-{end}"] if gap < 100 else []
    if gap > 26:
        return ["MS", "ME", "BMS", "BME"] if gap < 36 else []
    if gap > 4:
        return [f"W-{_WEEKDAYS[int(np.bincount(wall.day_of_week).argmax())]}"] if gap < 10 else []
    if gap > 0.9:
        return ["D", "B"] if gap < 2 else []
    minutes = gap * DAY_MINUTES
    if minutes < 1 or minutes != int(minutes):
        return []
    freq = f"{int(minutes) // 60}h" if minutes % 60 == 0 else f"{int(minutes)}min"
    freq = {"1h": "h", "1min": "min"}.get(freq, freq)
    return [freq] if calendar_of(freq) else []
