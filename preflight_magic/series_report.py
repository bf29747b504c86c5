"""What users hold of one series: findings, plan, code, forecasts, and the same under other plans."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace
from functools import cached_property
from typing import Any

import pandas as pd

from preflight_magic.generated import code_of
from preflight_magic.ladder import climb
from preflight_magic.model import CheckError, Step, TimeSeries
from preflight_magic.plan.plan import Plan
from preflight_magic.policy import Settings
from preflight_magic.proof_result import Proof
from preflight_magic.read_again import with_season, without_span
from preflight_magic.reference import reference_forecast
from preflight_magic.root_intervals import root_intervals
from preflight_magic.series_facts import Chosen, SeriesFacts
from preflight_magic.standing import odds_against


class SeriesReport(SeriesFacts):
    """Findings and plan of one series, and what can be made of them.

    Parameters
    ----------
    source : TimeSeries
    settings : Settings
    found : Climb
    chosen : {"person", "kept", "group"}
        Where the plan of `found` comes from if it is not the recommended one: a person, an earlier report that was
        compared, or a group of series that share one.
    """

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

    def root_intervals(
        self, coverage: float = 0.9, *, replications: int = 199, seed: int = 0, from_modulus: float = 0.5
    ) -> pd.DataFrame:
        """Intervals of roots that stay valid near one, by seeded bootstrap; takes up to a minute.

        Parameters
        ----------
        coverage : float
            Probability of an interval.
        replications : int
            Simulated series at each value that is tested, at least 99.
        seed : int
        from_modulus : float
            ARMA roots with a smaller modulus are left out.

        Returns
        -------
        DataFrame
            First, `of` the series ``before differences``, the sum of the coefficients of an autoregression about a
            line, one at a unit root (`part` is ``AR sum``; Hansen 1999, `modulus` is median-unbiased); then, ``after
            the plan``, the roots of the ARMA model (``AR`` or ``MA``). Columns `of`, `part`, `seasonal`, `period`
            (steps a cycle), `modulus`, `lower`, `upper`, and but for MA roots `half_life`, `half_life_lower`,
            `half_life_upper`: in steps, infinite at one.

        Raises
        ------
        CheckError
            For a series that could not be checked, or options out of range.
        """
        return root_intervals(self, self._source, coverage, replications, seed, from_modulus)

    def leave_out(self, step: Step | int) -> SeriesReport:
        """Examine the series again without one step of the plan, given as itself or by its position."""
        return self._again(lambda plan: plan.without(step))

    def put_in(self, step: Step) -> SeriesReport:
        """Examine the series again with one more step, at its place in canonical order."""
        return self._again(lambda plan: plan.with_step(step))

    def with_plan(self, steps: Iterable[Step], chosen: Chosen = "person") -> SeriesReport:
        """Examine the series again with these steps in place of those of the plan; repairs stay.

        Parameters
        ----------
        steps : iterable of Step
        chosen : {"person", "kept", "group"}
            Where they come from, if they are not the recommended ones.

        Returns
        -------
        SeriesReport
        """
        return self._again(lambda plan: Plan(plan.repairs, tuple(steps)), chosen)

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

    def _again(self, change: Callable[[Plan], Plan], chosen: Chosen = "person") -> SeriesReport:
        if self.problem is not None:
            raise CheckError(self.problem)
        found = climb(self._source, self._settings, change(self.plan), self._found)
        return SeriesReport(self._source, self._settings, found, chosen)

    def odds_against(self, plan: Plan) -> float:
        """Odds of the recommended plan against another one on these data.

        Parameters
        ----------
        plan : Plan

        Returns
        -------
        float
            From one up; infinite for a plan that the data do not allow, NaN for one that is not among those compared,
            such as one with a power.
        """
        if self.problem is not None:
            raise CheckError(self.problem)
        return odds_against(self._source, self._found, self._settings.thresholds, plan)

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show

        show(self)
