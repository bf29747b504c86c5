"""What was found of one series: data, findings, plan, and how the plan compares with others."""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import replace
from functools import cached_property
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
import pandas as pd

from preflight_magic.answer import answer_of
from preflight_magic.kernels.correlation import autocorrelation
from preflight_magic.ladder import Climb, ladder
from preflight_magic.model import (
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
from preflight_magic.record.fingerprint import Span, fingerprint, span_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

Chosen = Literal["person", "kept", "group"]


class SeriesFacts:
    """Data, findings and plan of one series.

    Parameters
    ----------
    source : TimeSeries
    settings : Settings
    found : Climb
    chosen : {"person", "kept", "group"}
        Where the plan of `found` comes from if it is not the recommended one: a person, an earlier report that was
        compared, or a group of series that share one.
    """

    has_data = True
    """Whether the values are here; a record keeps none."""

    def __init__(self, source: TimeSeries, settings: Settings, found: Climb, chosen: Chosen = "person") -> None:
        self._source, self._settings, self._found, self._chosen = source, settings, found, chosen

    @property
    def name(self) -> Hashable:
        """The column, or the group of a long table."""
        return self._source.name

    @property
    def series(self) -> pd.Series:
        """Values from first to last observed, NaN where missing; shape (n,)."""
        return self._source.values.copy()

    @property
    def span(self) -> Span:
        """First and last stamp, steps from one to the other, and missing values."""
        return span_of(self._source.values)

    @property
    def fingerprint(self) -> str:
        """Digest of the values, by which a record knows them again."""
        return fingerprint(self._source.values)

    @property
    def index(self) -> pd.Index:
        """Time index of the values."""
        return self._source.values.index

    @property
    def source(self) -> TimeSeries:
        """The series as it was read, with its calendar; a record gives it without values."""
        return self._source

    @property
    def settings(self) -> Settings:
        """What was asked for."""
        return self._settings

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
    def chosen(self) -> Literal["recommended", "person", "kept", "group"]:
        """Where the plan comes from: the rungs, a person, an earlier report, or a group that shares one."""
        return self._chosen if self.plan != self.recommended or self._chosen == "group" else "recommended"

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
        return answer_of(self.verdict, self.plan, self.recommended, self.findings, self.problem, self.chosen)

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

    @property
    def horizon(self) -> int:
        """Steps ahead: as asked, or one season, at least 6 and at most a quarter of the data."""
        asked = self._settings.horizon
        return asked if asked is not None else max(1, min(max(self.season[0], 6), self.span.n // 4))

    def __getstate__(self) -> dict[str, Any]:
        light = {"_source": pack(self._source), "_found": replace(self._found, transformed=None)}
        return {key: value for key, value in self.__dict__.items() if key != "_transformed"} | light

    def __setstate__(self, state: dict[str, Any]) -> None:
        self.__dict__ |= state | {"_source": unpack(state["_source"])}

    def __repr__(self) -> str:
        return f"<SeriesReport {self.name!r}: {self.verdict}, {self.problem or self.plan}>"
