"""The parts of a reference forecast: the plan with the ARMA model of its roots rung, and candidate plans."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, cast

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from preflight_magic.kernels.arma import ArmaFit
from preflight_magic.kernels.candidate_prediction import Ahead, predict_candidate, within_window
from preflight_magic.kernels.plan_columns import removed_columns
from preflight_magic.kernels.prediction import predict
from preflight_magic.model import Difference, Log, Logit, Power, Step
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps
from preflight_magic.reference_mixture import Mixture, Part

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport

Array = NDArray[np.float64]


def plan_alone(report: SeriesReport, index: pd.Index) -> Mixture:
    """The plan of a report with the ARMA model of its roots rung."""
    fit = cast("ArmaFit | None", report.findings["roots"].measures.get("fit"))
    return forecast_of(report.plan, fit, report.series, report.transformed, index)


def forecast_of(
    plan: Plan, fit: ArmaFit | None, history: pd.Series, transformed: pd.Series, index: pd.Index
) -> Mixture:
    """Predict with one plan and one fitted ARMA model.

    Parameters
    ----------
    plan : Plan
    fit : ArmaFit or None
        Of `transformed`; None where nothing varies enough for a model: what remains then stays at its mean.
    history : Series, shape (n,)
    transformed : Series, shape (m,)
        The history after the plan, without NaN.
    index : Index, shape (steps,)
        Stamps that follow the history.

    Returns
    -------
    Mixture
        Of one part. Its variance includes what is uncertain about mean, drift, trend, shift, pattern and coefficients;
        its degrees of freedom are the values left less the numbers estimated.
    """
    points = point_steps(plan.steps)
    others = Plan((), tuple(step for step in plan.steps if step not in points))
    values, steps = transformed.to_numpy(dtype=float), len(index)
    if fit is None:
        path = np.full(steps, values.mean() if len(values) else 0.0)
        variance, degrees = np.zeros(steps), 1.0
    else:
        columns, lags = fixed_columns(plan.steps, history.index.append(index), len(values) + steps)
        ar, ma = fit.polynomials
        left = values - fit.correction
        found = predict(ar, ma, left, steps, columns=columns, differences=lags, exact=fit.exact)
        path, degrees = found.mean, float(max(fit.nobs - fit.parameters + 1, 1))
        variance = found.variance(len(values), fit.order.size, degrees)
    middle = pd.Series(path, index=index, name=history.name)
    level = others.back_transform(middle, Plan(plan.repairs, points).apply(history))
    part = Part(1.0, Ahead(level.to_numpy(), np.asarray(variance), degrees))
    return Mixture((part,), points, history, index)


def fixed_columns(steps: tuple[Step, ...], index: pd.Index, rows: int) -> tuple[Array | None, tuple[int, ...]]:
    """What a plan removes or leaves as a mean, over past and future, and the lags of its differences."""
    lags = tuple(step.lag for step in steps if isinstance(step, Difference))
    columns = removed_columns(steps, index, rows)
    if columns is None and len(lags) < 2:
        columns = np.ones((rows, 1))
    return columns, lags


def averaged(report: SeriesReport, index: pd.Index) -> Mixture | None:
    """Every candidate plan that the evidence does not rule out, with its share of the evidence.

    Parameters
    ----------
    report : SeriesReport
    index : Index, shape (steps,)
        Stamps that follow the series.

    Returns
    -------
    Mixture or None
        None where one plan is left, or none was compared. Where all values are positive and their likelihoods rule
        out neither the log nor its absence, each plan counts with and without it.
    """
    comparison = report._found.comparison
    if comparison is None:
        return None
    kept = within_window([one.evidence for one in comparison.candidates])
    points, scales = _scales(report, comparison.log_gain)
    if len(kept) * len(scales) == 1:
        return None
    shared = Plan((), points).apply(report.series).to_numpy(dtype=float)
    parts: list[Part] = []
    for logged, share in scales:
        levels = np.log(shared) if logged else shared
        for place, weight in kept:
            candidate = comparison.candidates[place]
            ahead = predict_candidate(candidate, levels, comparison.period, comparison.outliers, len(index))
            if ahead is not None:
                parts.append(Part(share * weight, ahead, logged))
    total = sum(part.weight for part in parts)
    parts = [replace(part, weight=part.weight / total) for part in parts]
    return Mixture(parts, points, report.series, index) if parts else None


def _scales(report: SeriesReport, gain: float) -> tuple[tuple[Step, ...], list[tuple[bool, float]]]:
    """Steps on single values that all plans share, and whether a log comes after them, with its share."""
    points = point_steps(report.plan.steps)
    fixed = any(isinstance(step, Power | Logit) for step in points)
    if fixed or not np.isfinite(gain) or not report.series.min() > 0.0:
        return points, [(False, 1.0)]
    # Equal odds before the data: the gain is twice the log of the ratio of the likelihoods.
    kept = within_window((0.0, gain / 2.0))
    if len(kept) == 1:
        return points, [(False, 1.0)]
    return tuple(step for step in points if step != Log()), [(bool(place), share) for place, share in kept]
