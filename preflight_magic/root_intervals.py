"""Intervals of roots that stay valid near one, by bootstrap: on demand, since they take seconds a series."""

from __future__ import annotations

from math import log
from typing import TYPE_CHECKING, cast

import numpy as np
import pandas as pd

from preflight_magic.kernels.largest_root import largest_root
from preflight_magic.kernels.plan_columns import likelihood_columns
from preflight_magic.kernels.root_bootstrap import root_bootstrap
from preflight_magic.ladder import nuisance_of
from preflight_magic.model import CheckError, Difference, RemoveTrend
from preflight_magic.plan.plan import Plan

if TYPE_CHECKING:
    from preflight_magic.kernels.arma import ArmaFit
    from preflight_magic.kernels.persistence import Persistence
    from preflight_magic.model import TimeSeries
    from preflight_magic.series_report import SeriesReport

FEWEST = 99
"""Simulated series below which the tails of an interval have no meaning, as in the kernels."""


def root_intervals(
    report: SeriesReport, source: TimeSeries, coverage: float, replications: int, seed: int, from_modulus: float
) -> pd.DataFrame:
    """Intervals of the persistence before differencing, and of the ARMA roots after the plan.

    Parameters
    ----------
    report : SeriesReport
    source : TimeSeries
        What was checked.
    coverage : float
        Probability of an interval, between 0 and 1.
    replications : int
        Simulated series at each value that is tested, at least 99.
    seed : int
        The same seed gives the same intervals.
    from_modulus : float
        ARMA roots with a smaller modulus are left out.

    Returns
    -------
    DataFrame
        See `SeriesReport.root_intervals`.

    Raises
    ------
    CheckError
        For a series that could not be checked, or options out of range.
    """
    if report.problem is not None:
        raise CheckError(report.problem)
    if not 0.0 < coverage < 1.0:
        raise CheckError(f"coverage is {coverage!r}; give a probability between 0 and 1, such as 0.9.")
    if isinstance(replications, bool) or not isinstance(replications, int) or replications < FEWEST:
        raise CheckError(f"replications is {replications!r}; give a whole number of at least {FEWEST}.")
    if isinstance(seed, bool) or not isinstance(seed, int) or seed < 0:
        raise CheckError(f"seed is {seed!r}; give a whole number that is not negative.")
    if not 0.0 <= from_modulus <= 1.0:
        raise CheckError(f"from_modulus is {from_modulus!r}; give a modulus from 0 to 1, such as 0.5.")
    rows = [*_persistence(report, coverage, replications, seed)]
    rows += _arma(report, source, coverage, replications, seed, from_modulus)
    kinds = {"of": "string", "part": "string", "seasonal": "boolean"}
    numbers = ("period", "modulus", "lower", "upper", "half_life", "half_life_lower", "half_life_upper")
    return pd.DataFrame(rows, columns=[*kinds, *numbers]).astype(kinds | dict.fromkeys(numbers, "float64"))


def _persistence(report: SeriesReport, coverage: float, replications: int, seed: int) -> list[tuple[object, ...]]:
    """The sum of the coefficients of an autoregression about a line, of the series before ordinary differences.

    The grid bootstrap is of the sum, which is one where a root is; the largest root itself need not move with it.
    """
    plan = report.plan
    kept = tuple(step for step in plan.steps if step not in (Difference(1), RemoveTrend()))
    level = Plan(plan.repairs, kept).apply(report.series).dropna().to_numpy(dtype=float)
    found = largest_root(level, "ct", coverage=coverage, replications=replications, seed=seed, criterion="BIC")
    if found is None:
        return []
    three: tuple[Persistence, ...] = (found.median_unbiased, found.lower, found.upper)
    numbers = (*(one.coefficient_sum for one in three), *(one.half_life for one in three))
    return [("before differences", "AR sum", False, np.nan, *numbers)]


def _arma(
    report: SeriesReport, source: TimeSeries, coverage: float, replications: int, seed: int, from_modulus: float
) -> list[tuple[object, ...]]:
    fit = cast("ArmaFit | None", report.findings["roots"].measures.get("fit"))
    if fit is None:
        return []
    plan, rows = report.plan, len(report.transformed)
    columns = likelihood_columns(plan.steps, source.values.index, rows, nuisance_of(source, plan, rows))
    found = root_bootstrap(
        fit,
        nuisance=columns.nuisance,
        fixed=columns.fixed,
        coverage=coverage,
        replications=replications,
        seed=seed,
        from_modulus=from_modulus,
    )
    told: list[tuple[object, ...]] = []
    for one in found.intervals:
        moduli = (one.root.modulus, one.lower, one.upper)
        lives = (_half_life(m) if one.root.part == "AR" else np.nan for m in moduli)
        told.append(("after the plan", one.root.part, one.root.seasonal, one.root.period, *moduli, *lives))
    return told


def _half_life(modulus: float) -> float:
    """Steps in which a power of the modulus falls to one half."""
    return np.inf if modulus >= 1.0 else log(0.5) / log(modulus) if modulus > 0.0 else 0.0
