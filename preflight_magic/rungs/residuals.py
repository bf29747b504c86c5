"""Rung 10: what the ARMA model leaves."""

from __future__ import annotations

from dataclasses import replace
from typing import cast

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.correlation import ljung_box
from preflight_magic.kernels.innovation_correlation import portmanteau, whitened
from preflight_magic.kernels.plan_columns import likelihood_columns, seasonal_lag
from preflight_magic.kernels.residual_tests import arch_lm, jarque_bera
from preflight_magic.model import Evidence, HypothesisTest, Judgement, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.stamps import counted, stamp_text

Floats = NDArray[np.float64]

EXACT = "portmanteau, exact moments"
"""Ljung-Box asks of autocorrelations whether they are zero; this test whether they are what white noise leaves behind
the columns that were taken out. It decides where there are such columns."""
REMAINING_Z = 4.0
"""Standardised innovation from which a value is an outlier. Common practice: in a thousand normal values there is one
in sixteen cases."""
ARCH_LAGS = 4
"""Lags of the ARCH test. Common practice."""
_SHORT, _LONG = 10, 24
"""Lags of the Ljung-Box tests without a season, in a fifth of the values at most. Common practice: Hyndman and
Athanasopoulos (2021), *Forecasting: Principles and Practice*, take 10, and twice the period with a season."""

METHOD = (
    "The standardised innovations of the ARMA model of the roots rung. Ljung-Box asks at several lags whether "
    "correlation is left, with the ARMA coefficients counted off its degrees of freedom; where a pattern, line or "
    "shift was taken out, which by itself leaves correlation, the autocorrelations are compared with those that white "
    "noise would leave. The ARCH test asks whether large innovations come together. Together they err in one series "
    "of twenty at the usual significance. Jarque-Bera asks whether the innovations are normal; those beyond four "
    "standard deviations are listed. Plans and point forecasts do not need normal innovations; intervals do."
)
SOURCES = (
    "Ljung, G. M. and Box, G. E. P. (1978). On a measure of lack of fit in time series models. Biometrika 65, 297-303.",
    "Dufour, J.-M. and Roy, R. (1985). Some robust exact results on sample autocorrelations and tests of randomness. "
    "Journal of Econometrics 29, 257-273.",
    "Engle, R. F. (1982). Autoregressive conditional heteroscedasticity with estimates of the variance of United "
    "Kingdom inflation. Econometrica 50, 987-1007.",
    "Jarque, C. M. and Bera, A. K. (1987). A test for normality of observations and regression residuals. "
    "International Statistical Review 55, 163-172.",
)


# --------------------------------------------------------------------------------------------------------- examine
def examine(series: TimeSeries, context: Context) -> Evidence:
    """Test the innovations of the ARMA model.

    Parameters
    ----------
    series : TimeSeries
    context : Context
        `innovations`, `fitted_parameters`, `fit`, `transformed`, `nuisance` and `steps` are read.

    Returns
    -------
    Evidence
        Measures `innovations` (number), `largest`, `outliers` and `outliers_at` (text); Ljung-Box, ARCH-LM and
        Jarque-Bera, and where columns were taken out or values are missing, `EXACT`.
    """
    if context.innovations is None or context.transformed is None:
        return Evidence(problem="no ARMA model was fitted, so there are no innovations to look at.")
    values = np.asarray(context.innovations, dtype=np.float64)
    seen = int(np.isfinite(values).sum())
    if not seen:
        return Evidence(problem="no innovation could be computed.")
    far = np.flatnonzero(np.abs(values) > REMAINING_Z)
    kind = series.calendar.kind if series.calendar else None
    index = context.transformed.index
    measures = {
        "innovations": seen,
        "largest": float(np.nanmax(np.abs(values))),
        "outliers": len(far),
        "outliers_at": tuple(stamp_text(index[int(row)], kind) for row in far),
    }
    tests = _tests(values, seasonal_lag(context.steps), context.fitted_parameters)
    return Evidence(measures, (*_exact_tests(series, context), *tests))


def _exact_tests(series: TimeSeries, context: Context) -> list[HypothesisTest]:
    """Portmanteau tests that allow for columns beside the ARMA model; none where there is only a mean."""
    fit, transformed = context.fit, context.transformed
    if fit is None or transformed is None:
        return []
    values = transformed.to_numpy(dtype=np.float64)
    columns = likelihood_columns(context.steps, series.values.index, len(values), context.nuisance)
    both = None if columns.fixed is None and columns.nuisance is None else whitened(fit, values, columns)
    if both is None:
        return []
    found, width = [], both[1].shape[1]
    for lags in _lags(len(values), seasonal_lag(context.steps), context.fitted_parameters):
        one = portmanteau(*both, lags, context.fitted_parameters)
        if one is not None:
            null = f"no correlation up to lag {lags}"
            test = _test(EXACT, null, one.statistic, one.p_value, one.nobs, lags, one.degrees)
            found.append(replace(test, options={**test.options, "series": "one-step errors", "columns": width}))
    return found


