"""Errors for time indexes that are not regular: the first odd stamp, and the code that mends it."""

from __future__ import annotations

import numpy as np
import pandas as pd

from preflight_magic.intake.frequencies import DAY_MINUTES, KINDS, KNOWN, calendar_of
from preflight_magic.intake.remedies import Remedies
from preflight_magic.model import CheckError
from preflight_magic.stamps import stamp_text


def gap_days(wall: pd.DatetimeIndex) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """Days from each stamp to the next; shape (n - 1,)."""
    return np.asarray(np.diff(wall.to_numpy()) / np.timedelta64(1, "D"), dtype=np.float64)


def unknown_step(found: str, remedies: Remedies) -> CheckError:
    """Error for steps that are all alike, of a length that is not known here."""
    return CheckError(
        f"the index has {found}, not {KNOWN} ones; number the rows with "
        f"{remedies.mend('.reset_index(drop=True)')} and give the season, for example season=1 for none."
    )


def interrupted(
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


def irregular(wall: pd.DatetimeIndex, zoned: bool, remedies: Remedies) -> CheckError:
    """Error for stamps that follow none of the known calendars."""
    gaps = gap_days(wall)
    if _weeks_of_thirteen(gaps):
        return CheckError(
            "the index follows a calendar of 4, 4 and 5 weeks, whose steps differ in length; divide totals by their "
            f"weeks where that matters, number the rows with {remedies.mend('.reset_index(drop=True)')} and give "
            "season=12."
        )
    months = np.diff(wall.year.to_numpy() * 12 + wall.month.to_numpy())
    by_period = _by_period(wall, zoned, remedies)
    if gaps.size and by_period is None:
        if (gaps == gaps[0]).all():
            return unknown_step(f"stamps every {_length(gaps[0])}", remedies)
        if (months == months[0]).all() and months[0] > 1:
            return unknown_step(f"stamps every {months[0]} months", remedies)
    usual = float(np.median(gaps)) if gaps.size else 0.0
    row = int(np.flatnonzero(gaps != usual)[0]) if (gaps != usual).any() else 0
    sizes = ((300, "YS"), (80, "QS"), (26, "MS"), (6, "W"), (0.9, "D"))
    freq = next((name for size, name in sizes if usual > size), "h")
    remedy = by_period or _collect(freq, remedies)
    return CheckError(
        f"the index is not {KNOWN}: the usual step is {_length(usual)}, but after {stamp_text(wall[row])} comes "
        f"{stamp_text(wall[row + 1])}; {remedy}."
    )


def _weeks_of_thirteen(gaps: np.ndarray[tuple[int], np.dtype[np.float64]]) -> bool:
    """Whether steps are 4, 4 and 5 weeks in turn, in any order, but for a week more at the end of some years."""
    weeks = gaps / 7.0
    if len(weeks) < 6 or not np.isin(weeks, (4.0, 5.0, 6.0)).all():
        return False
    return any(
        np.count_nonzero(weeks != np.where(np.arange(len(weeks)) % 3 == long, 5.0, 4.0)) <= len(weeks) / 36 + 1
        for long in range(3)
    )


def _by_period(wall: pd.DatetimeIndex, zoned: bool, remedies: Remedies) -> str | None:
    """Remedy for stamps that are one a period, though not on the same day or hour of each."""
    local = ".tz_localize(None)" if zoned else ""
    for freq in ("Y", "Q", "M", "W", "D", "h"):
        if (np.diff(wall.to_period(freq).asi8) == 1).all():
            noun = KINDS[freq].noun if freq in KINDS else "hour"
            return f"there is one a {noun}, so use periods with " + remedies.mend(f'{local}.to_period("{freq}")')
    return None


def _length(days: float) -> str:
    sizes = ((1.0, "day"), (1 / 24, "hour"), (1 / DAY_MINUTES, "minute"))
    size, noun = next((one for one in sizes if days >= one[0]), (1 / DAY_MINUTES / 60, "second"))
    text = f"{days / size:.4g} {noun}"
    return text if text.startswith("1 ") else text + "s"


def _collect(freq: str, remedies: Remedies) -> str:
    totals = remedies.mend(f'.resample("{freq}").sum()')
    return f"collect them by calendar with {totals}, or with mean() where they are levels"
