"""Proof: what the plan, and each of its steps, would have done for forecasts from past origins."""

from __future__ import annotations

import warnings
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, cast

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from preflight_magic.kernels.arma_order import search
from preflight_magic.kernels.forecast_comparison import naive_scale
from preflight_magic.kernels.plan_columns import likelihood_columns, seasonal_lag
from preflight_magic.kernels.restricted_likelihood import difference, missing_columns
from preflight_magic.model import CheckError, Stamp
from preflight_magic.plan.fixed_part import lags_of, regressors
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.words import describe
from preflight_magic.proof_result import Proof
from preflight_magic.proof_words import rows_and_sentences
from preflight_magic.reference_parts import forecast_of

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport

Floats = NDArray[np.float64]

COVERAGE = 0.9
"""Of the intervals that are counted."""
FEWEST_ORIGINS = 3
MOST_WORK = 3000
"""Values fitted in all, by which the origins of a long series are kept to between 3 and 12. A proof is an answer while
a person waits."""
_SPARE = 12
"""Values that a training part has beyond what its plan estimates. Common practice."""
_TIED = float(np.log(20.0))
"""Log odds up to which another plan is not ruled out."""


@dataclass(frozen=True)
class Scored:
    """Errors of one forecast at one origin, scaled; NaN where a value is missing."""

    absolute: Floats
    squared: Floats
    inside: Floats


def prove_plan(report: SeriesReport) -> Proof:
    """Forecast a checked series from past origins, with its plan and with others.

    Parameters
    ----------
    report : SeriesReport

    Returns
    -------
    Proof
        With a `problem` where the series cannot be checked or is too short.

    Notes
    -----
    At each origin all that a plan estimates, and the order and coefficients of the ARMA model, come from the values up
    to there alone. Which steps the plan has was decided on the whole series.
    """
    horizon = report.horizon
    if report.problem is not None:
        return Proof(report.name, horizon, problem=report.problem)
    plans = _plans(report)
    y = report.series
    least = _least(report, plans.values())
    cuts = origins(y.to_numpy(dtype=float), horizon, least)
    if len(cuts) < FEWEST_ORIGINS:
        needed = least + horizon + FEWEST_ORIGINS - 1
        return Proof(
            report.name,
            horizon,
            problem=f"column {report.name!r}: {len(y)} values are too few for a proof over {horizon} steps, which "
            f"needs {needed}; ask for a shorter horizon.",
        )
    scored: dict[str, list[Scored | None]] = {}
    for label, plan in plans.items():
        scored[label] = [_with_plan(plan, y, cut, horizon, report.season[0]) for cut in cuts]
    for label, lag in _naives(report.season[0]).items():
        scored[label] = [_naive(y, cut, horizon, lag, report.season[0]) for cut in cuts]
    if all(one is None for each in scored.values() for one in each):
        told = "nothing changes from one season to the next, so there are no errors to scale"
        return Proof(report.name, horizon, problem=f"column {report.name!r}: {told}; no proof is needed.")
    stamps = tuple(cast(Stamp, y.index[cut - 1]) for cut in cuts)
    rows, sentences, errors = rows_and_sentences(scored, cuts, horizon, report.plan)
    return Proof(report.name, horizon, stamps, rows, errors, sentences)


