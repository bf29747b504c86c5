"""Rung 2: what the values are like before anything is decided from them."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CalendarKind, Evidence, Judgement, TimeSeries, Verdict
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.rungs.kinds import demand_road, other_kinds
from preflight_magic.stamps import counted, stamp_text

Floats = npt.NDArray[np.float64]
REACH = 3
"""Neighbours on each side, in steps and in cycles, with which a value is compared."""
# Standard deviations in one median, and in one mean, absolute deviation of a normal variable: 1 / 0.6745, sqrt(pi / 2).
_PER_MEDIAN, _PER_MEAN = 1.4826022185056018, 1.2533141373155001

METHOD = (
    "Missing values, zeros, negative values and repeated values are counted. Demand with many zeros is sorted by its "
    "mean interval between demands and the squared coefficient of variation of their sizes. A value stands alone if "
    "it lies many robust standard deviations from the running median of seven values, after the running median of the "
    "same season in seven cycles was taken from each; where all values are positive it must do so in the logs as "
    "well, so that a peak which grows with the level is none. Where the last value stands alone below its neighbours, "
    "its period may not be over: the clock is not asked, so the same data always give the same finding."
)
SOURCES = (
    "Syntetos, A. A., Boylan, J. E. and Croston, J. D. (2005). On the categorization of demand patterns. "
    "Journal of the Operational Research Society 56, 495-503.",
    "Croston, J. D. (1972). Forecasting and stock control for intermittent demands. Operational Research Quarterly 23, "
    "289-303.",
    "Syntetos, A. A. and Boylan, J. E. (2005). The accuracy of intermittent demand estimates. International Journal of "
    "Forecasting 21, 303-314.",
)


# --------------------------------------------------------------------------------------------------------- examine
def examine(series: TimeSeries, context: Context) -> Evidence:
    """Count and measure the values of a series.

    Parameters
    ----------
    series : TimeSeries
    context : Context
        The bound for outliers is read from `settings.thresholds`.

    Returns
    -------
    Evidence
        Measures `n`, `observed`, `missing`, `missing_share`, `longest_gap` (steps), `longest_gap_at`, `zeros`,
        `negatives`, `distinct`, `commonest_share`, `minimum`, `maximum`, `mean`, `whole_numbers`, `unit_interval` (all
        values from 0 to 1), `demand_interval` (steps), `demand_variation`, `outliers` and `outliers_at` (text),
        `incomplete` (stamp of the last value where its period may not be over, else None) and `excluded` (spans, text).
    """
    if series.problem is not None:
        return Evidence(problem=series.problem)
    y = series.values.to_numpy(dtype=np.float64)
    kind = series.calendar.kind if series.calendar else None
    seen = y[~np.isnan(y)]
    longest, start = _longest_gap(y)
    counts = np.unique(seen, return_counts=True)[1]
    interval, variation = demand_pattern(y)
    alone = np.flatnonzero(stands_alone(y, series.season[0], context.settings.thresholds.outlier_z))
    last = len(y) - 1
    near = y[max(last - REACH, 0) : last]
    low = 0.0 <= y[last] < np.median(near[np.isfinite(near)]) if np.isfinite(near).any() else False
    partial = kind not in (None, "counter") and last in alone and low
    alone = alone[alone != last] if partial else alone
    measures: dict[str, object] = {
        "n": len(y),
        "observed": len(seen),
        "missing": len(y) - len(seen),
        "missing_share": 1.0 - len(seen) / len(y),
        "longest_gap": longest,
        "longest_gap_at": _text(series.values.index, start, kind) if longest else None,
        "zeros": int(np.count_nonzero(seen == 0.0)),
        "negatives": int(np.count_nonzero(seen < 0.0)),
        "distinct": len(counts),
        "commonest_share": float(counts.max() / len(seen)),
        "minimum": float(seen.min()),
        "maximum": float(seen.max()),
        "mean": float(seen.mean()),
        "whole_numbers": bool((seen == np.rint(seen)).all()),
        "unit_interval": bool(seen.min() >= 0.0 and seen.max() <= 1.0),
        "demand_interval": interval,
        "demand_variation": variation,
        "outliers": len(alone),
        "outliers_at": tuple(_text(series.values.index, int(row), kind) for row in alone),
        "incomplete": _text(series.values.index, last, kind) if partial else None,
        "excluded": tuple(
            f"{stamp_text(first, kind)} to {stamp_text(end, kind)}" for first, end in context.settings.exclude
        ),
    }
    return Evidence(measures)


def _text(index: pd.Index, row: int, kind: CalendarKind | None) -> str:
    return stamp_text(index[row], kind)


def _longest_gap(y: Floats) -> tuple[int, int]:
    """Length of the longest run of missing values, and the row where it begins."""
    edges = np.diff(np.concatenate([[0], np.isnan(y).astype(np.int8), [0]]))
    starts, ends = np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)
    if not starts.size:
        return 0, 0
    at = int((ends - starts).argmax())
    return int(ends[at] - starts[at]), int(starts[at])


def demand_pattern(y: Floats) -> tuple[float, float]:
    """Mean interval between demands and squared coefficient of variation of their sizes.

    Parameters
    ----------
    y : numpy.ndarray, shape (n,)
        Demand a step; NaN where missing.

    Returns
    -------
    interval : float
        Steps a demand: observed steps over steps with demand (Syntetos, Boylan and Croston 2005); NaN where a value is
        negative or there is no demand.
    variation : float
        Of the sizes of the demands that are not zero, without unit; NaN likewise.
    """
    seen = y[~np.isnan(y)]
    sizes = seen[seen > 0.0]
    if not sizes.size or (seen < 0.0).any():
        return float("nan"), float("nan")
    return len(seen) / len(sizes), float((sizes.std() / sizes.mean()) ** 2)


def stands_alone(y: Floats, period: int, bound: float) -> npt.NDArray[np.bool_]:
    """Find values far from a local robust fit.

    Parameters
    ----------
    y : numpy.ndarray, shape (n,)
        NaN where missing.
    period : int
        Seasonal period in steps; 1 for none.
    bound : float
        Robust standard deviations from the fit.

    Returns
    -------
    numpy.ndarray of bool, shape (n,)
    """
    flagged = np.abs(_local_scores(y, period)) > bound
    if flagged.any() and np.nanmin(y) > 0.0:
        flagged &= np.abs(_local_scores(np.log(y), period)) > bound
    return flagged


def _local_scores(y: Floats, period: int) -> Floats:
    """Robust z-scores of what the neighbours leave unexplained; zero where missing.

    The distance is taken from medians that include the value itself, which lie on one side of a step and not half way
    across it; the scale from medians that leave it out, since a value that is its own median leaves nothing.
    """
    apart = _unexplained(y, period, itself=False)
    apart = apart[np.isfinite(apart)]
    if not apart.size:
        return np.zeros(len(y))
    size = np.abs(apart - np.median(apart))
    scale = _PER_MEDIAN * float(np.median(size))
    if scale == 0.0:
        scale = _PER_MEAN * float(size.mean())
    left = np.nan_to_num(_unexplained(y, period, itself=True), nan=0.0)
    return np.asarray(left / scale if scale > 0.0 else left)


def _unexplained(y: Floats, period: int, itself: bool) -> Floats:
    """Values less the median of the same season in the nearest cycles, then less that of the nearest steps."""
    # First the cycles, so that a season is gone, even one that wanders slowly, before neighbours are compared.
    if period > 1 and len(y) >= 3 * period:
        cycles = -(-len(y) // period)
        folded = np.full(cycles * period, np.nan)
        folded[: len(y)] = y
        y = y - _near_median(folded.reshape(cycles, period), itself).ravel()[: len(y)]
    return np.asarray(y - _near_median(y[:, None], itself)[:, 0])


def _near_median(columns: Floats, itself: bool) -> Floats:
    """Median of up to `REACH` values before and after each value of a column; NaN where there is none."""
    padded = np.pad(columns, ((REACH, REACH), (0, 0)), constant_values=np.nan)
    offsets = [k for k in range(2 * REACH + 1) if itself or k != REACH]
    near = np.sort(np.stack([padded[k : k + len(columns)] for k in offsets]), axis=0)
    count = np.count_nonzero(~np.isnan(near), axis=0)
    low, high = (
        np.take_along_axis(near, half[None], axis=0)[0] for half in (np.maximum(count - 1, 0) // 2, count // 2)
    )
    return np.asarray((low + high) / 2.0)


# ----------------------------------------------------------------------------------------------------------- judge
def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Say what is notable; infeasible only where nothing can be decided."""
    if evidence.problem is not None:
        return Judgement("infeasible", "cannot be checked", evidence.problem)
    found: dict[str, Any] = dict(evidence.measures)
    if found["observed"] < thresholds.minimum_observations:
        return Judgement(
            "infeasible",
            "too few values",
            f"{counted(found['observed'], 'value')} observed, where {thresholds.minimum_observations} are needed.",
        )
    if found["distinct"] == 1:
        return Judgement(
            "infeasible", "one value only", "All observed values are the same, so there is nothing to decide."
        )
    missing = (
        f"{found['missing']} missing ({100 * found['missing_share']:.1f} %)" if found["missing"] else "none missing"
    )
    demand = _demand(found, thresholds)
    kinds, roads = other_kinds(found)
    notes, sentences = [], [_reason(found, demand)]
    if demand:
        notes.append(demand)
        sentences.append(demand_road(found, demand, thresholds.intermittent_interval))
    else:
        sentences += roads
    beside = [] if demand else [part for part in (_alone(found), *kinds) if part]
    headline = ", ".join([f"{found['n']} values, {missing}", *beside])
    if found["observed"] < thresholds.few_observations:
        notes.append("too short")
        sentences.append(
            f"Fewer than {thresholds.few_observations} values are too short a series to tell a season, a shift or a "
            "slow return to the mean: the plan leans on what is usual. Set its forecast beside the last value, and "
            "that of a season ago, repeated; a longer series of the same kind may lend its plan."
        )
    if found.get("incomplete"):
        notes.append("the last value may be an incomplete period")
        sentences.append(
            f"The last value may be an incomplete period: {found['incomplete']} lies far below what its neighbours "
            "and its season make plausible. If it is, drop it; the comparison of plans leaves out what stands alone."
        )
    if found.get("excluded"):
        sentences.append(f"Excluded as asked, so treated as missing in every decision: {', '.join(found['excluded'])}.")
    verdict: Verdict = "inconclusive" if notes else "clear"
    return Judgement(verdict, ", ".join([headline, *notes]), " ".join(sentences))


