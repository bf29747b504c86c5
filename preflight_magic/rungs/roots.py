"""Rung 8: the roots of an ARMA model of the transformed series."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.arma import ArmaFit
from preflight_magic.kernels.arma_boundary import root_at_one
from preflight_magic.kernels.arma_order import search
from preflight_magic.kernels.arma_parameters import split
from preflight_magic.kernels.arma_response import implied_variance, response
from preflight_magic.kernels.arma_roots import common_factors, inverse_roots
from preflight_magic.kernels.plan_columns import likelihood_columns, seasonal_lag
from preflight_magic.model import (
    Difference,
    Evidence,
    Log,
    Logit,
    Power,
    Step,
    TimeSeries,
)
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.root_notes import MA_FAR, judge
from preflight_magic.rungs.shares import order_shares, summed_share

Floats = NDArray[np.float64]

METHOD = (
    "An ARMA model is fitted to the transformed series by exact Gaussian likelihood, its order chosen by corrected "
    "AIC; missing values are skipped, not filled. The inverse roots of its polynomials are shown with standard errors "
    "by the delta method. The psi weights are those of the infinite moving average: where their absolute values have a "
    "finite sum, the model is stationary. Half-life is the time after which the effect of one innovation stays below "
    "one half. This rung proposes no step; its notes question those already chosen."
)
SOURCES = (
    "Ansley, C. F. (1979). An algorithm for the exact likelihood of a mixed autoregressive-moving average process. "
    "Biometrika 66, 59-65.",
    "Brockwell, P. J. and Davis, R. A. (1991). Time Series: Theory and Methods, 2nd ed. Springer.",
    "Hannan, E. J. and Rissanen, J. (1982). Recursive estimation of mixed autoregressive-moving average order. "
    "Biometrika 69, 81-94.",
    "Hurvich, C. M. and Tsai, C.-L. (1989). Regression and time series model selection in small samples. "
    "Biometrika 76, 297-307.",
)


# --------------------------------------------------------------------------------------------------------- examine
def examine(series: TimeSeries, context: Context) -> Evidence:
    """Fit an ARMA model to the transformed series and find its roots.

    Parameters
    ----------
    series : TimeSeries
    context : Context
        `transformed`, `nuisance` and `steps` are read.

    Returns
    -------
    Evidence
        Measures `order`, `roots`, `ar`, `ma`, `seasonal_ar`, `seasonal_ma` (coefficients: ``1 - c B`` and
        ``1 + c B``), `psi_sum`, `half_life` (steps), `variance_implied`, `variance_sample`, `common_factors`,
        `ma_at_one`, `seasonal_ma_at_one` (fall of the log likelihood when the root is held at one), `mean_fitted`,
        `mean`, `log_likelihood`, `aicc`, `differences` and `seasonal_difference` (lag, 0 for none) of the plan,
        `season` (lag of the seasonal terms tried, 1 for none), `gaps` and `fit`; from the comparison of plans the
        shares of the evidence `share_more`, `share_less` (for more or fewer differences than the plan takes),
        `share_fixed` and `share_wandering` (for kinds of season), and where an MA root of a series without
        differences may be one, `share_summed`: for no difference in the plans of the summed series.
    """
    if context.transformed is None:
        return Evidence(problem=series.problem or "there is no transformed series.")
    values = context.transformed.to_numpy(dtype=np.float64)
    if not _varies(values, series, context.steps):
        return Evidence(problem=f"nothing varies in the {len(values)} values left after the plan.")
    lags = [step.lag for step in context.steps if isinstance(step, Difference)]
    season = seasonal_lag(context.steps)
    if season in series.season:
        # a pattern longer than the shortest season is removed, never differenced: what is left repeats at the shortest
        season = series.season[0]
    columns = likelihood_columns(context.steps, series.values.index, len(values), context.nuisance)
    mean, nuisance, fixed = columns.mean, columns.nuisance, columns.fixed
    fit = search(values, season, mean=mean, seasonal=season > 1, nuisance=nuisance, fixed=fixed)
    if fit is None:
        return Evidence(problem=f"the {len(values)} values left after the plan are too few for an ARMA model.")
    held = root_at_one(fit, values, mean=mean, nuisance=nuisance, fixed=fixed)
    left = values - fit.correction
    return Evidence(
        {
            **_described(fit),
            "variance_sample": float(left.var() if mean else left @ left / len(left)),
            "ma_at_one": held.plain,
            "seasonal_ma_at_one": held.seasonal,
            "mean_fitted": mean,
            "mean": fit.mean,
            "log_likelihood": fit.log_likelihood,
            "aicc": fit.aicc,
            "differences": lags.count(1),
            "seasonal_difference": max((lag for lag in lags if lag > 1), default=0),
            "season": season,
            "gaps": columns.gaps,
            "fit": fit,
            **({} if context.comparison is None else order_shares(context.comparison, context.steps)),
            **({} if lags or not held.plain < MA_FAR else {"share_summed": summed_share(values, context)}),
        }
    )


def _varies(values: Floats, series: TimeSeries, steps: tuple[Step, ...]) -> bool:
    """Whether more than the rounding errors of differencing is left."""
    if not len(values):
        return False
    size = float(np.nanmax(np.abs(series.values.to_numpy(dtype=np.float64)), initial=0.0))
    for step in steps:
        match step:
            case Log() | Logit():
                size = 1.0
            case Power(exponent=exponent):
                size = max(size, 1.0) ** exponent
            case _:
                pass
    return float(np.ptp(values)) > 1e-13 * size


def _described(fit: ArmaFit) -> dict[str, object]:
    order, values = fit.order, fit.coefficients
    parts = zip(("ar", "ma", "seasonal_ar", "seasonal_ma"), split(order, values), strict=True)
    found = response(order, values)
    return {
        "order": str(order),
        "roots": inverse_roots(order, values, fit.covariance),
        **{name: tuple(block.tolist()) for name, block in parts},
        "psi_sum": found.psi_sum,
        "half_life": found.half_life,
        "variance_implied": implied_variance(order, values, fit.variance),
        "common_factors": common_factors(order, values, fit.covariance),
    }


RUNG = Rung(
    name="roots",
    question="Do the roots of an ARMA model lie inside the circle, and was the right number of differences taken?",
    after=("unit root",),
    method=METHOD,
    sources=SOURCES,
    examine=examine,
    judge=judge,
)