def origins(values: Floats, horizon: int, least: int) -> tuple[int, ...]:
    """Lengths of the training parts, evenly spread, the last one `horizon` values before the end.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing; a training part ends with an observed value.
    horizon : int
    least : int
        Values of the shortest training part.

    Returns
    -------
    tuple of int
    """
    room = len(values) - horizon - least
    if room < 0:
        return ()
    most = int(np.clip(MOST_WORK // len(values), FEWEST_ORIGINS, 12))
    stride = max(1, room // (most - 1))
    cuts = np.arange(len(values) - horizon, least - 1, -stride)[:most][::-1]
    return tuple(int(cut) for cut in cuts if np.isfinite(values[cut - 1]))


def _least(report: SeriesReport, plans: Iterable[Plan]) -> int:
    """Values of the shortest training part: half of the series, two seasons, and what every plan estimates."""
    needs = [len(report.series) // 2, 2 * report.season[0]]
    for plan in plans:
        columns = regressors(plan.steps)
        fixed = columns.trend + len(columns.shifts) + sum(columns.patterns)
        needs.append(sum(lags_of(plan.steps)) + fixed + _SPARE)
    return max(needs)


def _plans(report: SeriesReport) -> dict[str, Plan]:
    """The plan, the plan without each step, no plan, and the runner-up where the evidence does not rule it out."""
    plan = report.plan
    found = {"the plan": plan}
    for position, step in enumerate(plan.steps):
        found[f"without {describe(step)}"] = plan.without(position)
    if len(plan.steps) > 1:
        found["no plan"] = Plan(plan.repairs)
    for text, below, steps in report.alternatives:
        other = Plan(plan.repairs, steps)
        if below <= _TIED and other not in found.values():
            found[f"runner-up: {text}"] = other
            break
    return found


def _naives(period: int) -> dict[str, int]:
    return {"naive": 1, "seasonal naive": period} if period > 1 else {"naive": 1}


def _with_plan(plan: Plan, y: pd.Series, cut: int, horizon: int, period: int) -> Scored | None:
    """Errors of the plan with an ARMA model, both from the first `cut` values; None where they do not carry it."""
    history, future = y.iloc[:cut], y.iloc[cut : cut + horizon]
    try:
        transformed = plan.apply(history).dropna()
        values = transformed.to_numpy(dtype=float)
        gaps = missing_columns(history.to_numpy(dtype=float))
        for lag in lags_of(plan.steps):
            gaps = difference(gaps, lag)
        columns = likelihood_columns(plan.steps, history.index, len(values), gaps if len(gaps) == len(values) else None)
        season = seasonal_lag(plan.steps)
        fit = search(
            values, season, mean=columns.mean, seasonal=season > 1, nuisance=columns.nuisance, fixed=columns.fixed
        )
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            table = forecast_of(plan, fit, history, transformed, future.index).table(COVERAGE)
    except (CheckError, ArithmeticError, np.linalg.LinAlgError):
        # The history does not carry the plan, or no ARMA model of what it leaves could be found.
        return None
    middle, lower, upper = (table[name].to_numpy() for name in ("median", "lower", "upper"))
    return _scored(future.to_numpy(dtype=float), history.to_numpy(dtype=float), middle, lower, upper, period)


def _naive(y: pd.Series, cut: int, horizon: int, lag: int, period: int) -> Scored | None:
    """Errors of the value `lag` steps before, repeated, with an interval from the changes at that lag."""
    history = y.iloc[:cut].to_numpy(dtype=float)
    last = history[-lag:]
    if not np.isfinite(last).all():
        return None
    middle = np.resize(last, horizon)
    _, squared = naive_scale(history, lag)
    # 1.6449: normal distance of a 90 % interval; the error of each further cycle adds to the earlier ones
    distance = 1.6448536269514722 * np.sqrt(squared * (np.arange(horizon) // lag + 1))
    future = y.iloc[cut : cut + horizon].to_numpy(dtype=float)
    return _scored(future, history, middle, middle - distance, middle + distance, period)


def _scored(
    future: Floats, history: Floats, middle: Floats, lower: Floats, upper: Floats, period: int
) -> Scored | None:
    absolute, squared = naive_scale(history, period)
    if not absolute > 0.0 or not np.isfinite(middle).all():
        return None
    inside = np.where(np.isfinite(future), ((lower <= future) & (future <= upper)).astype(float), np.nan)
    return Scored(np.abs(future - middle) / absolute, (future - middle) ** 2 / squared, inside)