def _demand(found: dict[str, Any], thresholds: Thresholds) -> str:
    """Class of demand by Syntetos, Boylan and Croston (2005); empty where it is not intermittent."""
    if not found["demand_interval"] >= thresholds.intermittent_interval:
        return ""
    return "lumpy demand" if found["demand_variation"] >= thresholds.intermittent_variation else "intermittent demand"


def _alone(found: dict[str, Any]) -> str:
    return counted(found["outliers"], "isolated outlier") if found["outliers"] else ""


def _reason(found: dict[str, Any], demand: str) -> str:
    parts = []
    if found["missing"]:
        parts.append(f"the longest gap is {counted(found['longest_gap'], 'step')} from {found['longest_gap_at']}")
    if demand:
        parts.append(
            f"a demand comes every {found['demand_interval']:.2f} steps, and the squared coefficient of variation of "
            f"its size is {found['demand_variation']:.2f}"
        )
    elif found["outliers"]:
        stamps = found["outliers_at"]
        shown = ", ".join(stamps[:3]) + (f" and {len(stamps) - 3} more" if len(stamps) > 3 else "")
        parts.append(
            f"values far from their neighbours at {shown}: they stay in the data, and those that stand alone under the "
            "leading plan are left out of the comparison of plans"
        )
    if found["negatives"]:
        parts.append(f"{counted(found['negatives'], 'value')} below zero, so no log")
    elif found["zeros"]:
        parts.append(f"{counted(found['zeros'], 'value')} equal to zero, so no plain log")
    if found["commonest_share"] >= 0.5:
        parts.append(f"one value makes up {found['commonest_share']:.0%} of the series")
    if not parts:
        return f"All values lie between {found['minimum']:.6g} and {found['maximum']:.6g}, and none stands alone."
    text = "; ".join(parts)
    return text[:1].upper() + text[1:] + "."


RUNG = Rung(
    name="values",
    question="Are there enough values, and which of them are missing, zero, negative or far from the rest?",
    after=("time index",),
    method=METHOD,
    sources=SOURCES,
    examine=examine,
    judge=judge,
)
