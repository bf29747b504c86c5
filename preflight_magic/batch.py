"""Many series: checked one by one or in a pool, with a cache and progress."""

from __future__ import annotations

import hashlib
import operator
from collections import OrderedDict
from collections.abc import Hashable, Iterable, Iterator, Mapping, Sequence
from concurrent.futures import Executor
from dataclasses import replace
from typing import Any, TypeVar

from preflight_magic import __version__
from preflight_magic.intake import read
from preflight_magic.intake.dates import short
from preflight_magic.intake.read import season_of
from preflight_magic.intake.spans import spans_of
from preflight_magic.ladder import Climb, climb
from preflight_magic.model import CheckError, TimeSeries
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.pooling import Lost, Work, in_pool
from preflight_magic.progress import Progress, Tally, follow
from preflight_magic.report import Report
from preflight_magic.series_report import SeriesReport
from preflight_magic.together import check_target

CACHE_SIZE = 2000
"""Most climbs kept; a climb takes some tens of kilobytes."""

T = TypeVar("T")

_cache: OrderedDict[bytes, Climb] = OrderedDict()


class Interrupted(KeyboardInterrupt):
    """An interrupt in the middle of a check; `report` holds the series that were done.

    Attributes
    ----------
    report : Report
    total : int
        Series of the whole check.
    """

    def __init__(self, report: Report, total: int) -> None:
        super().__init__(
            f"stopped after {len(report)} of {total} series; the same check again goes on from there, as long as the "
            "cache holds what is done"
        )
        self.report, self.total = report, total


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
    Interrupted
        After an interrupt from the keyboard; its `report` holds what was done.
    """
    spans, season = spans_of(exclude), season_of(season)
    _refuse_wrong_tools(pool, progress)
    if isinstance(repair, Iterator):
        repair = list(repair)
    every = _read(frame, season, time, series, value, only, spans, repair)
    if target is not None:
        check_target([one.name for one in every], target)
    settings = _settings(season, horizon, significance, spans)
    asked: dict[str, object] = {"season": settings.season, "horizon": horizon, "significance": significance}
    asked |= {"time": time, "series": series, "value": value, "exclude": spans or None, "repair": repair}
    asked["target"] = target
    usual = {"significance": 0.05, "repair": True}
    asked["only"] = None if only is None else tuple(one.name for one in every)
    options = {key: one for key, one in asked.items() if one is not None and (key not in usual or one != usual[key])}
    tally, done = Tally(), list[SeriesReport]()
    try:
        for one in follow(_stream(every, settings, cache, pool, tally), len(every), progress, tally):
            done.append(one)
    except KeyboardInterrupt:
        raise Interrupted(Report(done, options), len(every)) from None
    return Report(done, options)


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
    every, settings, o = opened("stream", frame, options)
    tally = Tally()
    return follow(_stream(every, settings, o["cache"], o["pool"], tally), len(every), o["progress"], tally)


def opened(
    caller: str, frame: Any, options: Mapping[str, Any]
) -> tuple[tuple[TimeSeries, ...], Settings, dict[str, Any]]:
    """Read a table with the options of `check`, given by name, in the name of a function that hands them on.

    Parameters
    ----------
    caller : str
    frame : DataFrame, Series, or anything with ``to_pandas``
    options : Mapping

    Returns
    -------
    every : tuple of TimeSeries
    settings : Settings
    given : dict
        All options, those left out at their defaults.
    """
    given: dict[str, Any] = {"season": None, "horizon": None, "time": None, "series": None, "value": None, "only": None}
    given |= {"exclude": None, "repair": True, "cache": True, "pool": None, "progress": None, "significance": 0.05}
    given |= {"target": None}
    unknown = sorted(options.keys() - given.keys())
    if unknown:
        raise TypeError(f"{caller}() has no option {', '.join(unknown)}")
    o = {**given, **options}
    o["exclude"], o["season"] = spans_of(o["exclude"]), season_of(o["season"])
    _refuse_wrong_tools(o["pool"], o["progress"])
    every = _read(frame, o["season"], o["time"], o["series"], o["value"], o["only"], o["exclude"], o["repair"])
    if o["target"] is not None:
        check_target([one.name for one in every], o["target"])
    return every, _settings(o["season"], o["horizon"], o["significance"], o["exclude"]), o


def _read(
    frame: Any, season: Any, time: Any, series: Any, value: Any, only: Any, exclude: Any, repair: Any
) -> tuple[TimeSeries, ...]:
    return read(frame, season=season, time=time, series=series, value=value, only=only, exclude=exclude, repair=repair)


def _refuse_wrong_tools(pool: Any, progress: Any) -> None:
    if pool is not None and not callable(getattr(pool, "submit", None)):
        raise CheckError(f"pool is {short(pool)}, not an executor; give one of concurrent.futures, or None.")
    if not (progress is None or isinstance(progress, bool) or callable(progress)):
        raise CheckError(f"progress is {short(progress)}; give True, False, None or a function of (done, total).")


def _settings(season: Any, horizon: Any, significance: Any, exclude: Any) -> Settings:
    try:
        size = float(significance)
    except (TypeError, ValueError):
        size = float("nan")
    # Quantiles closer to the end than this are no numbers.
    if not 1e-9 < size < 1.0 - 1e-9:
        raise CheckError(f"significance is {significance!r}; give a number between 0 and 1, such as 0.05.")
    steps = None
    if horizon is not None:
        try:
            steps = operator.index(horizon)
        except TypeError:
            steps = 0
        if steps < 1:
            raise CheckError(f"horizon is {horizon!r}; give a whole number of steps, at least 1.")
    return Settings(season=season, horizon=steps, thresholds=Thresholds(significance=size), exclude=exclude)


def _stream(
    every: Sequence[TimeSeries], settings: Settings, cache: bool, pool: Executor | None, tally: Tally
) -> Iterator[SeriesReport]:
    """Reports in the order of the series; after an interrupt those that are done, then the interrupt."""
    keys = [_key(one, settings) if cache else None for one in every]
    # Held from here on, since the results of this run may push them out of the cache.
    known = {place: kept for place, key in enumerate(keys) if (kept := _recalled(key)) is not None}
    places = [place for place in range(len(every)) if place not in known]
    start = 0
    for position, found in computed(checked, [every[place] for place in places], settings, pool, tally):
        place = places[position]
        yield from (SeriesReport(every[at], settings, known[at]) for at in range(start, place) if at in known)
        yield report_of(every[place], keys[place], settings, found)
        start = place + 1
    yield from (SeriesReport(every[at], settings, known[at]) for at in range(start, len(every)))


def computed(
    work: Work[T], todo: Sequence[TimeSeries], settings: Settings, pool: Executor | None, tally: Tally
) -> Iterator[tuple[int, T | Lost]]:
    """Do the same with each series, here or in a pool, and tell the position of each result."""
    tally.wanted = len(todo)
    if pool is not None:
        yield from in_pool(work, todo, settings, pool, tally)
        return
    for position, one in enumerate(todo):
        found = work(one, settings)
        tally.finished += 1
        yield position, found


def checked(one: TimeSeries, settings: Settings) -> Climb | Lost:
    """Climb the ladder; a fault of ours makes this series infeasible and stops no other."""
    try:
        # What the plan makes of the series costs less to compute again than to send and to keep.
        return replace(climb(one, settings), transformed=None)
    except Exception as error:
        return Lost(
            f"the check failed inside preflight_magic ({type(error).__name__}: {error}); please report this with the "
            "data, and check the other columns meanwhile"
        )


def report_of(one: TimeSeries, key: bytes | None, settings: Settings, known: Climb | Lost) -> SeriesReport:
    """Report of a series, infeasible where its climb was lost; `key` is what the cache will know it by."""
    if isinstance(known, Lost):
        failed = replace(one, problem=f"column {one.name!r}: {known.reason}.")
        return SeriesReport(failed, settings, climb(failed, settings))
    _remember(key, known)
    return SeriesReport(one, settings, known)


def _recalled(key: bytes | None) -> Climb | None:
    if key is None or key not in _cache:
        return None
    _cache.move_to_end(key)
    return _cache[key]


def _remember(key: bytes | None, found: Climb) -> None:
    if key is None:
        return
    _cache[key] = found
    while len(_cache) > CACHE_SIZE:
        _cache.popitem(last=False)


def _key(one: TimeSeries, settings: Settings) -> bytes | None:
    """What the cache knows a climb by; None for a series that cannot be checked."""
    return None if one.problem is not None else digest_of(one, settings)


def digest_of(one: TimeSeries, settings: Settings) -> bytes:
    """Digest of everything that findings depend on: values, name, calendar, options, version."""
    index = one.values.index
    digest = hashlib.blake2b(one.values.to_numpy().tobytes(), digest_size=16)
    told = (one.name, type(one.name).__name__, one.calendar, one.season, one.repairs, one.problem, one.notes)
    place = (str(index.dtype), index[:1].tolist(), len(index))
    digest.update(repr((told, settings, place, __version__)).encode())
    return digest.digest()
