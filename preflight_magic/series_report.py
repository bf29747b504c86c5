"""What users hold of one series: findings, plan, code."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Mapping, Sequence
from dataclasses import replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
import pandas as pd

from preflight_magic.answer import answer_of
from preflight_magic.changes import with_season, without_span
from preflight_magic.generated import code_of
from preflight_magic.kernels.correlation import autocorrelation
from preflight_magic.ladder import Climb, climb, ladder
from preflight_magic.model import (
    CheckError,
    Difference,
    Finding,
    Log,
    PerDay,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Step,
    TimeSeries,
    Verdict,
)
from preflight_magic.packing import pack, unpack
from preflight_magic.plan.plan import Plan
from preflight_magic.policy import Settings
from preflight_magic.proof_result import Proof
from preflight_magic.reference import reference_forecast

if TYPE_CHECKING:
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
    def significance(self) -> float:
        """Size of the tests shown."""
        return self._settings.thresholds.significance

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
        return self._transformed.copy()

    @cached_property
    def _transformed(self) -> pd.Series:
        """Computed anew after a check of many series: it costs less to compute than to send and to keep."""
        if self._found.transformed is not None:
            return self._found.transformed
        return self.series.iloc[:0] if self.problem is not None else self.plan.apply(self.series).dropna()

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
        steps: list[Step] = [step for step in self.recommended.steps if isinstance(step, PerDay)]
        steps += [Log()] if log else []
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
        curves = [autocorrelation(values, most) for values in (before, after)]
        first, second = (np.empty(0) if curve is None else curve[1:] for curve in curves)
        return first, second, band

    def code(self, form: str = "pandas") -> str:
        """Source that applies the plan and undoes it, run on the series and compared with the plan first.

        Parameters
        ----------
        form : {"pandas", "model", "features"}
            ``pandas``: `prepare` and `restore`. ``model``: a statsmodels SARIMAX model that holds what a model can of
            the plan, and its forecast in the original units. ``features``: columns for a learner.

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
        return code_of(self, form)

    def reference_forecast(
        self, horizon: int | None = None, coverage: float = 0.9, *, average: bool = True
    ) -> pd.DataFrame:
        """Forecast with ARMA models through their plans: a yardstick for the real model.

        Parameters
        ----------
        horizon : int, optional
            Steps ahead; by default `horizon`.
        coverage : float
            Probability of the interval.
        average : bool
            False: the plan alone, with the ARMA model of the roots rung. True: so too where no other plan is left
            within odds of 20 to 1, or you have chosen the plan; else the interval is that of all plans left, weighted
            by their share of the evidence, each with its own ARMA model. Median and mean are theirs as well where
            their median lies farther than a quarter of a standard error from the plan's own.

        Returns
        -------
        DataFrame
            ``median``, ``mean``, ``lower``, ``upper`` on the future index, in the original units.

        Raises
        ------
        CheckError
            For a series that could not be checked, or options out of range.
        """
        return reference_forecast(self, self.horizon if horizon is None else horizon, coverage, average)

    @cached_property
    def proof(self) -> Proof:
        """Forecasts from past origins with the plan, without each step, and with naive ones, over `horizon` steps.

        Computed when first asked for, within seconds; it decides nothing. A series that is too short gives a result
        whose `problem` says so.
        """
        from preflight_magic.proof import prove_plan

        return prove_plan(self)

    def leave_out(self, step: Step | int) -> SeriesReport:
        """Examine the series again without one step of the plan, given as itself or by its position."""
        return self._again(lambda plan: plan.without(step))

    def put_in(self, step: Step) -> SeriesReport:
        """Examine the series again with one more step, at its place in canonical order."""
        return self._again(lambda plan: plan.with_step(step))

    def with_plan(self, steps: Iterable[Step]) -> SeriesReport:
        """Examine the series again with these steps in place of those of the plan; repairs stay."""
        return self._again(lambda plan: Plan(plan.repairs, tuple(steps)))

    def with_season(self, season: int | Sequence[int]) -> SeriesReport:
        """Check the series anew with other seasonal periods, in steps; 1 for none. The plan is the one that follows."""
        source = with_season(self._source, season)
        return self._anew(source, replace(self._settings, season=source.season))

    def without_span(self, start: Any, end: Any) -> SeriesReport:
        """Check the series anew with the values from start to end, both included, treated as missing."""
        exclude = (*self._settings.exclude, (start, end))
        return self._anew(without_span(self._source, start, end), replace(self._settings, exclude=exclude))

    def _anew(self, source: TimeSeries, settings: Settings) -> SeriesReport:
        return SeriesReport(source, settings, climb(source, settings))

    def _again(self, change: Callable[[Plan], Plan]) -> SeriesReport:
        if self.problem is not None:
            raise CheckError(self.problem)
        found = climb(self._source, self._settings, change(self.plan), self._found)
        return SeriesReport(self._source, self._settings, found)

    @property
    def horizon(self) -> int:
        """Steps ahead: as asked, or one season, at least 6 and at most a quarter of the data."""
        asked = self._settings.horizon
        return asked if asked is not None else max(1, min(max(self.season[0], 6), len(self._source.values) // 4))

    def __getstate__(self) -> dict[str, Any]:
        light = {"_source": pack(self._source), "_found": replace(self._found, transformed=None)}
        return {key: value for key, value in self.__dict__.items() if key != "_transformed"} | light

    def __setstate__(self, state: dict[str, Any]) -> None:
        self.__dict__ |= state | {"_source": unpack(state["_source"])}

    def __repr__(self) -> str:
        return f"<SeriesReport {self.name!r}: {self.verdict}, {self.problem or self.plan}>"

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show

        show(self)
