"""A plan handed to statsmodels: what a model can hold becomes its arguments, and nothing is done twice."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass

import pandas as pd

from preflight_magic.model import CheckError, Difference, PerDay, RemovePattern, RemoveShift, RemoveTrend, Repair, Step
from preflight_magic.plan import emit_functions as shared
from preflight_magic.plan.emit import is_monthly
from preflight_magic.plan.emit_stamps import stamps_after
from preflight_magic.plan.emit_steps import Draft, Reasons, prepare_lines, restore_lines
from preflight_magic.plan.fixed_part import Regressors, lags_of, regressors
from preflight_magic.plan.literals import comment, literal, one_line, stamp_literal
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps
from preflight_magic.plan.words import describe

LONGEST_DUMMIES = 24
"""Seasonal period up to which a pattern is given by dummies; longer ones by Fourier terms. Common practice: hours of a
day still have dummies, hours of a week no longer."""
PAIRS = 10
"""Pairs of Fourier terms for a long pattern. Common practice."""

Said = dict[Step | Repair, tuple[str, ...]]
"""Why each step is there; empty text where nothing is known."""


@dataclass(frozen=True)
class Orders:
    """Orders of the ARMA model of what a plan leaves; `period` is the lag of the seasonal ones, 1 for none."""

    p: int
    q: int
    P: int
    Q: int
    period: int


def emit_model(name: Hashable, plan: Plan, why: Reasons, index: pd.Index, orders: Orders) -> str:
    """Source that fits a SARIMAX model to one series and forecasts it in its own units.

    Parameters
    ----------
    name : Hashable
    plan : Plan
    why : Mapping from step to sentence
    index : Index
        Of the series.
    orders : Orders

    Returns
    -------
    str
        Functions ``prepare``, ``restore``, ``fit``, ``forecast``, and ``regressors`` where there are any.

    Raises
    ------
    CheckError
        If the plan differences at two seasonal lags, which one model cannot hold.
    """
    d, D, season = _differences(plan, orders)
    inner = Plan((), point_steps(plan.steps))
    said: Said = {step: (one_line(why.get(step, "")),) for step in plan.steps}
    draft = Draft(inner, said, is_monthly(index))
    columns = regressors(plan.steps)
    blocks = [part.rstrip("\n") for part in shared_functions(draft)]
    prepared = prepare_lines(draft)
    heading = comment(f"{literal(name)}: {plan}")
    blocks += ["\n".join([*heading, *prepared]), "\n".join(restore_lines(draft))]
    if columns:
        blocks.append("\n".join(_regressors_lines(plan, columns, said)))
    blocks.append("\n".join(_fit_lines(plan, columns, (orders.p, d, orders.q), (orders.P, D, orders.Q, season), said)))
    blocks.append("\n".join(_forecast_lines(columns, index)))
    body = "\n\n\n".join(blocks)
    head = ["import numpy as np", "import pandas as pd", "from statsmodels.tsa.statespace.sarimax import SARIMAX"]
    head = head if "np." in body else head[1:]
    column = f"frame[{literal(name)}]" if len(literal(name)) < 60 else "frame[name]"
    usage = [f"# y = {column}", "# forecast(y, steps=12)"]
    return "\n".join(head) + "\n\n\n" + body + "\n\n\n" + "\n".join(usage) + "\n"


def _differences(plan: Plan, orders: Orders) -> tuple[int, int, int]:
    """Ordinary and seasonal differences, and the seasonal lag of the model."""
    lags = lags_of(plan.steps)
    seasonal = sorted({lag for lag in lags if lag > 1} | ({orders.period} if orders.P or orders.Q else set()))
    if len(seasonal) > 1:
        raise CheckError(
            f"A SARIMAX model has one seasonal lag, and the plan '{plan}' with its ARMA model needs "
            f"{' and '.join(map(str, seasonal))}; leave one difference out, or use the pandas form."
        )
    season = seasonal[0] if seasonal else 0
    return lags.count(1), sum(lag > 1 for lag in lags), season


def shared_functions(draft: Draft) -> list[str]:
    """Sources of the shared functions that point steps need."""
    parts: list[str] = []
    if draft.counted:
        unit = next(step.unit for step in draft.plan.steps if isinstance(step, PerDay))
        parts += [shared.PERIOD_BOUNDS, shared.DAYS if unit == "days" else shared.WORKDAYS]
    if any("mean_of(" in line for line in restore_lines(draft)):
        parts.append(shared.MEAN_OF_FINITE)
    return parts


def _reason(text: str, said: Said, step: Step) -> list[str]:
    reason = said.get(step, ("",))[0]
    return comment(f"{text[:1].upper()}{text[1:]}: {reason}" if reason else f"{text[:1].upper()}{text[1:]}.", 4)


def _regressors_lines(plan: Plan, columns: Regressors, said: Said) -> list[str]:
    """Source of the columns that stand for the Remove steps, in levels: the model differences them itself."""
    lags = lags_of(plan.steps)
    lines = [
        "def regressors(index):",
        '    """Columns beside the ARMA part, in levels; index begins at the first stamp of the history."""',
    ]
    timed = columns.trend or columns.patterns or (columns.constant and lags)
    if timed:
        lines.append("    t = np.arange(len(index))")
    lines.append("    X = pd.DataFrame(index=index)")
    if columns.constant:
        lines.append('    X["drift"] = 1.0 * t' if lags else '    X["level"] = 1.0')
    if columns.trend:
        lines += [*_reason(describe(RemoveTrend()), said, RemoveTrend()), '    X["trend"] = 1.0 * t']
    for number, at in enumerate(columns.shifts, 1):
        lines += _reason(describe(RemoveShift(at)), said, RemoveShift(at))
        lines.append(f'    X["shift_{number}"] = 1.0 * (index >= {stamp_literal(at)})')
    for period in columns.patterns:
        lines += _reason(describe(RemovePattern(period)), said, RemovePattern(period))
        lines += _fourier(period) if period > LONGEST_DUMMIES else _dummies(period)
    return [*lines, "    return X"]


def _dummies(period: int) -> list[str]:
    return [
        "    # Each position of the cycle against the last one.",
        f"    for position in range({period - 1}):",
        f"        own, last = t % {period} == position, t % {period} == {period - 1}",
        f'        X[f"season_{period}_{{position + 1}}"] = 1.0 * own - 1.0 * last',
    ]


def _fourier(period: int) -> list[str]:
    pairs = min(PAIRS, (period - 1) // 2)
    return [
        f"    # A smooth pattern of {pairs} harmonics; {period - 1} dummies would cost a value each.",
        f"    for k in range(1, {pairs + 1}):",
        f'        X[f"sin_{period}_{{k}}"] = np.sin(2 * np.pi * k * t / {period})',
        f'        X[f"cos_{period}_{{k}}"] = np.cos(2 * np.pi * k * t / {period})',
    ]


def _fit_lines(
    plan: Plan,
    columns: Regressors,
    order: tuple[int, int, int],
    seasonal: tuple[int, int, int, int],
    said: Said,
) -> list[str]:
    lags = lags_of(plan.steps)
    trend = "c" if not columns and len(lags) < 2 else "n"
    lines = ["def fit(y):", '    """SARIMAX model that holds the rest of the plan."""', "    x = prepare(y)"]
    for step in dict.fromkeys(step for step in plan.steps if isinstance(step, Difference)):
        lines += _reason(describe(step), said, step)
    lines += comment(_caution(plan, columns), 4)
    lines += ["    model = SARIMAX(", "        x.to_numpy(),"]
    long = any(period > LONGEST_DUMMIES for period in columns.patterns)
    if columns:
        lines.append("        exog=regressors(x.index).to_numpy(),")
    if columns and not long:
        # Many smooth columns look alike in the first rows, which the diffuse start of their effects does not bear.
        lines.append("        mle_regression=False,  # effects by least squares, the ARMA errors allowed for")
    lines += [f"        order={order},"]
    if any(seasonal[:3]):
        lines += [f"        seasonal_order={seasonal},"]
    note = ""
    if trend == "c":
        note = "  # a drift: the mean of the differences" if lags else "  # the mean"
    lines += [f'        trend="{trend}",{note}']
    if lags or (columns and not long):
        lines += ["        use_exact_diffuse=True,  # no prior on the level it starts from"]
    lines += ["    )", "    return model.fit(disp=False, maxiter=500)"]
    return lines


def _caution(plan: Plan, columns: Regressors) -> str:
    """What must not be done beforehand as well."""
    done = []
    if lags_of(plan.steps):
        done.append("differences inside, series and regressors alike" if columns else "differences inside")
    if columns:
        done.append("estimates the regressors together with the ARMA part")
    if plan.repairs:
        done.append("skips missing values")
    beforehand = []
    if lags_of(plan.steps):
        beforehand.append("difference y")
    if columns:
        beforehand.append("take trend, shift or season out of y")
    if plan.repairs:
        beforehand.append("fill its gaps")
    if not done:
        return "Nothing is differenced or removed, here or beforehand."
    return f"The model {_and(done)}: do not {_or(beforehand)} beforehand as well."


def _and(parts: list[str]) -> str:
    return " and ".join([", ".join(parts[:-1]), parts[-1]] if len(parts) > 1 else parts)


def _or(parts: list[str]) -> str:
    return " or ".join([", ".join(parts[:-1]), parts[-1]] if len(parts) > 1 else parts)


def _forecast_lines(columns: Regressors, index: pd.Index) -> list[str]:
    exog = ""
    lines = [
        "def forecast(y, steps, coverage=0.9):",
        '    """Median, mean and interval in the units of y, on the stamps that follow it."""',
        f"    ahead = {stamps_after(index, 'y.index')}",
    ]
    if columns:
        lines += ["    X = regressors(y.index.append(ahead)).iloc[-steps:]"]
        exog = ", exog=X.to_numpy()"
    return [
        *lines,
        f"    found = fit(y).get_forecast(steps{exog})",
        "    middle = pd.Series(found.predicted_mean, index=ahead)",
        "    variance = pd.Series(found.var_pred_mean, index=ahead)",
        "    ends = pd.DataFrame(found.conf_int(alpha=1 - coverage), index=ahead)",
        "    return pd.DataFrame(",
        "        {",
        '            "median": restore(middle, y),',
        '            "mean": restore(middle, y, variance),',
        '            "lower": restore(ends[0], y),',
        '            "upper": restore(ends[1], y),',
        "        }",
        "    )",
    ]
