"""How stamps of a time index and counts are written in a sentence."""

from __future__ import annotations

import pandas as pd

from preflight_magic.model import CalendarKind, Stamp

_FORMATS: dict[str, str] = {"yearly": "%Y", "quarterly": "%Y-%m", "monthly": "%Y-%m"}


def stamp_text(stamp: Stamp, kind: CalendarKind | None = None) -> str:
    """Write a stamp as briefly as its calendar allows: ``2019-04`` in a monthly index.

    Parameters
    ----------
    stamp : pandas.Period, pandas.Timestamp or int
    kind : CalendarKind, optional
        What the index counts; None where that is not known, then the date, and the time unless it is midnight.
    """
    if isinstance(stamp, pd.Period):
        return f"{stamp.start_time:%Y-%m-%d}" if stamp.freqstr.startswith("W") else str(stamp)
    if not isinstance(stamp, pd.Timestamp):
        return str(stamp)
    if kind in _FORMATS:
        return format(stamp, _FORMATS[kind])
    if stamp == stamp.normalize() and kind not in ("hourly", "minutely"):
        return f"{stamp:%Y-%m-%d}"
    return f"{stamp:%Y-%m-%d %H:%M:%S}" if stamp.second else f"{stamp:%Y-%m-%d %H:%M}"


def counted(n: int, noun: str) -> str:
    """Write a count with its noun: ``1 value``, ``3 values``."""
    return f"{n} {noun}" if n == 1 else f"{n} {noun}s"
