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
from preflight_magic.kernels.plan_likelihood import Comparison, compare
from preflight_magic.kernels.restricted_likelihood import difference, missing_columns
from preflight_magic.model import (
    CheckError,
    Difference,
    Evidence,
    Finding,
    HypothesisTest,
    Judgement,
    PerDay,
    Step,
    TimeSeries,
    Verdict,
)
from preflight_magic.plan.plan import Plan, describe
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.rungs.contract import Context, Rung, with_fit
from preflight_magic.rungs.shares import prior_of

if TYPE_CHECKING:
    import pandas as pd

READING = ("time index", "values")
"""Rungs that say whether the series can be checked at all."""
NO_NUMBERS = (np.linalg.LinAlgError, ArithmeticError)
"""What a singular system or a number out of range raises: a rung that meets it is not decided, and says so."""
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
    # A person's own `np.seterr` must not stop the numbers, nor may what overflows on the way warn.
    with np.errstate(all="ignore"):
        return _climbed(series, settings, plan, earlier)


def _climbed(series: TimeSeries, settings: Settings, plan: Plan | None, earlier: Climb | None) -> Climb:
    findings: dict[str, Finding] = {}
    context = Context(settings=settings, comparison=earlier.comparison if earlier else None)
    recommended = Plan(series.repairs)
    subject = series
    compared = earlier is not None
    transformed: pd.Series | None = None
    for rung in ladder():
        if series.problem is not None and rung.name not in READING:
            continue
        late = _comes_after(rung.name, "unit root")
        if not compared and _comes_after(rung.name, "calendar length"):
            compared, subject = True, per_day(series, recommended.steps)
            context = replace(context, comparison=_comparison(subject, settings.thresholds))
        if late and transformed is None:
            chosen = plan if plan is not None else recommended
            subject = per_day(series, chosen.steps)
            transformed = chosen.apply(series.values).dropna()
            context = replace(
                context,
                steps=chosen.steps,
                transformed=transformed,
                nuisance=nuisance_of(series, chosen, len(transformed)),
            )
        if earlier is not None and not late:
            finding = earlier.findings[rung.name]
        else:
            finding = _finding(rung, subject, context, settings.thresholds)
        findings[rung.name] = finding
        if not late and finding.steps and not needs_another_road(findings, settings.thresholds):
            recommended = Plan(recommended.repairs, (*recommended.steps, *finding.steps))
            context = replace(context, steps=recommended.steps)
        if rung.name == "roots":
            context = with_fit(context, finding)
    if transformed is None and series.problem is None:
        transformed = (plan if plan is not None else recommended).apply(series.values).dropna()
    return Climb(findings, context.comparison, recommended, recommended if plan is None else plan, transformed)


def needs_another_road(findings: Mapping[str, Finding], thresholds: Thresholds) -> bool:
    """Whether demand is intermittent, so that no ARMA plan is made."""
    interval = findings["values"].measures.get("demand_interval") if "values" in findings else None
    return isinstance(interval, float) and interval >= thresholds.intermittent_interval


def per_day(series: TimeSeries, steps: tuple[Step, ...]) -> TimeSeries:
    """The series that rungs after "calendar length" examine: per day once the plan divides by days.

    Parameters
    ----------
    series : TimeSeries
        Totals.
    steps : tuple of Step
        Of the plan so far; only `PerDay` is read.

    Returns
    -------
    TimeSeries
        The same series with values per day, gaps kept, or `series` itself without such a step. So no rung has to
        know of the division, and the comparison of plans, the log and the tests all speak of the same values.
    """
    divided = tuple(step for step in steps if isinstance(step, PerDay))
    return replace(series, values=Plan((), divided).apply(series.values)) if divided else series


def _comparison(series: TimeSeries, thresholds: Thresholds) -> Comparison | None:
    try:
        return compare(series.values.to_numpy(dtype=float), series.season[0], prior_of(thresholds), series.season[1:])
    except NO_NUMBERS:
        return None


@cache
def _comes_after(name: str, other: str) -> bool:
    """Does a rung come after another, directly or through others?"""
    after = next(rung.after for rung in ladder() if rung.name == name)
    return other in after or any(_comes_after(one, other) for one in after)


def _finding(rung: Rung, series: TimeSeries, context: Context, thresholds: Thresholds) -> Finding:
    try:
        evidence: Evidence = rung.examine(series, context)
    except NO_NUMBERS as error:
        evidence = Evidence(problem=f"the numbers of this rung could not be computed ({str(error).rstrip('.')}).")
    if context.transformed is None:
        evidence = replace(evidence, tests=_named_per_day(evidence.tests, context.steps))
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


def _named_per_day(tests: tuple[HypothesisTest, ...], steps: tuple[Step, ...]) -> tuple[HypothesisTest, ...]:
    """Tests of values per day, with the division among what was done to their series."""
    divided = next((step for step in steps if isinstance(step, PerDay)), None)
    if divided is None:
        return tests
    word = describe(divided)
    named = []
    for test in tests:
        series = str(test.options.get("series", "as given"))
        series = series.replace("as given", word) if "as given" in series else f"{word}, {series}"
        named.append(replace(test, options={**test.options, "series": series}))
    return tuple(named)


def nuisance_of(series: TimeSeries, plan: Plan, rows: int) -> NDArray[np.float64] | None:
    """Indicators of the missing values, differenced as the plan does.

    Parameters
    ----------
    series : TimeSeries
    plan : Plan
    rows : int
        Values left after the plan.

    Returns
    -------
    ndarray, shape (rows, missing), or None
        None where nothing is missing.

    Raises
    ------
    CheckError
        When the plan leaves gaps open.
    """
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
