"""One plan for a group of like series: the one that all of them together speak for."""

from __future__ import annotations

import math
from collections.abc import Hashable, Iterable
from typing import TYPE_CHECKING

from preflight_magic.model import CheckError, RemoveShift, Step
from preflight_magic.plan.plan import Plan

if TYPE_CHECKING:
    from preflight_magic.report import Report
    from preflight_magic.series_report import SeriesReport


def group_of(report: Report, names: Iterable[Hashable] | None) -> list[SeriesReport]:
    """Series that are to share a plan: those named, or all that could be checked.

    Raises
    ------
    CheckError
        Where fewer than two are left, or one of those named could not be checked or has no data.
    """
    if isinstance(names, str):
        raise CheckError(f"names is {names!r}; give a list of two or more series that are to share a plan.")
    chosen = [one for one in report if one.problem is None] if names is None else [report[name] for name in names]
    for one in chosen:
        if one.problem is not None:
            raise CheckError(one.problem)
        if not one.has_data:
            raise CheckError(f"column {one.name!r} comes from a record without data; use report.attach(frame) first.")
    if len(chosen) < 2:
        raise CheckError(f"a group of {len(chosen)} series shares nothing; name two or more.")
    return chosen


def shared_steps(members: Iterable[SeriesReport]) -> tuple[Step, ...]:
    """Steps of the plan with the largest evidence, summed over the members.

    The series are taken as independent given the plan. Shifts are left out: each series would have its own date.

    Parameters
    ----------
    members : iterable of SeriesReport
        With data, all of which could be checked.

    Returns
    -------
    tuple of Step

    Raises
    ------
    CheckError
        Where no plan is possible for all members.
    """
    members = list(members)
    candidates: dict[tuple[Step, ...], None] = {}
    for one in members:
        for steps in (one.recommended.steps, *(steps for _, _, steps in one.alternatives)):
            candidates[tuple(step for step in steps if not isinstance(step, RemoveShift))] = None
    against = {steps: sum(_against(one, steps) for one in members) for steps in candidates}
    best = min(against, key=lambda steps: against[steps])
    if math.isinf(against[best]):
        names = ", ".join(repr(one.name) for one in members[:3])
        raise CheckError(f"no plan is possible for all of {names}; leave out the series that differs in its season.")
    return best


def _against(one: SeriesReport, steps: tuple[Step, ...]) -> float:
    odds = one.odds_against(Plan((), steps))
    return math.inf if math.isnan(odds) else math.log(odds)
