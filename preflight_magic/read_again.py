"""A series read again the way a person wants it: with another season, or without a span."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from preflight_magic.intake.columns import Column, Options, to_series
from preflight_magic.intake.mend import Mended
from preflight_magic.intake.read import season_of
from preflight_magic.intake.spans import excluded, refuse_empty_spans, spans_of
from preflight_magic.model import CheckError, FillGaps, TimeSeries


def with_season(source: TimeSeries, season: int | Sequence[int]) -> TimeSeries:
    """The series with other seasonal periods to consider.

    Parameters
    ----------
    source : TimeSeries
    season : int or sequence of int
        In steps; 1 for none.

    Returns
    -------
    TimeSeries

    Raises
    ------
    CheckError
        When a period is no whole number, or the series does not hold one cycle of it.
    """
    return _again(source, season_of(season), None)


def without_span(source: TimeSeries, start: Any, end: Any) -> TimeSeries:
    """The series with one more span left out, as if missing.

    Parameters
    ----------
    source : TimeSeries
    start, end : str, date, Period or int
        First and last stamp, both included, written as the index writes them.

    Returns
    -------
    TimeSeries

    Raises
    ------
    CheckError
        When the span holds no value, or too few are left.
    """
    spans = spans_of([(start, end)])
    mask, held = excluded(source.values.index, spans)
    refuse_empty_spans(spans, [held])
    return _again(source, source.season, mask)


def _again(source: TimeSeries, season: tuple[int, ...] | None, mask: npt.NDArray[np.bool_] | None) -> TimeSeries:
    if source.problem is not None or source.calendar is None:
        raise CheckError(source.problem or f"series {source.name!r} has no calendar.")
    values = source.values
    raw = Column(source.name, f"column {source.name!r}", values.to_numpy(dtype=np.float64, copy=True))
    # What made the index regular stays; whether gaps are filled follows from the values.
    kept = tuple(repair for repair in source.repairs if not isinstance(repair, FillGaps))
    made = to_series(raw, Mended(source.calendar, values.index, None, kept), mask, Options(season))
    if made.problem is not None:
        raise CheckError(made.problem)
    return made
