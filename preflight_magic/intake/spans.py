"""Spans of time that the person excludes: read, checked and laid on an index."""

from __future__ import annotations

import datetime
import operator
from collections.abc import Iterable
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CheckError

Span = tuple[Any, Any]
"""First and last stamp, both included, in any form that pandas reads as a date, or numbers."""


def spans_of(exclude: Any) -> tuple[Span, ...]:
    """Check the form of `exclude`: pairs (start, end), or a single pair."""
    if exclude is None:
        return ()
    single = isinstance(exclude, tuple) and len(exclude) == 2 and _is_stamp(exclude[0])
    given = [exclude] if single or not _iterable(exclude) else list(exclude)
    spans: list[Span] = []
    for span in given:
        if not isinstance(span, tuple | list) or len(span) != 2 or not all(_is_stamp(end) for end in span):
            raise CheckError(
                f"exclude holds {span!r} where a pair (start, end) is needed; give for example "
                "exclude=[('2020-03', '2020-06')]."
            )
        spans.append((span[0], span[1]))
    return tuple(spans)


def _iterable(value: Any) -> bool:
    return isinstance(value, Iterable) and not isinstance(value, str)


def _is_stamp(end: Any) -> bool:
    return end is not pd.NaT and isinstance(end, str | pd.Period | datetime.date | np.datetime64 | int | np.integer)


def excluded(index: pd.Index, spans: tuple[Span, ...]) -> tuple[npt.NDArray[np.bool_] | None, list[bool]]:
    """Mask of the stamps inside any span, and which spans hold at least one stamp."""
    if not spans:
        return None, []
    mask, held = np.zeros(len(index), dtype=bool), []
    for span in spans:
        try:
            inside = index.slice_indexer(*(_end(end, index, i) for i, end in enumerate(span)))
        except (KeyError, TypeError, ValueError) as error:
            raise CheckError(
                f"exclude holds {span!r}, which cannot be laid on an index from {index[0]!s} to {index[-1]!s}; write "
                "both ends as the index does."
            ) from error
        held.append(inside.stop > inside.start)
        mask[inside] = True
    return mask, held


def _end(end: Any, index: pd.Index, side: int) -> Any:
    """Write one end of a span as the index does; a plain date stands for the whole day."""
    if not isinstance(index, pd.DatetimeIndex | pd.PeriodIndex):
        return operator.index(end)
    if isinstance(end, int | np.integer):
        raise TypeError("a number is no date")
    if isinstance(end, pd.Period):
        end = end.end_time if side else end.start_time
    elif isinstance(end, datetime.date) and not isinstance(end, datetime.datetime):
        return end.isoformat()
    elif not isinstance(end, str):
        end = pd.Timestamp(end)
    if isinstance(end, pd.Timestamp):
        zone = index.tz if isinstance(index, pd.DatetimeIndex) else None
        if zone is not None and end.tz is None:
            end = end.tz_localize(zone)
        if isinstance(index, pd.PeriodIndex):
            return pd.Period(end, freq=index.freqstr)
    return end


def refuse_empty_spans(spans: tuple[Span, ...], held: list[list[bool]]) -> None:
    """Refuse a span that holds no stamp of any index; `held` has one row an index and one entry a span."""
    for i, span in enumerate(spans):
        if not any(hits[i] for hits in held):
            raise CheckError(
                f"exclude holds ({span[0]!s}, {span[1]!s}), and no row lies in it; give the first and the last stamp "
                "of a span of the data."
            )
