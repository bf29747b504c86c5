"""Which calendar a time index follows: recognised, or refused with the first irregular stamp and a remedy."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
import pandas as pd

from preflight_magic.model import Calendar, CalendarKind, CheckError
from preflight_magic.stamps import counted, stamp_text

_YEARLY = Calendar("yearly", None, "year")
_QUARTERLY = Calendar("quarterly", None, "quarter", (4,))
_MONTHLY = Calendar("monthly", None, "month", (12,))
_KINDS: dict[str, Calendar] = {
    **dict.fromkeys(("Y", "YS", "YE", "BYS", "BYE"), _YEARLY),
    **dict.fromkeys(("Q", "QS", "QE", "BQS", "BQE"), _QUARTERLY),
    **dict.fromkeys(("M", "MS", "ME", "BMS", "BME", "WOM", "LWOM"), _MONTHLY),
    "W": Calendar("weekly", None, "week", (52,)),
    "D": Calendar("daily", None, "day", (7,)),
    "B": Calendar("business daily", None, "business day", (5,)),
}
_DAY_MINUTES = 24 * 60
_MONTHS = ("JAN", "FEB", "MAR", "APR", "MAY", "JUN", "JUL", "AUG", "SEP", "OCT", "NOV", "DEC")
_WEEKDAYS = ("MON", "TUE", "WED", "THU", "FRI", "SAT", "SUN")
_KNOWN = "yearly, quarterly, monthly, weekly, daily, business daily or hourly"


@dataclass(frozen=True)
class Remedies:
    """Code that mends an index, in terms of what the person passed.

    `base` is an expression for the table with the time index as its index, and `also` is what to change in the call
    when it is used; `present`, `sort` and `unique` are statements about the table itself.
    """

    base: str = "frame"
    present: str = "frame = frame[frame.index.notna()]"
    sort: str = "frame = frame.sort_index()"
    unique: str = "frame = frame[~frame.index.duplicated()]"
    also: str = ""

    def mend(self, code: str) -> str:
        """Write an expression that continues `base`, with what else to change."""
        return f"`{self.base}{code}`{self.also}"


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
    if isinstance(index.dtype, pd.ArrowDtype) and index.dtype.kind == "M":
        index = pd.DatetimeIndex(index)
    if isinstance(index, pd.MultiIndex):
        raise CheckError(
            f"the index has {index.nlevels} levels where one of dates is needed; make them columns with "
            f"`{remedies.base}.reset_index()` and name the time, series and value columns."
        )
    if isinstance(index, pd.DatetimeIndex | pd.PeriodIndex):
        _refuse_disorder(index, remedies)
        return _dates(index, remedies) if isinstance(index, pd.DatetimeIndex) else _periods(index, remedies)
    if pd.api.types.is_integer_dtype(index.dtype):
        _refuse_disorder(index, remedies)
        return _counter(index, remedies)
    first = f", beginning with {index[0]}" if len(index) else ""
    convert = "{0}.astype(int)" if index.inferred_type.endswith("floating") else "pd.to_datetime({0})"
    raise CheckError(
        f"the index holds {index.inferred_type} values{first}, where dates, periods or whole numbers are needed; "
        f"convert it with `{remedies.base}.index = {convert.format(remedies.base + '.index')}`."
    )


def calendar_of(freq: str) -> Calendar | None:
    """Calendar of a pandas frequency such as ``QS-OCT`` or ``15min``; None for one that is not known here."""
    parts = re.fullmatch(r"(\d*)([A-Za-z]+)(-.*)?", freq)
    if parts is None:
        return None
    count = int(parts[1] or 1)
    known = _KINDS.get(parts[2])
    if known is not None:
        return Calendar(known.kind, freq, known.noun, known.seasons) if count == 1 else None
    minutes = count * {"h": 60, "min": 1}.get(parts[2], 0)
    if not 0 < minutes < _DAY_MINUTES or _DAY_MINUTES % minutes:
        return None
    kind: CalendarKind = "minutely" if minutes % 60 else "hourly"
    size, unit = (minutes, "minute") if minutes % 60 else (minutes // 60, "hour")
    per_day = _DAY_MINUTES // minutes
    return Calendar(kind, freq, unit if size == 1 else f"{size} {unit}s", (per_day, 7 * per_day))


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
    numbers = index if isinstance(index, pd.RangeIndex) else pd.Index(index.to_numpy(dtype=np.int64), name=index.name)
    steps = np.diff(numbers.to_numpy())
    odd = np.flatnonzero(steps != 1)
    if odd.size:
        before, found = numbers[odd[0]], numbers[odd[0] + 1]
        remedy = f".reindex(range({numbers[0]}, {numbers[-1] + 1}))"
        if (steps == steps[0]).all():
            remedy = ".reset_index(drop=True)"
        raise CheckError(
            f"the index does not count by one: after {before} comes {found}, {before + 1} is expected; mend it with "
            f"{remedies.mend(remedy)}."
        )
    return Calendar("counter", None, "step"), numbers


def _periods(index: pd.PeriodIndex, remedies: Remedies) -> tuple[Calendar, pd.Index]:
    calendar = calendar_of(index.freqstr)
    if index.freqstr == "B":
        raise CheckError(
            "the index holds business-day periods, which pandas gives up; use dates with "
            f"{remedies.mend('.to_timestamp()')}."
        )
    if calendar is None:
        raise _unknown_step(f"periods of {index.freqstr!r}", remedies)
    ordinals = index.asi8
    # Periods of several minutes or hours count in single ones.
    step = (index[0] + 1).ordinal - index[0].ordinal
    odd = np.flatnonzero(np.diff(ordinals) != step)
    if odd.size:
        before, found = index[odd[0]], index[odd[0] + 1]
        first, last = (stamp_text(stamp, calendar.kind) for stamp in (index[0], index[-1]))
        remedy = f'.reindex(pd.period_range("{first}", "{last}", freq="{index.freqstr}"))'
        raise CheckError(
            f"the index is {calendar.kind}, but after {stamp_text(before)} comes {stamp_text(found)} where "
            f"{stamp_text(before + 1)} is expected; put in what is missing with "
            f"{remedies.mend(remedy)}."
        )
    return calendar, index


def _unknown_step(found: str, remedies: Remedies) -> CheckError:
    return CheckError(
        f"the index has {found}, not {_KNOWN} ones; number the rows with "
        f"{remedies.mend('.reset_index(drop=True)')} and give the season, for example season=1 for none."
    )


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
        expected = pd.date_range(stamps[0], stamps[-1], freq=freq)
        common = int(stamps.isin(expected).sum())
        score = common / (len(expected) + len(stamps) - common)
        if score == 1.0:
            calendar = calendar_of(freq)
            assert calendar is not None
            return calendar, pd.DatetimeIndex(index, freq=freq)
        if best is None or score > best[0]:
            best = score, freq, expected
    if best is None or best[0] < 0.5:
        raise _irregular(wall, zoned, remedies)
    raise _interrupted(index if best[2].tz is not None else wall, best[1], best[2], zoned, remedies)


def _gap_days(wall: pd.DatetimeIndex) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    return np.asarray(np.diff(wall.to_numpy()) / np.timedelta64(1, "D"), dtype=np.float64)


def _candidates(wall: pd.DatetimeIndex) -> list[str]:
    """Frequencies worth trying, by the median distance of the stamps."""
    if len(wall) < 2:
        return []
    gap = float(np.median(_gap_days(wall)))
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
    minutes = gap * _DAY_MINUTES
    if minutes < 1 or minutes != int(minutes):
        return []
    freq = f"{int(minutes) // 60}h" if minutes % 60 == 0 else f"{int(minutes)}min"
    freq = {"1h": "h", "1min": "min"}.get(freq, freq)
    return [freq] if calendar_of(freq) else []


def _interrupted(
    stamps: pd.DatetimeIndex, freq: str, expected: pd.DatetimeIndex, zoned: bool, remedies: Remedies
) -> CheckError:
    """Error for a known calendar with stamps missing or beside it."""
    calendar = calendar_of(freq)
    kind = calendar.kind if calendar else None
    row = next((i for i, (a, b) in enumerate(zip(stamps, expected, strict=False)) if a != b), len(expected))
    beside = stamps[~stamps.isin(expected)]
    # Stamps beside the calendar need their day told, even in a monthly index.
    texts = [stamp_text(stamp, None if len(beside) else kind) for stamp in (stamps[row - 1], stamps[row])]
    wanted = (
        f" where {stamp_text(expected[row], None if len(beside) else kind)} is expected" if row < len(expected) else ""
    )
    where = f"after {texts[0]} comes {texts[1]}" if row else f"it begins with {texts[1]}"
    if len(beside):
        remedy = _by_period(stamps.tz_localize(None), zoned, remedies) or _collect(freq, remedies)
    else:
        remedy = "put in what is missing with " + remedies.mend(f'.asfreq("{freq}")')
    return CheckError(f"the index is {kind}, but {where}{wanted}; {remedy}.")


def _irregular(wall: pd.DatetimeIndex, zoned: bool, remedies: Remedies) -> CheckError:
    """Error for stamps that follow none of the known calendars."""
    gaps = _gap_days(wall)
    months = np.diff(wall.year.to_numpy() * 12 + wall.month.to_numpy())
    by_period = _by_period(wall, zoned, remedies)
    if gaps.size and by_period is None:
        if (gaps == gaps[0]).all():
            return _unknown_step(f"stamps every {_length(gaps[0])}", remedies)
        if (months == months[0]).all() and months[0] > 1:
            return _unknown_step(f"stamps every {months[0]} months", remedies)
    usual = float(np.median(gaps)) if gaps.size else 0.0
    row = int(np.flatnonzero(gaps != usual)[0]) if (gaps != usual).any() else 0
    sizes = ((300, "YS"), (80, "QS"), (26, "MS"), (6, "W"), (0.9, "D"))
    freq = next((name for size, name in sizes if usual > size), "h")
    remedy = by_period or _collect(freq, remedies)
    return CheckError(
        f"the index is not {_KNOWN}: the usual step is {_length(usual)}, but after {stamp_text(wall[row])} comes "
        f"{stamp_text(wall[row + 1])}; {remedy}."
    )


def _by_period(wall: pd.DatetimeIndex, zoned: bool, remedies: Remedies) -> str | None:
    """Remedy for stamps that are one a period, though not on the same day or hour of each."""
    local = ".tz_localize(None)" if zoned else ""
    for freq in ("Y", "Q", "M", "W", "D", "h"):
        if (np.diff(wall.to_period(freq).asi8) == 1).all():
            noun = _KINDS[freq].noun if freq in _KINDS else "hour"
            return f"there is one a {noun}, so use periods with " + remedies.mend(f'{local}.to_period("{freq}")')
    return None


def _length(days: float) -> str:
    sizes = ((1.0, "day"), (1 / 24, "hour"), (1 / _DAY_MINUTES, "minute"))
    size, noun = next((one for one in sizes if days >= one[0]), (1 / _DAY_MINUTES / 60, "second"))
    text = f"{days / size:.4g} {noun}"
    return text if text.startswith("1 ") else text + "s"


def _collect(freq: str, remedies: Remedies) -> str:
    totals = remedies.mend(f'.resample("{freq}").sum()')
    return f"collect them by calendar with {totals}, or with mean() where they are levels"
