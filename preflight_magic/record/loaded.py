"""Reports read from a record: everything but the data, and what asks for it says how to join it again."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Mapping
from typing import Any

import numpy as np
import pandas as pd
from pandas.tseries.frequencies import to_offset

from preflight_magic.generated import proved_code
from preflight_magic.ladder import Climb
from preflight_magic.model import Calendar, CheckError, Finding, Step, TimeSeries
from preflight_magic.policy import Settings
from preflight_magic.record.fingerprint import Span, fingerprint, position_of, span_of, steps_on
from preflight_magic.report import Report
from preflight_magic.series_report import SeriesReport

JOIN = "join the data again with report.attach(frame)"


def _refused(what: str) -> Callable[..., Any]:
    """Method that needs the data."""

    def method(self: LoadedSeries, *args: object, **options: object) -> Any:
        raise CheckError(f"column {self.name!r} comes from a record, which holds no data for {what}; {JOIN}.")

    method.__name__ = what.split(" ")[0]
    method.__doc__ = f"Raise a CheckError: a record holds no data for {what}."
    return method


class LoadedSeries(SeriesReport):
    """Findings and plan of one series from a record, without its data."""

    has_data = False

    def __init__(
        self,
        name: Hashable,
        problem: str | None,
        found: Climb,
        chosen: Any,
        span: Span,
        fingerprint: str,
        calendar: Calendar | None,
        season: tuple[int, ...],
        settings: Settings,
        alternatives: tuple[tuple[str, float, tuple[Step, ...]], ...],
    ) -> None:
        nothing = pd.Series(np.empty(0), index=_index(span, calendar)[:0], dtype=float)
        source = TimeSeries(name, nothing, calendar, season, found.plan.repairs, problem)
        super().__init__(source, settings, found, chosen)
        self._span, self._fingerprint, self._alternatives = span, fingerprint, alternatives

    @property
    def span(self) -> Span:
        """First and last stamp, steps from one to the other, and missing values."""
        return self._span

    @property
    def fingerprint(self) -> str:
        """Digest of the values that were checked."""
        return self._fingerprint

    @property
    def index(self) -> pd.Index:
        """The first two stamps of the time index, which tell its kind; the others are not needed."""
        return _index(self._span, self._source.calendar)

    @property
    def alternatives(self) -> tuple[tuple[str, float, tuple[Step, ...]], ...]:
        """Plans compared, as (plan in words, log of its odds below the best, steps), the best first."""
        return self._alternatives

    def code(self, form: str = "pandas") -> str:
        """Source that applies the plan and undoes it, not run against the plan: its head says so."""
        if form != "pandas":
            raise CheckError(f"column {self.name!r} comes from a record, from which only form='pandas' can be; {JOIN}.")
        return proved_code([self])

    series: Any = property(_refused("series"))
    transformed: Any = property(_refused("transformed"))
    proof: Any = property(_refused("proof"))
    correlograms: Any = _refused("correlograms")
    reference_forecast: Any = _refused("reference_forecast")
    root_intervals: Any = _refused("root_intervals")
    leave_out: Any = _refused("leave_out")
    put_in: Any = _refused("put_in")
    with_plan: Any = _refused("with_plan")
    with_season: Any = _refused("with_season")
    without_span: Any = _refused("without_span")
    odds_against: Any = _refused("odds_against")

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show

        show(_ShownSeries(self))


class _ShownSeries(LoadedSeries):
    """A loaded series as cards see it: empty data that tell their span."""

    def __init__(self, one: LoadedSeries) -> None:
        vars(self).update(vars(one))

    @property
    def series(self) -> pd.Series:
        """No values, with what is known of them."""
        from preflight_magic.present import words

        nothing = self._source.values.copy()
        span, noun = self._span, self.noun
        if span.first is not None:
            ends = f"{words.stamp(span.first, noun)} to {words.stamp(span.last, noun)}"
            missing = f", {span.missing:,} missing" if span.missing else ""
            nothing.attrs["span"] = f"{words.count_of(span.n, noun)}, {ends}{missing}; the data are not in this record"
        return nothing

    @property
    def transformed(self) -> pd.Series:
        """No values."""
        return self._source.values.copy()

    def correlograms(self, nlags: int) -> tuple[np.ndarray, np.ndarray, float]:
        """No autocorrelations."""
        return np.empty(0), np.empty(0), 0.0


class LoadedReport(Report):
    """Report from a record, without the data.

    Parameters
    ----------
    reports : iterable of LoadedSeries
    options : Mapping
        Of the check.
    written_by : str
        Version of the package that wrote the record.
    """

    def __init__(self, reports: Iterable[LoadedSeries], options: Mapping[str, object], written_by: str) -> None:
        super().__init__(reports, options)
        self.written_by = written_by

    def attach(self, frame: Any, *, pool: Any = None, progress: Any = None) -> Report:
        """Join the data again.

        The series are checked anew with the options of the record; each is examined under the plan of the record,
        also where this version of the package would recommend another.

        Parameters
        ----------
        frame : DataFrame, Series, or anything with ``to_pandas``
            As it was given to the check.
        pool, progress
            As for `check`.

        Returns
        -------
        Report

        Raises
        ------
        CheckError
            Where a series is missing, or is not the one that was checked.
        """
        from preflight_magic.batch import check
        from preflight_magic.intake import read

        reading = ("season", "time", "series", "value", "exclude", "repair")
        given: dict[str, Any] = {key: one for key, one in self.options.items() if key != "only"}
        every = {one.name: one for one in read(frame, **{key: given[key] for key in reading if key in given})}
        for one in self:
            if one.name not in every:
                raise CheckError(f"the table has no column {one.name!r}, which the record has; pass the same table.")
            _compare(one, every[one.name])
        found = check(frame, only=list(self.names), pool=pool, progress=progress, **given)
        return Report((_planned(found[one.name], one) for one in self), self.options)

    @property
    def together(self) -> Finding | None:
        """Raise a CheckError where there is a target: a record holds no data for the relations between series."""
        if self.options.get("target") is None:
            return None
        raise CheckError(f"the report comes from a record, which holds no data to compare the series; {JOIN}.")

    def _shown(self) -> Report:
        return Report(_ShownSeries(one) for one in self if isinstance(one, LoadedSeries))

    def __repr__(self) -> str:
        return f"{super().__repr__()[:-1]}, from a record without data>"


def _index(span: Span, calendar: Calendar | None) -> pd.Index:
    """First two stamps of a regular index, or fewer."""
    if span.first is None:
        return pd.RangeIndex(0)
    if isinstance(span.first, pd.Period):
        return pd.PeriodIndex([span.first + i for i in range(min(span.n, 2))])
    if isinstance(span.first, pd.Timestamp):
        ends = [span.first] if span.n < 2 or calendar is None else [span.first, _next(span.first, calendar.freq)]
        return pd.DatetimeIndex(ends)
    return pd.RangeIndex(span.first, span.first + min(span.n, 2))


def _next(stamp: pd.Timestamp, freq: str | None) -> pd.Timestamp:
    try:
        return stamp if freq is None else stamp + to_offset(freq)
    except (ValueError, OverflowError):
        return stamp


def _compare(record: SeriesReport, source: TimeSeries) -> None:
    """Refuse data that are not those of the record, and say in what they differ."""
    if record.problem is not None and source.problem is not None:
        return
    then, now = record.span, span_of(source.values)
    told = f"column {record.name!r}: "
    if source.problem is not None:
        raise CheckError(f"{told}the record has {then.n} values, and these cannot be checked ({source.problem}).")
    begins = then.first is not None and position_of(then.first, source.values.index) == 0
    if begins and now.n > then.n:
        raise CheckError(
            f"{told}the table has {now.n} steps where the record has {then.n}; check the longer data with pf.check, "
            "and compare with report.against(record)."
        )
    if not begins or now.n != then.n:
        raise CheckError(
            f"{told}the table has {now.n} steps from {now.first} where the record has {then.n} from {then.first}; "
            "pass the table that was checked."
        )
    if record.fingerprint != fingerprint(source.values):
        raise CheckError(
            f"{told}its values are not those of the record, though its span is the same; pass the table that was "
            "checked, or check the revised data and compare with report.against(record)."
        )


def _planned(now: SeriesReport, record: SeriesReport) -> SeriesReport:
    steps = steps_on(record.plan.steps, now.index)
    if now.problem is not None or (now.plan.steps == steps and record.chosen != "group"):
        return now
    return now.with_plan(steps, "kept" if record.chosen == "recommended" else record.chosen)
