"""Rung 9: are the two halves of the transformed series alike?"""

from __future__ import annotations

from statistics import NormalDist
from typing import cast

import numpy as np

from preflight_magic.kernels.halves import Moment, compare_halves
from preflight_magic.kernels.plan_columns import removed_columns, seasonal_lag
from preflight_magic.model import Evidence, Judgement, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung

METHOD = (
    "Weak stationarity read directly: mean, variance and autocovariances of the first and of the second half of the "
    "transformed series. Each difference is divided by its standard error, from the long-run variance, which allows "
    "for dependence, and stretched as Student's t asks where few values estimate it; the bound on these z-values "
    "allows for the number of moments that are compared."
)
SOURCES = (
    "Andrews, D. W. K. and Monahan, J. C. (1992). An improved heteroskedasticity and autocorrelation consistent "
    "covariance matrix estimator. Econometrica 60, 953-966.",
)


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Compare the moments of both halves of the transformed series.

    Parameters
    ----------
    series : TimeSeries
    context : Context
        `transformed` and `steps` are read.

    Returns
    -------
    Evidence
        Measures `moments` (tuple of `Moment`), `first_from`, `second_from` (stamps) and `n`.
    """
    if context.transformed is None:
        return Evidence(problem=series.problem or "there is no transformed series.")
    values = context.transformed.to_numpy(dtype=np.float64)
    season = seasonal_lag(context.steps)
    removed = removed_columns(context.steps, series.values.index, len(values))
    fitted = 0 if removed is None else removed.shape[1] - 1
    moments = compare_halves(values, (1, 2, season) if season > 2 else (1, 2), fitted)
    if moments is None:
        return Evidence(problem=f"the {len(values)} values left after the plan are too few, or all the same.")
    index = context.transformed.index
    return Evidence(
        {"moments": moments, "first_from": index[0], "second_from": index[len(values) // 2], "n": len(values)}
    )


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Notes on moments that differ; no steps."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", evidence.problem[:1].upper() + evidence.problem[1:])
    moments = [one for one in cast("tuple[Moment, ...]", evidence.measures["moments"]) if not np.isnan(one.z)]
    if not moments:
        return Judgement("inconclusive", "not examined", "No difference between the halves has a standard error.")
    # Several moments are compared at once, so each has its share of the significance (Bonferroni).
    bound = NormalDist().inv_cdf(1.0 - thresholds.significance / (2.0 * len(moments)))
    apart = [one for one in moments if abs(one.z) > bound]
    if not apart:
        most = max(moments, key=lambda one: abs(one.z))
        return Judgement(
            "clear",
            "both halves alike",
            f"Mean, variance and autocovariances of the two halves differ by no more than chance allows: the largest "
            f"z-value is {most.z:.1f}, for the {most.name}, where {bound:.1f} would be notable.",
        )
    told = [
        f"The {one.name} is {one.first:.3g} in the first half and {one.second:.3g} in the second (z {one.z:.1f})."
        for one in apart
    ]
    names = " and ".join(one.name for one in apart) if len(apart) < 3 else f"{len(apart)} moments"
    return Judgement(
        "inconclusive",
        f"{names} {'differs' if len(apart) == 1 else 'differ'} between the halves",
        f"{' '.join(told)} By chance one of {len(moments)} moments passes {bound:.1f} about once in "
        f"{1.0 / thresholds.significance:.0f} stationary series.",
    )


RUNG = Rung(
    name="halves",
    question="Are the two halves of the transformed series alike?",
    after=("roots",),
    method=METHOD,
    sources=SOURCES,
    examine=examine,
    judge=judge,
)
