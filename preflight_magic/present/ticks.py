"""Where the ticks of a picture stand and what they say; positions on a time axis are steps of the index."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd

from preflight_magic.present import words
from preflight_magic.stamps import stamp_text

_MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"]
_HOURS = {"hour": 1.0, "day": 24.0, "month": 28 * 24.0, "year": 365 * 24.0}
_SPANS: tuple[tuple[str, int], ...] = (
    ("hour", 1), ("hour", 6), ("day", 1), ("day", 2), ("day", 7), ("month", 1), ("month", 3), ("month", 6),
    *(("year", n * 10**k) for k in range(4) for n in (1, 2, 5)),
)  # fmt: skip


def time_ticks(index: pd.Index, most: int = 7) -> tuple[list[int], list[str]]:
    """Positions and labels of two to `most` round stamps of a time index.

    The finest of hours, days, months and years of which there are not too many; round numbers for an index of
    integers; both ends where nothing is round.
    """
    if not isinstance(index, pd.PeriodIndex | pd.DatetimeIndex) or len(index) < 2:
        return _count_ticks(index, most)
    ends = [0, len(index) - 1], [stamp_text(index[0]), stamp_text(index[-1])]
    try:
        stamps = index.to_timestamp() if isinstance(index, pd.PeriodIndex) else index
    except (pd.errors.OutOfBoundsDatetime, OverflowError):
        return ends
    hours = float(np.median(np.diff(stamps.tz_localize(None).to_numpy()) / np.timedelta64(1, "s"))) / 3600
    for unit, every in _SPANS:
        if hours > 1.01 * _HOURS[unit] * (1.2 if unit == "month" else 1):
            continue
        positions = _round_ones(stamps, unit, every)
        if 2 <= len(positions) <= most:
            return positions, [_tick_label(stamps[p], unit) for p in positions]
    return ends


def _round_ones(stamps: pd.DatetimeIndex, unit: str, every: int) -> list[int]:
    """Positions where a new hour, day, month or year begins whose number is a multiple of `every`."""
    year, month, day, hour = (np.asarray(part) for part in (stamps.year, stamps.month, stamps.day, stamps.hour))
    months = 12 * year + month - 1
    days = 31 * months + day
    running, phase = {
        "hour": (24 * days + hour, hour),
        "day": (days, day - 1),
        "month": (months, month - 1),
        "year": (year, year),
    }[unit]
    new = np.flatnonzero(np.diff(running, prepend=running[0] - 1))
    new = new[phase[new] % every == 0]
    opens = {"year": month[0] == 1, "month": day[0] <= 3, "day": hour[0] == 0, "hour": True}
    return [int(p) for p in new if p > 0 or opens[unit]]


def _tick_label(label: pd.Timestamp, unit: str) -> str:
    if unit == "year":
        return str(label.year)
    if unit == "month":
        return f"{_MONTHS[label.month - 1]} {label.year}"
    day = f"{label.day} {_MONTHS[label.month - 1]}"
    return day if unit == "day" else f"{day} {label.hour:02d}:00"


def _count_ticks(index: pd.Index, most: int) -> tuple[list[int], list[str]]:
    if not len(index):
        return [], []
    every = round_step(len(index) / most)
    first = int(index[0]) if pd.api.types.is_integer_dtype(index.dtype) else 0
    positions = [p for p in range(len(index)) if (first + p) % every == 0]
    return positions, [words.number(first + p, 9) for p in positions]


def round_step(least: float) -> int:
    """Smallest of 1, 2, 5, 10, 20, 50, ... that is at least `least`."""
    if least <= 1:
        return 1
    power = 10 ** math.floor(math.log10(least))
    return int(next(n * power for n in (1, 2, 5, 10) if n * power >= least))


def lag_ticks(nlags: int, period: int) -> list[int]:
    """Lags to label: whole seasons where several fit, else parts of the season, else round numbers."""
    if not 1 < period <= nlags:
        every = round_step(nlags / 5)
    elif nlags // period > 3:
        every = period * max(1, math.ceil(nlags / period / 5))
    else:
        every = next((d for d in range(1, period) if period % d == 0 and nlags / d <= 6), period)
    return list(range(every, nlags + 1, every))


def value_ticks(low: float, high: float, most: int = 4) -> tuple[list[float], list[str]]:
    """At most `most` round values between two bounds, and their labels."""
    span = high - low
    if not (math.isfinite(span) and span > 0):
        return [low], [words.number(low)]
    size = 10.0 ** math.floor(math.log10(span))
    for step in (size / 5, size / 2, size, 2 * size, 5 * size):
        first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
        if last - first < most:
            ticks = [k * step for k in range(first, last + 1)]
            return ticks, [_value_label(t, step, max(abs(low), abs(high))) for t in ticks]
    return [], []


def _value_label(tick: float, step: float, largest: float) -> str:
    if abs(tick) < step / 2:
        return "0"
    if largest >= 1e7 or step < 1e-4:
        return words.number(tick, max(1, math.ceil(math.log10(largest / step) - 1e-9) + 1))
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    return ("" if tick > 0 else words.MINUS) + f"{abs(tick):,.{decimals}f}"
