"""What a finding shows of trend and shift beside the comparison of plans: a robust test, an interval, a broken line."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.restricted_likelihood import line_column, pattern_columns
from preflight_magic.kernels.robust_trend import trend_test
from preflight_magic.kernels.seasonal_strength import fill_along_pattern
from preflight_magic.kernels.shift_date import BrokenTrend, ShiftInterval, broken_trend, shift_interval
from preflight_magic.model import HypothesisTest

TREND_TEST = "Harvey-Leybourne-Taylor trend test"


@dataclass(frozen=True)
class TrendEvidence:
    """The robust test of a trend, the interval of the shift's date, and one change of slope; None where not found."""

    test: HypothesisTest | None
    interval: ShiftInterval | None
    corner: BrokenTrend | None


def trend_evidence(
    values: FloatArray, period: int, shift: int | None, with_line: bool, with_pattern: bool, series: str
) -> TrendEvidence:
    """Robust trend test, interval of a shift's date and broken trend.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing, at least one value observed.
    period : int
        Of the pattern, 1 for none.
    shift : int or None
        First position of the new level of the most likely shift.
    with_line, with_pattern : bool
        What else the level contained when the shift was dated.
    series : str
        What `values` are, for example ``"log"``.

    Returns
    -------
    TrendEvidence
    """
    n = len(values)
    pattern = pattern_columns(n, period) if with_pattern and period > 1 else None
    interval = None
    if shift is not None and 0 < shift < n:
        columns = [np.ones((n, 1))]
        columns += [line_column(n)[:, None]] if with_line else []
        columns += [] if pattern is None else [pattern]
        interval = shift_interval(values, np.column_stack(columns), shift)
    return TrendEvidence(_test(values, period, pattern, series), interval, broken_trend(values, pattern))


def _test(values: FloatArray, period: int, pattern: FloatArray | None, series: str) -> HypothesisTest | None:
    filled = fill_along_pattern(values, 1 if pattern is None else period)
    told = [series]
    if not np.isfinite(values).all():
        told.append("gaps filled along the mean pattern" if pattern is not None else "gaps interpolated")
    if pattern is not None:
        # Beside a line, or else a trend would leak into the pattern of an incomplete last cycle.
        columns = np.column_stack([np.ones(len(values)), line_column(len(values)), pattern])
        effects = np.linalg.lstsq(columns, filled, rcond=None)[0]
        filled = filled - pattern @ effects[2:]
        told.append(f"mean pattern of {period} removed")
    found = trend_test(filled)
    if found is None:
        return None
    return HypothesisTest(
        test=TREND_TEST,
        null="no linear trend",
        statistic=found.statistic,
        p_value=found.p_value,
        p_bound="exact",
        nobs=found.nobs,
        lags=None,
        terms="ct",
        options={
            "series": ", ".join(told),
            "t of the line in the levels": found.t_levels,
            "t of the mean difference": found.t_differences,
            "weight of the mean difference": found.weight,
            "kernel": "quadratic spectral",
            "bandwidth": "Andrews, prewhitened",
        },
    )
