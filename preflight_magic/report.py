"""What users hold: the report of one series, and of all series of a frame."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Iterator, Mapping
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pandas as pd

from preflight_magic.answer import answer_of, note_of
from preflight_magic.kernels.correlation import autocorrelation
from preflight_magic.ladder import Climb, climb, ladder
from preflight_magic.model import (
    CheckError,
    Difference,
    Finding,
    Log,
    Power,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Step,
    TimeSeries,
    Verdict,
)
from preflight_magic.plan.emit import emit
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.prove import prove
from preflight_magic.policy import Settings
from preflight_magic.saving import save

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray


class SeriesReport:
    """Findings and plan of one series.

    Parameters
    ----------
    source : TimeSeries
    settings : Settings
    found : Climb
    """

    def __init__(self, source: TimeSeries, settings: Settings, found: Climb) -> None:
        self._source, self._settings, self._found = source, settings, found

    @property
    def name(self) -> Hashable:
        """The column, or the group of a long table."""
        return self._source.name

    @property
    def series(self) -> pd.Series:
        """Values from first to last observed, NaN where missing; shape (n,)."""
        return self._source.values.copy()

    @property
    def findings(self) -> Mapping[str, Finding]:
        """Rung name to finding, in the order of the ladder."""
        return dict(self._found.findings)

    @property
    def verdict(self) -> Verdict:
        """``clear``, ``transform``, ``inconclusive`` or ``infeasible``."""
        return self._found.verdict

    @property
    def plan(self) -> Plan:
        """The plan that was examined."""
        return self._found.plan

    @property
    def recommended(self) -> Plan:
        """The plan that the rungs propose; differs from `plan` after `leave_out` or `put_in`."""
        return self._found.recommended

    @property
    def problem(self) -> str | None:
        """Why the series cannot be checked, or None."""
        return self._source.problem

    @property
    def noun(self) -> str:
        """A step of the calendar: ``month``."""
        return self._source.calendar.noun if self._source.calendar else "step"

    @property
    def season(self) -> tuple[int, ...]:
        """Seasonal periods considered, shortest first."""
        return self._source.season

    @property
    def answer(self) -> str:
        """One sentence."""
        return answer_of(self.verdict, self.plan, self.recommended, self.findings, self.problem)

    @property
    def transformed(self) -> pd.Series:
        """Values after the plan, without missing ones; shape (m,)."""
        found = self._found.transformed
        return self.series.iloc[:0] if found is None else found.copy()

    @property
    def methods(self) -> Mapping[str, tuple[str, tuple[str, ...]]]:
        """Rung name to (how it is decided, published sources)."""
        return {rung.name: (rung.method, rung.sources) for rung in ladder() if rung.name in self._found.findings}

    @property
    def alternatives(self) -> tuple[tuple[str, float, tuple[Step, ...]], ...]:
        """Plans compared, as (plan in words, log of its odds below the best, steps), the best first."""
        comparison = self._found.comparison
        if comparison is None:
            return ()
        best = comparison.best.evidence
        found: dict[tuple[Step, ...], float] = {}
        for one in comparison.candidates:
            found.setdefault(self._steps_of(one, log=comparison.log, period=comparison.period), best - one.evidence)
        return tuple((str(Plan((), steps)), below, steps) for steps, below in found.items())

    def _steps_of(self, candidate: Any, *, log: bool, period: int) -> tuple[Step, ...]:
        steps: list[Step] = [Log()] if log else []
        steps += [Difference(period)] * candidate.D + [Difference(1)] * candidate.d
        if candidate.trend and candidate.d + candidate.D == 0:
            steps.append(RemoveTrend())
        if candidate.shift is not None:
            at = self._source.values.index[candidate.shift]
            steps.append(RemoveShift(at if isinstance(at, pd.Period | pd.Timestamp) else int(at)))
        if candidate.pattern:
            steps.append(RemovePattern(period))
        return tuple(steps)

    def correlograms(self, nlags: int) -> tuple[NDArray[np.float64], NDArray[np.float64], float]:
        """Autocorrelations of the series as given and as transformed.

        Parameters
        ----------
        nlags : int

        Returns
        -------
        before, after : ndarray, shape (at most nlags,)
            At lags 1, 2, ...
        band : float
            ``1.96 / sqrt(m)`` with m transformed values: the 95 % band of white noise (common practice).
        """
        after = self.transformed.to_numpy(dtype=float)
        most = max(min(nlags, len(after) - 2), 0)
        before = self._source.values.to_numpy(dtype=float)
        band = 1.96 / max(len(after), 1) ** 0.5
        return autocorrelation(before, most)[1:], autocorrelation(after, most)[1:], band

    def code(self, form: str = "pandas") -> str:
        """Source that applies the plan and undoes it, run on the series and compared with the plan first.

        Parameters
        ----------
        form : {"pandas"}

        Returns
        -------
        str

        Raises
        ------
        CheckError
            When the series could not be checked, or the form is unknown.
        EmitError
            When the code does not do what the plan does: a fault of this package.
        """
        if form != "pandas":
            raise CheckError(f"There is no code of the form {form!r}; use 'pandas'.")
        return _code([self])

    def leave_out(self, step: Step | int) -> SeriesReport:
        """Examine the series again without one step of the plan, given as itself or by its position."""
        return self._again(self.plan.without(step))

    def put_in(self, step: Step) -> SeriesReport:
        """Examine the series again with one more step, at its place in canonical order."""
        return self._again(self.plan.with_step(step))

    def _again(self, plan: Plan) -> SeriesReport:
        if self.problem is not None:
            raise CheckError(self.problem)
        found = climb(self._source, self._settings, plan, self._found)
        return SeriesReport(self._source, self._settings, found)

    @property
    def row(self) -> dict[str, object]:
        """This series in the overview."""
        return _row(self)

    @property
    def horizon(self) -> int:
        """Steps ahead: as asked, or one season, at least 6 and at most a quarter of the data."""
        asked = self._settings.horizon
        return asked if asked is not None else max(1, min(max(self.season[0], 6), len(self._source.values) // 4))

    def __repr__(self) -> str:
        return f"<SeriesReport {self.name!r}: {self.verdict}, {self.problem or self.plan}>"

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show

        show(self)


class Report:
    """Reports of the series of a frame, in its order.

    Parameters
    ----------
    reports : iterable of SeriesReport
    """

    def __init__(self, reports: Iterable[SeriesReport]) -> None:
        self._reports = {one.name: one for one in reports}

    @property
    def names(self) -> tuple[Hashable, ...]:
        """Names of the series."""
        return tuple(self._reports)

    def __getitem__(self, name: Hashable) -> SeriesReport:
        try:
            return self._reports[name]
        except KeyError:
            raise KeyError(f"there is no series {name!r}; there are {', '.join(map(repr, self.names[:8]))}") from None

    def __iter__(self) -> Iterator[SeriesReport]:
        return iter(self._reports.values())

    def __len__(self) -> int:
        return len(self._reports)

    @cached_property
    def overview(self) -> pd.DataFrame:
        """One row a series; columns verdict, plan, log, power, trend, shift, season, D, d, period, n, missing, note."""
        rows = [one.row for one in self]
        index = pd.Index(self.names, name="series", tupleize_cols=False)
        frame = pd.DataFrame(rows, index=index)
        kinds = dict.fromkeys(("log", "trend", "shift"), "boolean")
        kinds |= dict.fromkeys(("D", "d", "period", "n", "missing"), "Int64") | {"power": "Float64"}
        return frame.astype(kinds)

    def code(self, names: Iterable[Hashable] | Hashable | None = None) -> str:
        """Source that applies and undoes the plans of some series, or of all that could be checked.

        Parameters
        ----------
        names : iterable of names, or one name, optional

        Returns
        -------
        str
        """
        if names is None:
            chosen = [one for one in self if one.problem is None]
        else:
            single = isinstance(names, str) or (isinstance(names, Hashable) and names in self._reports)
            chosen = [self[name] for name in ([names] if single else names)]  # type: ignore[union-attr]
        return _code(chosen)

    def save(self, path: str | Path) -> None:
        """Write the report: ``.html`` for a page that opens offline, ``.py`` for the code of all series."""
        save(self, Path(path))

    def __repr__(self) -> str:
        counts = pd.Series([one.verdict for one in self]).value_counts(sort=False)
        return f"<Report of {len(self)} series: {', '.join(f'{n} {verdict}' for verdict, n in counts.items())}>"

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show

        show(self)


def _code(reports: list[SeriesReport]) -> str:
    for one in reports:
        if one.problem is not None:
            raise CheckError(one.problem)
    plans = {one.name: (one.plan, _reasons(one)) for one in reports}
    source = emit(plans, {one.name: one.series.index for one in reports})
    for one in reports:
        prove(one.plan, source, one.series, one.horizon)
    return source


def _reasons(report: SeriesReport) -> dict[Any, str]:
    """Why each step of the plan is there, in the words of the finding that proposes it."""
    said: dict[Any, str] = {}
    for finding in report.findings.values():
        for step in finding.steps:
            said.setdefault(step, finding.reason.split(". ")[0].rstrip(".") + ".")
    for step in report.plan.steps:
        said.setdefault(step, "Put in by hand.")
    return said


def _row(report: SeriesReport) -> dict[str, object]:
    if report.problem is not None:
        empty = dict.fromkeys(("log", "power", "trend", "shift", "season", "D", "d", "period", "n", "missing"), pd.NA)
        return {"verdict": report.verdict, "plan": "", **empty, "note": report.problem}
    steps = report.plan.steps
    lags = [step.lag for step in steps if isinstance(step, Difference)]
    period = report.season[0]
    seasonal = sum(lag == period and lag > 1 for lag in lags)
    pattern = any(isinstance(step, RemovePattern) for step in steps)
    power = next((step.exponent for step in steps if isinstance(step, Power)), 0.0 if Log() in steps else 1.0)
    trend = RemoveTrend() in steps
    if len(lags) == 1:
        trend = next(iter(report.findings["shift and trend"].measures.get("trend_shares", ())), "") == "trend"  # type: ignore[call-overload]
    return {
        "verdict": report.verdict,
        "plan": str(report.plan),
        "log": Log() in steps,
        "power": power,
        "trend": trend,
        "shift": any(isinstance(step, RemoveShift) for step in steps),
        "season": "difference" if seasonal else "fixed" if pattern else "none",
        "D": seasonal,
        "d": len(lags) - seasonal,
        "period": period,
        "n": int(report.series.notna().sum()),
        "missing": int(report.series.isna().sum()),
        "note": note_of(report.findings),
    }
