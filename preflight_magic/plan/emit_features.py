"""A plan as columns for a learner: what was known at the forecast date, and nothing later."""

from __future__ import annotations

from collections.abc import Hashable

import pandas as pd

from preflight_magic.model import RemovePattern, RemoveShift, RemoveTrend, Repair, Step
from preflight_magic.plan.emit import is_monthly
from preflight_magic.plan.emit_model import shared_functions
from preflight_magic.plan.emit_stamps import stamps_after
from preflight_magic.plan.emit_steps import Draft, Reasons, prepare_lines, restore_lines
from preflight_magic.plan.fixed_part import lags_of
from preflight_magic.plan.literals import comment, literal, one_line, stamp_literal
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps

LAGS = 3
"""Values before the newest one that a learner gets."""


def emit_features(name: Hashable, plan: Plan, why: Reasons, index: pd.Index, period: int, horizon: int) -> str:
    """Source that makes the table a learner is trained on, the rows it forecasts, and the way back.

    Parameters
    ----------
    name : Hashable
    plan : Plan
    why : Mapping from step to sentence
    index : Index
        Of the series.
    period : int
        Seasonal period, 1 for none.
    horizon : int
        Steps ahead by default.

    Returns
    -------
    str
        Functions ``prepare``, ``restore``, ``features`` and ``values``.
    """
    inner = Plan((), point_steps(plan.steps))
    said: dict[Step | Repair, tuple[str, ...]] = {step: (one_line(why.get(step, "")),) for step in plan.steps}
    draft = Draft(inner, said, is_monthly(index))
    blocks = [part.rstrip("\n") for part in shared_functions(draft)]
    blocks += ["\n".join([*comment(f"{literal(name)}: {plan}"), *prepare_lines(draft)])]
    blocks += ["\n".join(restore_lines(draft)), "\n".join(_features_lines(plan, index, period))]
    blocks.append("\n".join(_values_lines()))
    body = "\n\n\n".join(blocks)
    head = ["import numpy as np", "import pandas as pd"]
    column = f"frame[{literal(name)}]" if len(literal(name)) < 60 else "frame[name]"
    usage = [
        f"# y = {column}",
        f"# X, target, base = features(y, steps={horizon})",
        "# known = X.notna().all(axis=1) & target.notna()  # rows to train on",
        f"# learner.fit(X[known], target[known]); guess = learner.predict(X[-{horizon}:])",
        f"# values(guess, base[-{horizon}:], y)",
    ]
    return "\n".join(head) + "\n\n\n" + body + "\n\n\n" + "\n".join(usage) + "\n"


def _features_lines(plan: Plan, index: pd.Index, period: int) -> list[str]:
    lags = lags_of(plan.steps)
    seasonal = next((lag for lag in lags if lag > 1), 0)
    lines = [
        "def features(y, steps):",
        '    """Columns, target and base for forecasts `steps` ahead, with the rows that follow y at the end.',
        "",
        "    Each row uses only what was known `steps` before its stamp; fewer `steps` know more.",
        '    """',
        f"    index = y.index.append({stamps_after(index, 'y.index')})",
        "    x = prepare(y).reindex(index)",
        "    newest = x.shift(steps)",
        "    X = pd.DataFrame(index=index)",
    ]
    cycle = seasonal or next((step.period for step in plan.steps if isinstance(step, RemovePattern)), period)
    if cycle > 1:
        lines += [f"    seasons = -(-steps // {cycle}) * {cycle}  # steps, rounded up to whole seasons"]
    if seasonal:
        lines += comment(
            f"Difference {seasonal}: the target is the change from the newest known value of the same season.", 4
        )
        lines += ["    base = x.shift(seasons)"]
    elif lags:
        lines += [
            *comment("Difference 1: the target is the change from the newest known value.", 4),
            "    base = newest",
        ]
    else:
        lines += [
            *comment("Nothing is differenced: the target is the value itself.", 4),
            "    base = pd.Series(0.0, index=index)",
        ]
    change = "".join(f".diff({lag})" for lag in lags)
    name = "change" if lags else "value"
    lines += [
        f"    for lag in range({LAGS + 1}):",
        f'        X[f"{name}_{{lag}}_earlier"] = newest{change}.shift(lag)',
    ]
    if cycle > 1:
        lines += [f'    X["{name}_last_season"] = x{change}.shift(seasons)']
        lines += [f'    X["season"] = np.arange(len(index)) % {cycle}  # position in the cycle, known at any time']
    if any(isinstance(step, RemoveTrend) for step in plan.steps):
        lines += comment("Trees do not go on beyond the times they saw: give them the trend removed instead.", 4)
        lines += ['    X["time"] = np.arange(len(index))']
    for number, step in enumerate((step for step in plan.steps if isinstance(step, RemoveShift)), 1):
        lines += [f'    X["shift_{number}"] = 1 * (index >= {stamp_literal(step.at)})']
    return [*lines, "    return X, x - base, base"]


def _values_lines() -> list[str]:
    return [
        "def values(guess, base, y):",
        '    """Forecast in the units of y from a guess of the target."""',
        "    return restore(pd.Series(np.asarray(guess, dtype=float), index=base.index) + base, y)",
    ]
