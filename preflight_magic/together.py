"""Series that are meant to explain another: may their levels be regressed on each other, and what is known ahead?"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from preflight_magic.kernels.cointegration import EngleGranger, Johansen, engle_granger, johansen, levels_regression
from preflight_magic.model import CheckError, Difference, Finding, HypothesisTest, RemoveTrend
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps
from preflight_magic.stamps import counted
from preflight_magic.together_words import told

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport


@dataclass(frozen=True)
class Pair:
    """One regressor beside the target.

    Attributes
    ----------
    name : Hashable
    wanders, target_wanders : bool
        A plan that differences says so.
    trends : bool
        Both have a linear trend that their plans remove.
    r_squared, durbin_watson : float
        Of the regression in levels.
    test : EngleGranger or None
        Where both wander.
    """

    name: Hashable
    wanders: bool
    target_wanders: bool
    trends: bool
    r_squared: float
    durbin_watson: float
    test: EngleGranger | None


def check_target(names: Sequence[Hashable], target: Hashable) -> None:
    """Raise a CheckError unless the target is among the series and has others beside it."""
    if target not in names:
        shown = ", ".join(repr(name) for name in names[:5]) + (f" and {len(names) - 5} more" if len(names) > 5 else "")
        raise CheckError(f"target={target!r} is no series of this check, which has {shown}; name one of them.")
    if len(names) < 2:
        raise CheckError(f"target={target!r} is the only series, so nothing can explain it; check others with it.")


def examine_together(reports: Sequence[SeriesReport], target: Hashable, significance: float) -> Finding:
    """One finding on the series that are meant to explain another.

    Parameters
    ----------
    reports : sequence of SeriesReport
        The target among them.
    target : Hashable
    significance : float
        Size of the tests.

    Returns
    -------
    Finding
        `infeasible` where the target or all others could not be checked; `inconclusive` where a regression of levels
        would be spurious or unbalanced; else `clear`. Its tests are Engle and Granger's for each regressor that
        wanders with the target, and Johansen's for all that do.
    """
    question = f"May the other series explain {target!r} as they are?"
    main = next(one for one in reports if one.name == target)
    others = [one for one in reports if one.name != target and one.problem is None]
    if main.problem is not None or not others:
        reason = main.problem or f"None of the series beside {target!r} could be checked."
        return Finding("together", question, "infeasible", "cannot be examined", reason)
    pairs, tests = [], []
    for other in others:
        pair = _pair(main, other)
        pairs.append(pair)
        if pair.test is not None:
            tests.append(_engle_granger_row(target, other.name, pair.test))
    wandering = [main, *(one for one in others if _wanders(one))]
    relations = _johansen(wandering) if _wanders(main) and len(wandering) > 1 else None
    if relations is not None:
        tests += _johansen_rows(relations, [one.name for one in wandering])
    verdict, headline, reason = told(target, pairs, relations, significance, main.horizon, main.noun)
    measures: dict[str, object] = {
        "known_lags": f"{counted(main.horizon, main.noun)} or more",
        "relations": None if relations is None else relations.rank,
        "r_squared": {pair.name: pair.r_squared for pair in pairs},
        "durbin_watson": {pair.name: pair.durbin_watson for pair in pairs},
    }
    return Finding("together", question, verdict, headline, reason, tuple(tests), measures)


def _wanders(report: SeriesReport) -> bool:
    return any(isinstance(step, Difference) for step in report.plan.steps)


def _levels(report: SeriesReport) -> pd.Series:
    """Values after per day, log, power or logit, gaps filled as the plan does."""
    return Plan(report.plan.repairs, point_steps(report.plan.steps)).apply(report.series)


def _joined(reports: Sequence[SeriesReport]) -> np.ndarray:
    """Values at the stamps that all have, one column a series; empty where their calendars differ."""
    columns = [_levels(one).rename(str(place)) for place, one in enumerate(reports)]
    kinds = {(type(one.index).__name__, str(one.index.dtype)) for one in columns}
    if len(kinds) > 1:
        return np.empty((0, len(columns)))
    return pd.concat(columns, axis=1, join="inner").dropna().to_numpy(dtype=float)


def _pair(main: SeriesReport, other: SeriesReport) -> Pair:
    values = _joined([main, other])
    enough = len(values) >= 8
    r_squared, durbin_watson = levels_regression(*values.T) if enough else (float("nan"), float("nan"))
    both = _wanders(main) and _wanders(other)
    test = engle_granger(values[:, 0], values[:, 1:]) if both and enough else None
    trends = RemoveTrend() in main.plan.steps and RemoveTrend() in other.plan.steps
    return Pair(other.name, _wanders(other), _wanders(main), trends, r_squared, durbin_watson, test)


def _johansen(reports: Sequence[SeriesReport]) -> Johansen | None:
    values = _joined(reports)
    return johansen(values) if len(values) else None


def _engle_granger_row(target: Hashable, name: Hashable, found: EngleGranger) -> HypothesisTest:
    return HypothesisTest(
        test="Engle-Granger",
        null=f"{target!r} and {name!r} are not cointegrated",
        statistic=found.statistic,
        p_value=found.p_value,
        p_bound="exact",
        nobs=found.nobs,
        lags=found.lags,
        terms="c",
        critical_values=found.critical_values,
        options={"series": "levels after per day, log, power or logit", "regressor": name, "lag choice": "AIC"},
    )


def _johansen_rows(found: Johansen, names: list[Hashable]) -> list[HypothesisTest]:
    rows = []
    for rank, (statistic, critical) in enumerate(zip(found.statistics, found.critical_values, strict=True)):
        rejected = statistic > critical
        rows.append(
            HypothesisTest(
                test="Johansen trace",
                null=f"at most {counted(rank, 'relation')} among {', '.join(map(repr, names))}",
                statistic=statistic,
                p_value=0.05,
                p_bound="at most" if rejected else "at least",
                nobs=found.nobs,
                lags=found.lags,
                terms="c",
                critical_values={"5%": critical},
                options={"series": "levels, standardised", "lag choice": "BIC of the vector autoregression"},
            )
        )
    return rows
