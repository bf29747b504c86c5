"""Plans as pandas source that runs where only numpy and pandas are installed."""

from __future__ import annotations

from collections.abc import Hashable, Mapping

import pandas as pd

from preflight_magic.model import CheckError, PerDay, Power, Repair, Step
from preflight_magic.plan import emit_functions as shared
from preflight_magic.plan.emit_steps import (
    Draft,
    Reasons,
    fixed_part_lines,
    prepare_lines,
    regular_lines,
    restore_lines,
)
from preflight_magic.plan.fixed_part import lags_of
from preflight_magic.plan.literals import comment, key_lines, literal, one_line
from preflight_magic.plan.plan import Plan

NAMED = 3
"""Series that share a plan and differ in their reasons: so many are named in a comment."""


def emit(plans: Mapping[Hashable, tuple[Plan, Reasons]], indexes: Mapping[Hashable, pd.Index] | None = None) -> str:
    """Python source that applies plans and undoes them.

    Parameters
    ----------
    plans : Mapping from name of series to (Plan, reasons)
        `reasons` maps a step or repair to the sentence that says why it is there.
    indexes : Mapping from name of series to Index, optional
        Time indexes of the series. Days are then counted with ``days_in_month`` where an index is monthly.

    Returns
    -------
    str
        For one series the functions ``prepare(y, history=None)`` and ``restore(forecast, history, variance=None)``.
        For several a pair of functions for every plan, and ``PLANS``, which maps each name to its pair.

    Raises
    ------
    CheckError
        If there is no plan to write.
    """
    if not plans:
        raise CheckError("There is no plan to write code for; give at least one series that can be checked.")
    groups = _groups(plans, indexes or {})
    drafts = [
        Draft(plan, _reasons(names, plans), monthly, f"_{i}" if len(groups) > 1 else "")
        for i, ((plan, monthly), names) in enumerate(groups.items(), 1)
    ]
    blocks = [part for draft in drafts for part in _shared(draft, drafts)]
    blocks = list(dict.fromkeys(blocks))
    for draft, names in zip(drafts, groups.values(), strict=True):
        blocks += _functions(draft, names)
    body = "\n\n\n".join(blocks)
    head = [
        line for line, used in (("import numpy as np", "np." in body), ("import pandas as pd", "pd." in body)) if used
    ]
    start = "\n".join(head) + "\n\n\n" if head else ""
    return start + body + "\n\n\n" + "\n".join(_usage(drafts, list(groups.values()))) + "\n"


def _groups(
    plans: Mapping[Hashable, tuple[Plan, Reasons]], indexes: Mapping[Hashable, pd.Index]
) -> dict[tuple[Plan, bool], list[Hashable]]:
    """Names of the series that share a plan and, where days are counted, the kind of index."""
    groups: dict[tuple[Plan, bool], list[Hashable]] = {}
    for name, (plan, _) in plans.items():
        counts = any(isinstance(step, PerDay) for step in plan.steps)
        groups.setdefault((plan, counts and is_monthly(indexes.get(name))), []).append(name)
    return groups


def is_monthly(index: pd.Index | None) -> bool:
    """Whether an index steps from month to month."""
    if not isinstance(index, pd.PeriodIndex | pd.DatetimeIndex) or len(index) < 2:
        return False
    months = (index.year * 12 + index.month).to_numpy()
    return bool((months[1:] - months[:-1] == 1).all())


def _reasons(
    names: list[Hashable], plans: Mapping[Hashable, tuple[Plan, Reasons]]
) -> dict[Step | Repair, tuple[str, ...]]:
    """Reasons for each step: one where the series agree, else one a series with its name before it."""
    plan = plans[names[0]][0]
    found: dict[Step | Repair, tuple[str, ...]] = {}
    for step in (*plan.repairs, *plan.steps):
        texts = {name: one_line(plans[name][1].get(step, "")) for name in names}
        if len(set(texts.values())) == 1:
            found[step] = (texts[names[0]],)
            continue
        told = [(name, text) for name, text in texts.items() if text]
        lines = [f"{literal(name)}: {text}" for name, text in told[:NAMED]]
        more = len(told) - NAMED
        found[step] = (*lines, f"and {more} more series.") if more > 0 else tuple(lines)
    return found


def _shared(draft: Draft, drafts: list[Draft]) -> list[str]:
    """Sources of the shared functions that a plan needs."""
    plan = draft.plan
    parts: list[str] = []
    if any(repair.period > 1 for repair in draft.fills):
        parts.append(shared.FILL_GAPS)
    if draft.counted:
        unit = next(step.unit for step in plan.steps if isinstance(step, PerDay))
        parts += [shared.PERIOD_BOUNDS, shared.DAYS if unit == "days" else shared.WORKDAYS]
    if any(lag > 1 for lag in lags_of(plan.steps)):
        parts.append(shared.UNDO_DIFFERENCE)
    if any("mean_of(" in line for line in restore_lines(draft)):
        negative = any(isinstance(s, Power) and s.exponent < 0 for other in drafts for s in other.plan.steps)
        parts.append(shared.MEAN_OF_FINITE if negative else shared.MEAN_OF)
    return [part.rstrip("\n") for part in parts]


def _functions(draft: Draft, names: list[Hashable]) -> list[str]:
    """The functions of one plan, the first with a heading that names the plan and its series."""
    shown = ", ".join(literal(name) for name in names[:NAMED])
    more = f" and {len(names) - NAMED} more" if len(names) > NAMED else ""
    functions = [prepare_lines(draft), restore_lines(draft)]
    if draft.fitted:
        functions.insert(0, fixed_part_lines(draft))
    if draft.irregular:
        functions.insert(0, regular_lines(draft))
    texts = ["\n".join(lines) for lines in functions]
    texts[0] = "\n".join([*comment(f"{shown}{more}: {draft.plan}"), texts[0]])
    return texts


def _usage(drafts: list[Draft], groups: list[list[Hashable]]) -> list[str]:
    """How to call the functions, as comments; for several series after the mapping from name to functions."""
    if sum(len(names) for names in groups) == 1:
        name = literal(groups[0][0])
        column = f"frame[{name}]" if len(name) < 60 else "frame[name]"
        return [
            f"# y = {column}",
            "# x = prepare(y)  # what a model sees",
            "# restore(forecast, history=y)  # forecast: of x, on the stamps that follow y",
        ]
    lines = ["PLANS = {"]
    for draft, names in zip(drafts, groups, strict=True):
        pair = f"(prepare{draft.suffix}, restore{draft.suffix})"
        lines += [line for name in names for line in key_lines(name, pair)]
    return [
        *lines,
        "}",
        "# x = {name: prepare(frame[name]) for name, (prepare, _) in PLANS.items()}",
        "# y = {name: restore(forecast[name], frame[name]) for name, (_, restore) in PLANS.items()}",
    ]
