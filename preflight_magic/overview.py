"""The row of a series in the overview."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Mapping
from typing import TYPE_CHECKING

import pandas as pd

from preflight_magic.answer import note_of
from preflight_magic.model import Difference, Log, Power, RemovePattern, RemoveShift, RemoveTrend

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport


COLUMNS = ("verdict", "plan", "log", "power", "trend", "shift", "season", "D", "d", "period", "n", "missing", "note")
_KINDS = (
    dict.fromkeys(("log", "trend", "shift"), "boolean")
    | dict.fromkeys(("verdict", "plan", "season", "note"), "string")
    | dict.fromkeys(("D", "d", "period", "n", "missing"), "Int64")
    | {"power": "Float64"}
)


def table_of(rows: Iterable[Mapping[str, object]], names: Iterable[Hashable]) -> pd.DataFrame:
    """Rows of series under each other, each column of a kind that knows missing values.

    Parameters
    ----------
    rows : iterable of Mapping
        From `row_of`.
    names : iterable of Hashable
    """
    index = pd.Index(list(names), name="series", tupleize_cols=False)
    return pd.DataFrame(list(rows), index=index, columns=list(COLUMNS)).astype(_KINDS)


def row_of(report: SeriesReport) -> dict[str, object]:
    """Verdict, plan and their parts as the columns of the overview; NA throughout where infeasible."""
    if report.problem is not None:
        unknown = ("plan", "log", "power", "trend", "shift", "season", "D", "d", "period", "n", "missing")
        return {"verdict": report.verdict, **dict.fromkeys(unknown, pd.NA), "note": report.problem}
    steps = report.plan.steps
    lags = [step.lag for step in steps if isinstance(step, Difference)]
    period = report.season[0]
    seasonal = sum(lag == period and lag > 1 for lag in lags)
    pattern = any(isinstance(step, RemovePattern) for step in steps)
    power = next((step.exponent for step in steps if isinstance(step, Power)), 0.0 if Log() in steps else 1.0)
    trend, span = RemoveTrend() in steps, report.span
    if len(lags) == 1:
        finding = report.findings.get("shift and trend")
        shares = finding.measures.get("trend_shares") if finding else None
        trend = isinstance(shares, Mapping) and next(iter(shares), "") == "trend"
    return {
        "verdict": report.verdict,
        "plan": str(report.plan),
        "log": Log() in steps,
        "power": power,
        "trend": trend,
        "shift": any(isinstance(step, RemoveShift) for step in steps),
        "season": "difference" if seasonal else "fixed" if pattern else "none",
        "D": seasonal,
        "d": len(lags) - seasonal,
        "period": period,
        "n": span.n - span.missing,
        "missing": span.missing,
        "note": note_of(report.findings),
    }
