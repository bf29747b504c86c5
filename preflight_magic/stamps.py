"""How stamps of a time index and counts are written in a sentence, and how many days a stamp stands for."""

from __future__ import annotations

from datetime import time

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CalendarKind

MIDNIGHT = time()
_FORMATS: dict[str, str] = {"yearly": "%Y", "quarterly": "%Y-%m", "monthly": "%Y-%m"}


def stamp_text(stamp: object, kind: CalendarKind | None = None) -> str:
    """Write a stamp as briefly as its calendar allows: ``2019-04`` in a monthly index.

    Parameters
    ----------
    stamp : pandas.Period, pandas.Timestamp or int
        Or whatever else stands in an index.
    kind : CalendarKind, optional
        What the index counts; None where that is not known, then the date, and the time unless it is midnight.
    """
    if isinstance(stamp, pd.Period):
        return f"{stamp.start_time:%Y-%m-%d}" if stamp.freqstr.startswith("W") else str(stamp)
    if not isinstance(stamp, pd.Timestamp):
        return str(stamp)
    if kind in _FORMATS:
        return format(stamp, _FORMATS[kind])
    if is_midnight(stamp) and kind not in ("hourly", "minutely"):
        return f"{stamp:%Y-%m-%d}"
    if stamp.microsecond or stamp.nanosecond:
        return str(stamp)
    return f"{stamp:%Y-%m-%d %H:%M:%S}" if stamp.second else f"{stamp:%Y-%m-%d %H:%M}"


def is_midnight(stamp: pd.Timestamp) -> bool:
    """Whether a stamp has no time of day; `Timestamp.normalize` fails where clocks skip midnight."""
    return stamp.time() == MIDNIGHT and stamp.nanosecond == 0


def counted(n: int, noun: str) -> str:
    """Write a count with its noun: ``1 value``, ``3 values``."""
    return f"{n} {noun}" if n == 1 else f"{n} {noun}s"


def days_of(index: pd.Index, unit: str) -> npt.NDArray[np.float64] | None:
    """Count the days or the workdays (Monday to Friday) in the month, quarter or year of each stamp.

    Parameters
    ----------
    index : Index, shape (n,)
        A regular index of at least two periods or timestamps, or of one whose frequency it holds.
    unit : {"days", "workdays"}

    Returns
    -------
    ndarray, shape (n,), or None
        None where the index does not count whole months.
    """
    freq = getattr(index, "freq", None)
    if len(index) == 1 and freq is not None:
        both = days_of(index.append(type(index)([index[0] + freq])), unit)
        return None if both is None else both[:1]
    if isinstance(index, pd.PeriodIndex):
        stamps = index.to_timestamp(how="start")
    elif isinstance(index, pd.DatetimeIndex):
        stamps = index.tz_localize(None)
    else:
        return None
    first = np.asarray(stamps.year, dtype="int64") * 12 + np.asarray(stamps.month, dtype="int64") - 1 - 1970 * 12
    length = np.unique(np.diff(first))
    if len(length) != 1 or length[0] < 1:
        return None
    # Stamps late in the month close their period, the others open it.
    if isinstance(index, pd.DatetimeIndex) and (np.asarray(stamps.day) > 15).all():
        first = first - length[0] + 1
    start = first.astype("datetime64[M]").astype("datetime64[D]")
    end = (first + length[0]).astype("datetime64[M]").astype("datetime64[D]")
    counts = end - start if unit == "days" else np.busday_count(start, end)
    return np.asarray(counts.astype("float64"))