def _tests(values: Floats, season: int, fitted: int) -> list[HypothesisTest]:
    found = []
    for lags in _lags(len(values), season, fitted):
        one = ljung_box(values, lags, fitted)
        if one is not None:
            null = f"no correlation up to lag {lags}"
            found.append(_test("Ljung-Box", null, one.statistic, one.p_value, one.nobs, lags, one.degrees))
    arch = arch_lm(values, ARCH_LAGS)
    if arch is not None:
        null = "large innovations do not come together"
        found.append(_test("ARCH-LM", null, arch.statistic, arch.p_value, arch.nobs, arch.lags, arch.degrees))
    normal = jarque_bera(values)
    if normal is not None:
        null = "the innovations are normal"
        found.append(_test("Jarque-Bera", null, normal.statistic, normal.p_value, normal.nobs, None, normal.degrees))
    return found


def _test(
    test: str, null: str, statistic: float, p_value: float, nobs: int, lags: int | None, degrees: int
) -> HypothesisTest:
    return HypothesisTest(
        test=test,
        null=null,
        statistic=statistic,
        p_value=p_value,
        p_bound="exact",
        nobs=nobs,
        lags=lags,
        terms="c",
        options={"series": "standardised innovations", "degrees of freedom": degrees},
    )


def _lags(n: int, season: int, fitted: int) -> list[int]:
    """Lags of the Ljung-Box tests: a short and a longer one, with a season one and two cycles."""
    wanted = (season, 2 * season) if season > 1 else (_SHORT, _LONG)
    most = max(n // 3 if season > 1 else n // 5, fitted + 1)
    return sorted({min(max(lags, fitted + 3), most) for lags in (*wanted, _SHORT)})


# ----------------------------------------------------------------------------------------------------------- judge
def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Notes on what the model leaves; no steps."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", evidence.problem[:1].upper() + evidence.problem[1:])
    found = evidence.measures
    size = thresholds.significance
    by_name: dict[str, list[HypothesisTest]] = {}
    for test in evidence.tests:
        by_name.setdefault(test.test, []).append(test)
    boxes, arch = by_name.get(EXACT) or by_name.get("Ljung-Box", []), by_name.get("ARCH-LM", [])
    # Several lags, and the ARCH test, are asked at once, so the smallest p-value counts that often (Bonferroni).
    each = size / max(len(boxes) + len(arch), 1)
    left = any(test.p_value < each for test in boxes)
    changes = any(test.p_value < each for test in arch)
    heads, parts = [], [_correlation(boxes, left)] if boxes else []
    if left:
        heads.append("correlation left")
    if changes:
        heads.append("the spread of the innovations changes")
        p = arch[0].p_value
        parts.append(f"Large innovations come together (ARCH-LM, p {_p(p)}), so intervals will be too wide at times.")
    if cast(int, found["outliers"]):
        heads.append(f"{counted(cast(int, found['outliers']), 'outlier')} left")
        parts.append(_outliers(cast("tuple[str, ...]", found["outliers_at"]), cast(float, found["largest"])))
    if any(test.p_value < size for test in by_name.get("Jarque-Bera", [])):
        heads.append("not normal")
        p = by_name["Jarque-Bera"][0].p_value
        parts.append(f"The innovations are not normal (Jarque-Bera, p {_p(p)}), so intervals that assume it are off.")
    if not parts:
        parts.append(
            f"The {found['innovations']} innovations are too few to test; the largest is {found['largest']:.1f}."
        )
    return Judgement(
        "inconclusive" if left or changes else "clear", ", ".join(heads) or "nothing left to explain", " ".join(parts)
    )


def _correlation(boxes: list[HypothesisTest], left: bool) -> str:
    least = min(boxes, key=lambda test: test.p_value)
    over = " and ".join(str(test.lags) for test in boxes) if len(boxes) < 3 else ", ".join(str(b.lags) for b in boxes)
    name = "Ljung-Box" if least.test == "Ljung-Box" else "A portmanteau test that allows for what was taken out"
    if left:
        return (
            f"{name} rejects no correlation up to lag {least.lags} (p {_p(least.p_value)}): an ARMA model with few "
            "terms does not catch all that the plan leaves."
        )
    return f"{name} up to lag {over} does not reject that no correlation is left (smallest p {_p(least.p_value)})."


def _outliers(stamps: tuple[str, ...], largest: float) -> str:
    shown = ", ".join(stamps[:3]) + (f" and {len(stamps) - 3} more" if len(stamps) > 3 else "")
    return f"Beyond {REMAINING_Z:.0f} standard deviations: {shown}; the largest is {largest:.1f}."


def _p(value: float) -> str:
    return "< 0.001" if value < 0.001 else f"{value:.3f}"


RUNG = Rung(
    name="residuals",
    question="Is anything left that an ARMA model does not explain?",
    after=("roots",),
    method=METHOD,
    sources=SOURCES,
    examine=examine,
    judge=judge,
)
