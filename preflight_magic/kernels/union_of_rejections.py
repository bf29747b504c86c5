"""Union of rejections: one test of a unit root for those who know neither the trend nor the first value."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal

from preflight_magic.kernels.df_gls import DfGlsResult, df_gls
from preflight_magic.kernels.dickey_fuller import finite_range
from preflight_magic.kernels.distributions import Bound
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.response_surfaces import critical_values, lower_tail
from preflight_magic.kernels.unit_root import AdfResult, adf

_TABLE = "union_of_rejections"
_CASE = "four tests"
LEVEL = "5%"

Member = tuple[Literal["DF-GLS", "ADF"], Literal["c", "ct"]]
"""A test and its deterministic terms."""


@dataclass(frozen=True)
class UnionResult:
    """Union of the rejections of DF-GLS and ADF, each with constant and with constant and line.

    Attributes
    ----------
    statistic : float
        Largest of the four statistics over their own 5 % critical values: above one, some test rejects by itself.
    p_value : float
        Probability of a larger value under a unit root; read it with `p_bound`.
    p_bound : {"exact", "at most", "at least"}
    critical_values : Mapping[str, float]
        By level, for this length: the factors by which the four critical values are stretched.
    foremost : tuple of str
        Test and terms with the largest ratio.
    ratios : Mapping
        Statistic over its 5 % critical value, by test and terms.
    lags : Mapping[str, int]
        Lagged differences by terms, the same for both tests.
    nobs : int
        Observations in the shortest of the four regressions.
    """

    statistic: float
    p_value: float
    p_bound: Bound
    critical_values: Mapping[str, float]
    foremost: Member
    ratios: Mapping[Member, float] = field(default_factory=dict)
    lags: Mapping[str, int] = field(default_factory=dict)
    nobs: int = 0


def union_of_rejections(
    y: FloatArray, lags: int | None = None, *, made: Sequence[DfGlsResult | AdfResult] = ()
) -> UnionResult | None:
    """Reject a unit root if DF-GLS or ADF, with or without a line, rejects at a stretched critical value.

    DF-GLS has the power where the series starts near its trend, ADF where it starts far off; without a line both are
    stronger where there is none and have no power where there is one. The union comes close to the best of the four in
    each case.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values. Null hypothesis: a unit root.
    lags : int, optional
        Lagged differences of all four; by default those of `df_gls` with the same terms, from the modified AIC.
    made : sequence of DfGlsResult and AdfResult
        Of the same series, made before: used instead of new ones where terms and lags are right. A `df_gls` among them
        is taken to have searched as by default.

    Returns
    -------
    UnionResult or None
        None where one of the four tests cannot be carried.

    Raises
    ------
    ValueError
        For missing or infinite values or negative lags.

    References
    ----------
    Harvey, Leybourne and Taylor (2009), Econometric Theory 25, section 5, here with the critical values of this length.
    Distribution of the largest ratio: our own simulation, tests/simulation.
    """
    finite_range(y)
    ratios: dict[Member, float] = {}
    chosen: dict[str, int] = {}
    nobs = y.size
    terms: Literal["c", "ct"]
    for terms in ("c", "ct"):
        efficient = _made_gls(made, terms, lags) or df_gls(y, terms, lags=lags)
        ordinary = efficient and (_made_adf(made, terms, efficient.lags) or adf(y, terms, lags=efficient.lags))
        if efficient is None or ordinary is None:
            return None
        chosen[terms], nobs = efficient.lags, min(nobs, efficient.nobs)
        ratios["DF-GLS", terms] = efficient.statistic / efficient.critical_values[LEVEL]
        ratios["ADF", terms] = ordinary.statistic / ordinary.critical_values[LEVEL]
    foremost = max(ratios, key=lambda member: ratios[member])
    statistic = ratios[foremost]
    # The table holds the ratio with its sign turned, so that it rejects in the lower tail like all others.
    p_value, bound = lower_tail(-statistic, _TABLE, _CASE, y.size)
    stretch = {level: -value for level, value in critical_values(_TABLE, _CASE, y.size).items()}
    return UnionResult(statistic, p_value, bound, stretch, foremost, ratios, chosen, nobs)


def _made_gls(
    made: Sequence[DfGlsResult | AdfResult], terms: Literal["c", "ct"], lags: int | None
) -> DfGlsResult | None:
    fits = (one for one in made if isinstance(one, DfGlsResult) and one.terms == terms)
    return next((one for one in fits if lags is None or one.lags == lags), None)


def _made_adf(made: Sequence[DfGlsResult | AdfResult], terms: Literal["c", "ct"], lags: int) -> AdfResult | None:
    fits = (one for one in made if isinstance(one, AdfResult) and one.terms == terms)
    return next((one for one in fits if one.lags == lags), None)
