"""Many series: checked one by one or in a pool, with a cache and progress."""

from __future__ import annotations

import hashlib
import operator
from collections import OrderedDict
from collections.abc import Hashable, Iterable, Iterator, Sequence
from concurrent.futures import Executor
from dataclasses import replace
from itertools import repeat
from typing import Any

import numpy as np

from preflight_magic.intake import read
from preflight_magic.intake.spans import spans_of
from preflight_magic.ladder import Climb, climb
from preflight_magic.model import CheckError, TimeSeries
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.progress import Progress, follow
from preflight_magic.report import Report
from preflight_magic.series_report import SeriesReport
from preflight_magic.together import check_target

CACHE_SIZE = 2000
"""Most climbs kept; a climb takes some tens of kilobytes."""

_cache: OrderedDict[bytes, Climb] = OrderedDict()


def check(
    frame: Any,
    *,
    season: int | Sequence[int] | None = None,
    horizon: int | None = None,
    time: Hashable | None = None,
    series: Hashable | None = None,
    value: Hashable | None = None,
    significance: float = 0.05,
    only: Hashable | Iterable[Hashable] | None = None,
    target: Hashable | None = None,
    exclude: Iterable[tuple[Any, Any]] | None = None,
    repair: bool | str | Iterable[str] = True,
    cache: bool = True,
    pool: Executor | None = None,
    progress: Progress = None,
) -> Report:
    """Check the series of a table and recommend transforms.

    Parameters
    ----------
    frame : DataFrame, Series, or anything with ``to_pandas``
        Wide: a column a series, the time in the index. Long: `time`, `series` and `value` name the columns.
    season : int or sequence of int, optional
        Seasonal periods in steps; 1 for none. By default those of the calendar.
    horizon : int, optional
        Steps ahead; by default one season, at least 6, at most a quarter of the data. It never changes a plan.
    time, series, value : Hashable, optional
        Columns of a long table.
    significance : float
        Size of the tests shown; it changes what their sentences say, never the plan.
    only : name or iterable of names, optional
        Series to check.
    target : name, optional
        The series that the others are meant to explain: `Report.together` says whether they may.
    exclude : iterable of (start, end), optional
        Spans known to be special: left out of every decision as if missing.
    repair : bool, str or iterable of str
        Repairs allowed.
    cache : bool
        Reuse results of identical series and options within the process.
    pool : concurrent.futures.Executor, optional
        Where series are checked; here by default.
    progress : bool, callable or None
        None shows it when the work is long; a callable gets (done, total).

    Returns
    -------
    Report

    Raises
    ------
    CheckError
        When nothing can be checked; a series that cannot be checked among others is reported as ``infeasible``.
    """
    spans = spans_of(exclude)
    every = _read(frame, season, time, series, value, only, spans, repair)
    if target is not None:
        check_target([one.name for one in every], target)
    settings = _settings(season, horizon, significance, spans)
    return Report(follow(_stream(every, settings, cache, pool), len(every), progress), target)


def stream(frame: Any, **options: Any) -> Iterator[SeriesReport]:
    """Check the series of a table one by one as they are asked for.

    Parameters
    ----------
    frame : DataFrame, Series, or anything with ``to_pandas``
    **options
        As for `check`.

    Yields
    ------
    SeriesReport
        In the order of the table.
    """
    given: dict[str, Any] = {"season": None, "horizon": None, "time": None, "series": None, "value": None, "only": None}
    given |= {"exclude": None, "repair": True, "cache": True, "pool": None, "progress": None, "significance": 0.05}
    given |= {"target": None}
    unknown = sorted(options.keys() - given.keys())
    if unknown:
        raise TypeError(f"stream() has no option {', '.join(unknown)}")
    o = given | options
    o["exclude"] = spans_of(o["exclude"])
    every = _read(frame, o["season"], o["time"], o["series"], o["value"], o["only"], o["exclude"], o["repair"])
    if o["target"] is not None:
        check_target([one.name for one in every], o["target"])
    settings = _settings(o["season"], o["horizon"], o["significance"], o["exclude"])
    return follow(_stream(every, settings, o["cache"], o["pool"]), len(every), o["progress"])


def _read(
    frame: Any, season: Any, time: Any, series: Any, value: Any, only: Any, exclude: Any, repair: Any
) -> tuple[TimeSeries, ...]:
    return read(frame, season=season, time=time, series=series, value=value, only=only, exclude=exclude, repair=repair)


def _settings(season: Any, horizon: Any, significance: Any, exclude: Any) -> Settings:
    try:
        size = float(significance)
    except (TypeError, ValueError):
        size = float("nan")
    if not 0.0 < size < 1.0:
        raise CheckError(f"significance is {significance!r}; give a number between 0 and 1, such as 0.05.")
    steps = None
    if horizon is not None:
        try:
            steps = operator.index(horizon)
        except TypeError:
            steps = 0
        if steps < 1:
            raise CheckError(f"horizon is {horizon!r}; give a whole number of steps, at least 1.")
    asked = None if season is None else tuple(np.atleast_1d(np.asarray(season)).astype(int).tolist())
    return Settings(season=asked, horizon=steps, thresholds=Thresholds(significance=size), exclude=exclude)


def _stream(
    every: Sequence[TimeSeries], settings: Settings, cache: bool, pool: Executor | None
) -> Iterator[SeriesReport]:
    """Reports in the order of the series."""
    keys = [_key(one, settings) if cache else None for one in every]
    waiting = [key is None or key not in _cache for key in keys]
    todo = [one for one, waits in zip(every, waiting, strict=True) if waits]
    found = map(_checked, todo, repeat(settings)) if pool is None else pool.map(_checked, todo, repeat(settings))
    for one, key, waits in zip(every, keys, waiting, strict=True):
        if waits:
            source, known = next(found)
            if source.problem is None:
                _remember(key, known)
        elif key is not None and key in _cache:
            source, known = one, _cache[key]
            _cache.move_to_end(key)
        else:
            # other results of this run have pushed it out
            source, known = _checked(one, settings)
        yield SeriesReport(source, settings, known)


def _checked(one: TimeSeries, settings: Settings) -> tuple[TimeSeries, Climb]:
    """Climb the ladder; a fault of ours makes this series infeasible and stops no other."""
    try:
        return one, climb(one, settings)
    except Exception as error:
        problem = (
            f"column {one.name!r}: the check failed inside preflight_magic ({type(error).__name__}: {error}); "
            "please report this with the data, and check the other columns meanwhile."
        )
        failed = replace(one, problem=problem)
        return failed, climb(failed, settings)


def _remember(key: bytes | None, found: Climb) -> None:
    if key is None:
        return
    _cache[key] = found
    while len(_cache) > CACHE_SIZE:
        _cache.popitem(last=False)


def _key(one: TimeSeries, settings: Settings) -> bytes | None:
    """Digest of everything a climb depends on; None for a series that cannot be checked."""
    if one.problem is not None:
        return None
    index = one.values.index
    digest = hashlib.blake2b(one.values.to_numpy().tobytes(), digest_size=16)
    told = (one.name, type(one.name).__name__, one.calendar, one.season, one.repairs, one.notes, settings)
    digest.update(repr((told, str(index.dtype), index[0], len(index))).encode())
    return digest.digest()
