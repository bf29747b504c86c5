"""The tests of a unit root and of its absence as a finding shows them, each with all that another library needs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf, kpss
from preflight_magic.kernels.zivot_andrews import zivot_andrews
from preflight_magic.model import HypothesisTest

UNIT_ROOT = "a unit root"

_TERMS: tuple[Literal["c", "ct"], ...] = ("c", "ct")


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
    makers = (_adf, _kpss, _df_gls, _phillips_perron)
    found = [make(y, terms, series) for make in makers for terms in _TERMS]
    return [test for test in found if test is not None]


def level_tests(y: FloatArray, series: str, stamp: Callable[[int], str]) -> list[HypothesisTest]:
    """Those that are of use for the level of a series alone: Zivot-Andrews and the union of rejections.

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
    found = (_zivot_andrews(y, series, stamp), _union(y, series))
    return [test for test in found if test is not None]


def _adf(y: FloatArray, terms: Literal["c", "ct"], series: str) -> HypothesisTest | None:
    # AIC takes few lags where a moving average near -1 needs many, and then rejects a true unit root far too often.
    one = adf(y, terms, criterion="MAIC")
    if one is None:
        return None
    return HypothesisTest(
        test="ADF",
        null=UNIT_ROOT,
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound=one.p_bound,
        nobs=one.nobs,
        lags=one.lags,
        terms=one.terms,
        critical_values=one.critical_values,
        options={"series": series, "lag choice": "modified AIC"},
    )


def _kpss(y: FloatArray, terms: Literal["c", "ct"], series: str) -> HypothesisTest | None:
    one = kpss(y, terms)
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
        options={"series": series, "kernel": "Bartlett", "bandwidth choice": "Hobijn, Franses and Ooms"},
    )


def _df_gls(y: FloatArray, terms: Literal["c", "ct"], series: str) -> HypothesisTest | None:
    one = df_gls(y, terms)
    if one is None:
        return None
    return HypothesisTest(
        test="DF-GLS",
        null=UNIT_ROOT,
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound=one.p_bound,
        nobs=one.nobs,
        lags=one.lags,
        terms=one.terms,
        critical_values=one.critical_values,
        options={"series": series, "lag choice": f"modified AIC after {one.search} detrending"},
    )


def _phillips_perron(y: FloatArray, terms: Literal["c", "ct"], series: str) -> HypothesisTest | None:
    one = phillips_perron(y, terms)
    if one is None:
        return None
    return HypothesisTest(
        test="Phillips-Perron",
        null=UNIT_ROOT,
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound=one.p_bound,
        nobs=one.nobs,
        lags=one.bandwidth,
        terms=one.terms,
        critical_values=one.critical_values,
        options={
            "series": series,
            "statistic": "Z of the t-ratio",
            "kernel": "Bartlett",
            "bandwidth choice": "Newey and West 1994",
        },
    )


def _zivot_andrews(y: FloatArray, series: str, stamp: Callable[[int], str]) -> HypothesisTest | None:
    one = zivot_andrews(y, criterion="MAIC")
    if one is None:
        return None
    return HypothesisTest(
        test="Zivot-Andrews",
        null="a unit root without a break",
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound=one.p_bound,
        nobs=one.nobs,
        lags=one.lags,
        terms="ct",
        critical_values=one.critical_values,
        options={
            "series": series,
            "model": "level and trend break once",
            "trimming": one.trimming,
            "break": stamp(one.break_at),
            "lag choice": "modified AIC without a break",
        },
    )


def _union(y: FloatArray, series: str) -> HypothesisTest | None:
    one = union_of_rejections(y)
    if one is None:
        return None
    members = ", ".join(f"{test} {terms} {ratio:.3f}" for (test, terms), ratio in one.ratios.items())
    return HypothesisTest(
        test="union of rejections",
        null=UNIT_ROOT,
        statistic=one.statistic,
        p_value=one.p_value,
        p_bound=one.p_bound,
        nobs=one.nobs,
        lags=one.lags["ct"],
        terms="ct",
        critical_values=one.critical_values,
        options={
            "series": series,
            "statistics over their 5% critical values": members,
            "lags with a constant alone": one.lags["c"],
            "lag choice": "modified AIC after OLS detrending",
        },
    )
