"""The ladder: every rung in order, and the plan that their judgements add up to."""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cache
from typing import TYPE_CHECKING, cast

import numpy as np
from numpy.typing import NDArray

from preflight_magic import rungs
from preflight_magic.kernels.plan_likelihood import Comparison, PlanPrior, compare
from preflight_magic.kernels.restricted_likelihood import difference, missing_columns
from preflight_magic.model import (
    CheckError,
    Difference,
    Evidence,
    Finding,
    Judgement,
    TimeSeries,
    Verdict,
)
from preflight_magic.plan.plan import Plan
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.rungs.contract import Context, Rung

if TYPE_CHECKING:
    import pandas as pd

READING = ("time index", "values")
"""Rungs that say whether the series can be checked at all."""
DECIDING = ("calendar length", "spread", "shift and trend", "season", "unit root")
"""Rungs whose doubts make the series inconclusive; those after them add notes."""


@dataclass(frozen=True)
class Climb:
    """What one climb of the ladder found.

    `recommended` is the plan that the rungs propose; `plan` the one that the later rungs examined: the same, unless a
    person chose another. `transformed` is the series after that plan, without missing values.
    """

    findings: Mapping[str, Finding]
    comparison: Comparison | None
    recommended: Plan
    plan: Plan
    transformed: pd.Series | None

    @property
    def verdict(self) -> Verdict:
        """Verdict of the series."""
        verdicts = {name: finding.verdict for name, finding in self.findings.items()}
        if "infeasible" in (verdicts[name] for name in READING):
            return "infeasible"
        if "inconclusive" in (verdicts[name] for name in DECIDING if name in verdicts):
            return "inconclusive"
        return "transform" if self.plan else "clear"


@cache
def ladder() -> tuple[Rung, ...]:
    """Every rung of the package, each after those that it names.

    Raises
    ------
    ValueError
        When a rung comes after one that does not exist, or two after each other.
    """
    modules = (importlib.import_module(f"{rungs.__name__}.{one.name}") for one in pkgutil.iter_modules(rungs.__path__))
    waiting = {one.RUNG.name: cast(Rung, one.RUNG) for one in modules if hasattr(one, "RUNG")}
    ordered: list[Rung] = []
    while waiting:
        done = {rung.name for rung in ordered}
        ready = sorted(name for name, rung in waiting.items() if done.issuperset(rung.after))
        if not ready:
            raise ValueError(f"the rungs {sorted(waiting)} come after each other or after one that does not exist")
        ordered.append(waiting.pop(ready[0]))
    return tuple(ordered)


def climb(series: TimeSeries, settings: Settings, plan: Plan | None = None, earlier: Climb | None = None) -> Climb:
    """Examine and judge a series rung by rung.

    Parameters
    ----------
    series : TimeSeries
    settings : Settings
    plan : Plan, optional
        Examine this plan instead of the recommended one; the rungs that decide keep their findings.
    earlier : Climb, optional
        A climb of the same series whose comparison of plans and deciding findings are taken over.

    Returns
    -------
    Climb

    Raises
    ------
    CheckError
        When `plan` cannot be applied to the series.
    """
    findings: dict[str, Finding] = {}
    context = Context(settings=settings)
    if earlier is None and series.problem is None:
        context = replace(context, comparison=_comparison(series, settings.thresholds))
    elif earlier is not None:
        context = replace(context, comparison=earlier.comparison)
    recommended = Plan(series.repairs)
    transformed: pd.Series | None = None
    for rung in ladder():
        late = _is_late(rung.name)
        if late and transformed is None and series.problem is None:
            chosen = plan if plan is not None else recommended
            transformed = chosen.apply(series.values).dropna()
            context = replace(
                context,
                steps=chosen.steps,
                transformed=transformed,
                nuisance=_nuisance(series, chosen, len(transformed)),
            )
        if series.problem is not None and rung.name not in READING:
            continue
        if earlier is not None and not late:
            finding = earlier.findings[rung.name]
        else:
            finding = _finding(rung, series, context, settings.thresholds)
        findings[rung.name] = finding
        if not late and finding.steps:
            recommended = Plan(recommended.repairs, (*recommended.steps, *finding.steps))
            context = replace(context, steps=recommended.steps)
        if rung.name == "roots":
            context = _with_fit(context, finding)
    if transformed is None and series.problem is None:
        transformed = (plan if plan is not None else recommended).apply(series.values).dropna()
    return Climb(findings, context.comparison, recommended, recommended if plan is None else plan, transformed)


def prior_of(thresholds: Thresholds) -> PlanPrior:
    """What the comparison of plans believes before the data."""
    return PlanPrior(
        log_margin=thresholds.log_margin,
        season_p=thresholds.season_p,
        trend=thresholds.trend_odds,
        shift=thresholds.shift_odds,
        difference=thresholds.difference_odds,
        second=thresholds.second_difference_odds,
        wandering=thresholds.wandering_odds,
        both=thresholds.both_differences_odds,
        slope=thresholds.slope_scale,
        outlier_bound=thresholds.outlier_bound,
    )


def _comparison(series: TimeSeries, thresholds: Thresholds) -> Comparison | None:
    return compare(series.values.to_numpy(dtype=float), series.season[0], prior_of(thresholds))


@cache
def _is_late(name: str) -> bool:
    """Does a rung come after the unit root, directly or through others?"""
    after = next(rung.after for rung in ladder() if rung.name == name)
    return "unit root" in after or any(_is_late(one) for one in after)


def _finding(rung: Rung, series: TimeSeries, context: Context, thresholds: Thresholds) -> Finding:
    evidence: Evidence = rung.examine(series, context)
    judgement: Judgement = rung.judge(evidence, thresholds)
    return Finding(
        rung=rung.name,
        question=rung.question,
        verdict=judgement.verdict,
        headline=judgement.headline,
        reason=judgement.reason,
        tests=evidence.tests,
        measures=evidence.measures,
        steps=judgement.steps,
    )


def _nuisance(series: TimeSeries, plan: Plan, rows: int) -> NDArray[np.float64] | None:
    """Indicators of the missing values, differenced as the plan does."""
    columns = missing_columns(series.values.to_numpy(dtype=float))
    if not columns.shape[1]:
        return None
    for step in plan.steps:
        if isinstance(step, Difference):
            columns = difference(columns, step.lag)
    if len(columns) != rows:
        raise CheckError(
            f"column {series.name!r}: the plan '{plan}' leaves {rows} values where {len(columns)} were expected; "
            "allow gaps to be filled (repair=True)."
        )
    return columns


def _with_fit(context: Context, finding: Finding) -> Context:
    fit = finding.measures.get("fit")
    if fit is None:
        return context
    return replace(context, innovations=fit.innovations, fitted_parameters=fit.order.size)  # type: ignore[attr-defined]
