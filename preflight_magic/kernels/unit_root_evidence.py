"""The tests of a unit root and of its absence as a finding shows them, each with all that another library needs."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Literal, Protocol

from preflight_magic.kernels.df_gls import DfGlsResult, df_gls
from preflight_magic.kernels.distributions import Bound, Terms
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import AdfResult, adf, kpss
from preflight_magic.kernels.zivot_andrews import zivot_andrews
from preflight_magic.model import HypothesisTest

UNIT_ROOT = "a unit root"

# One in so many values is the longest automatic bandwidth of KPSS: in a short series the rule may ask for all of them,
# which makes the statistic a constant that rejects (.07 of white noise of fifty values instead of .04, by simulation).
_LONGEST_SHARE = 5
_TERMS: tuple[Literal["c", "ct"], ...] = ("c", "ct")


class _Rejecting(Protocol):
    """What the results of all tests of a unit root have."""

    @property
    def statistic(self) -> float: ...
    @property
    def p_value(self) -> float: ...
    @property
    def p_bound(self) -> Bound: ...
    @property
    def nobs(self) -> int: ...
    @property
    def critical_values(self) -> Mapping[str, float]: ...


@dataclass(frozen=True)
class _Fits:
    """Dickey-Fuller regressions by terms, made once and shared by the tests that need them."""

    ordinary: Mapping[Literal["c", "ct"], AdfResult | None]
    efficient: Mapping[Literal["c", "ct"], DfGlsResult | None]


def root_tests(y: FloatArray, series: str) -> list[HypothesisTest]:
    """ADF, KPSS, DF-GLS and Phillips-Perron, each about a constant and about a line.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values.
    series : str
        What `y` is, for example ``"log, differenced once"``.

    Returns
    -------
    list of HypothesisTest
        Without those that the series cannot carry.
    """
    return _root_tests(y, series, _fits(y))


def level_tests(y: FloatArray, series: str, stamp: Callable[[int], str]) -> list[HypothesisTest]:
    """Those of `root_tests`, and those of use for the level alone: Zivot-Andrews and the union of rejections.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values.
    series : str
    stamp : Callable[[int], str]
        Writes the date of a position, for the break.

    Returns
    -------
    list of HypothesisTest
        Without those that the series cannot carry.
    """
    fits = _fits(y)
    found = [*_root_tests(y, series, fits), _zivot_andrews(y, series, stamp), _union(y, series, fits)]
    return [test for test in found if test is not None]


def _fits(y: FloatArray) -> _Fits:
    # AIC takes few lags where a moving average near -1 needs many, and then rejects a true unit root far too often.
    return _Fits({terms: adf(y, terms, criterion="MAIC") for terms in _TERMS}, {t: df_gls(y, t) for t in _TERMS})


def _root_tests(y: FloatArray, series: str, fits: _Fits) -> list[HypothesisTest]:
    found = [_adf(one, series) for one in fits.ordinary.values()]
    found += [_kpss(y, terms, series) for terms in _TERMS]
    found += [_df_gls(one, series) for one in fits.efficient.values()]
    found += [_phillips_perron(y, terms, series) for terms in _TERMS]
    return [test for test in found if test is not None]


def _unit_root_test(
    test: str, one: _Rejecting, lags: int, terms: Terms, options: Mapping[str, object], null: str = UNIT_ROOT
) -> HypothesisTest:
    return HypothesisTest(
        test=test,
        null=null,
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound=one.p_bound,
        nobs=one.nobs,
        lags=lags,
        terms=terms,
        critical_values=one.critical_values,
        options=options,
    )


def _adf(one: AdfResult | None, series: str) -> HypothesisTest | None:
    if one is None:
        return None
    return _unit_root_test("ADF", one, one.lags, one.terms, {"series": series, "lag choice": "modified AIC"})


def _kpss(y: FloatArray, terms: Literal["c", "ct"], series: str) -> HypothesisTest | None:
    one, most = kpss(y, terms), y.size // _LONGEST_SHARE
    if one is not None and one.bandwidth > most:
        one = kpss(y, terms, most)
    if one is None:
        return None
    return HypothesisTest(
        test="KPSS",
        null="stationary" if terms == "c" else "stationary about a line",
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound="exact",
        nobs=one.nobs,
        lags=one.bandwidth,
        terms=one.terms,
        options={"series": series, "kernel": "Bartlett", "bandwidth choice": "Hobijn, Franses and Ooms, at most n / 5"},
    )


def _df_gls(one: DfGlsResult | None, series: str) -> HypothesisTest | None:
    if one is None:
        return None
    options = {"series": series, "lag choice": f"modified AIC after {one.search} detrending"}
    return _unit_root_test("DF-GLS", one, one.lags, one.terms, options)


def _phillips_perron(y: FloatArray, terms: Literal["c", "ct"], series: str) -> HypothesisTest | None:
    one = phillips_perron(y, terms)
    if one is None:
        return None
    options = {
        "series": series,
        "statistic": "Z of the t-ratio",
        "kernel": "Bartlett",
        "bandwidth choice": "Newey and West 1994",
    }
    return _unit_root_test("Phillips-Perron", one, one.bandwidth, one.terms, options)


def _zivot_andrews(y: FloatArray, series: str, stamp: Callable[[int], str]) -> HypothesisTest | None:
    one = zivot_andrews(y, criterion="MAIC")
    if one is None:
        return None
    options = {
        "series": series,
        "model": "level and trend break once",
        "trimming": one.trimming,
        "break": stamp(one.break_at),
        "lag choice": "modified AIC without a break",
    }
    return _unit_root_test("Zivot-Andrews", one, one.lags, "ct", options, "a unit root without a break")


def _union(y: FloatArray, series: str, fits: _Fits) -> HypothesisTest | None:
    one = union_of_rejections(y, made=[fit for fit in (*fits.efficient.values(), *fits.ordinary.values()) if fit])
    if one is None:
        return None
    members = ", ".join(f"{test} {terms} {ratio:.3f}" for (test, terms), ratio in one.ratios.items())
    options = {
        "series": series,
        "statistics over their 5% critical values": members,
        "lags with a constant alone": one.lags["c"],
        "lag choice": "modified AIC after OLS detrending",
    }
    return _unit_root_test("union of rejections", one, one.lags["ct"], "ct", options)
