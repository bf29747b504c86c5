"""The nouns of the package as frozen dataclasses, without logic.

Everything that travels between layers is declared here: the steps of a plan, the series that intake makes,
what a rung finds, and what a hypothesis test reports.
"""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import dataclass, field
from typing import Literal

import pandas as pd

Verdict = Literal["clear", "transform", "inconclusive", "infeasible"]
"""Of a rung or of a series: nothing to do; steps proposed; too even to call; cannot be computed."""

Stamp = pd.Period | pd.Timestamp | int
"""A label of a time index."""


class CheckError(ValueError):
    """Input that cannot be checked: one sentence with the column, what was seen and what to do next."""


# --------------------------------------------------------------------------------------------- repairs
@dataclass(frozen=True)
class ReadDates:
    """Read stamps that are text in ISO form, or date objects, as dates."""


@dataclass(frozen=True)
class Sort:
    """Put the rows in the order of their stamps."""


@dataclass(frozen=True)
class MergeDuplicates:
    """Make one row of those that have the same stamp; their values have to be the same."""


@dataclass(frozen=True)
class RegularCalendar:
    """Put in the stamps that the calendar has and the index lacks, without values.

    `freq` is the pandas frequency of dates and periods, None for numbers, which count by one.
    """

    freq: str | None
    kind: Literal["dates", "periods", "numbers"] = "dates"


@dataclass(frozen=True)
class FillGaps:
    """Fill missing values inside the span on a straight line, after taking out the mean pattern of `period`."""

    period: int = 1


IndexRepair = ReadDates | Sort | MergeDuplicates | RegularCalendar
"""Repairs of the time index; they come before the values are filled, in this order."""

Repair = IndexRepair | FillGaps


# ----------------------------------------------------------------------------------------------- steps
@dataclass(frozen=True)
class PerDay:
    """Divide each total by the number of ``days`` or ``workdays`` in its month or quarter."""

    unit: Literal["days", "workdays"] = "days"


@dataclass(frozen=True)
class Log:
    """Natural logarithm."""


@dataclass(frozen=True)
class Power:
    """Box-Cox power ``((y + offset)**exponent - 1) / exponent`` (Box and Cox 1964); exponent 0 is the log."""

    exponent: float
    offset: float = 0.0


@dataclass(frozen=True)
class Logit:
    """``log((y - lower) / (upper - y))`` for a share between two bounds."""

    lower: float = 0.0
    upper: float = 1.0


@dataclass(frozen=True)
class Difference:
    """``y[t] - y[t - lag]``."""

    lag: int = 1


@dataclass(frozen=True)
class RemoveTrend:
    """Subtract a straight line."""


@dataclass(frozen=True)
class RemoveShift:
    """Subtract a change of level; `at` is the first stamp of the new level."""

    at: Stamp


@dataclass(frozen=True)
class RemovePattern:
    """Subtract a fixed seasonal pattern of `period` values."""

    period: int


Step = PerDay | Log | Power | Logit | Difference | RemoveTrend | RemoveShift | RemovePattern
"""Closed union: `match` with `assert_never` in every place that handles steps."""


# ---------------------------------------------------------------------------------------------- series
CalendarKind = Literal[
    "yearly", "quarterly", "monthly", "weekly", "daily", "business daily", "hourly", "minutely", "counter"
]


@dataclass(frozen=True)
class Calendar:
    """What the time index counts.

    `freq` is the pandas frequency of the index (None for an integer index), `noun` names one step in sentences
    ("month"), `seasons` are the natural seasonal periods in steps, shortest first, empty where there is none.
    """

    kind: CalendarKind
    freq: str | None
    noun: str
    seasons: tuple[int, ...] = ()


@dataclass(frozen=True)
class TimeSeries:
    """One series as the ladder sees it.

    `values` is float64 from the first to the last observed value on a regular index, NaN where a value is missing.
    `season` holds the seasonal periods to consider, shortest first; ``(1,)`` means no season. `problem` is the
    sentence that says why the series cannot be checked, or None; then `values` may be empty.
    """

    name: Hashable
    values: pd.Series
    calendar: Calendar | None
    season: tuple[int, ...] = (1,)
    repairs: tuple[Repair, ...] = ()
    problem: str | None = None
    notes: tuple[str, ...] = ()


# ------------------------------------------------------------------------------------- what a rung says
@dataclass(frozen=True)
class HypothesisTest:
    """One test, with all that is needed to repeat it with another library.

    Attributes
    ----------
    test : str
        The usual name of the method: ``ADF``, ``KPSS``, ...
    null : str
        The null hypothesis in words.
    statistic : float
    critical_values : Mapping[str, float]
        By significance level, for example ``{"5%": -2.88}``; empty where p-values are computed directly.
    p_value : float
        In [0, 1]; read it with `p_bound`.
    p_bound : {"exact", "at most", "at least"}
    nobs : int
        Observations in the test regression.
    lags : int or None
        Lags in the regression, or bandwidth of the long-run variance (then `options` names the kernel).
    terms : {"n", "c", "ct", "ctt"}
        Deterministic terms: none, constant, constant and trend, and a quadratic trend.
    options : Mapping[str, object]
        Whatever else is needed: ``series`` ("as given", "log", "differenced once", ...), kernel, lag choice, ...
    """

    test: str
    null: str
    statistic: float
    p_value: float
    p_bound: Literal["exact", "at most", "at least"]
    nobs: int
    lags: int | None
    terms: Literal["n", "c", "ct", "ctt"]
    critical_values: Mapping[str, float] = field(default_factory=dict)
    options: Mapping[str, object] = field(default_factory=dict)


@dataclass(frozen=True)
class Root:
    """An inverse root of an ARMA polynomial.

    Attributes
    ----------
    part : {"AR", "MA"}
    modulus : float
        Of the inverse root: below one is stationary (AR) or invertible (MA).
    period : float
        Steps per cycle: inf for a positive real root, 2 for a negative one.
    standard_error : float
        Of the modulus by the delta method, in the same unit; NaN where the information matrix is singular.
    seasonal : bool
        From the polynomial in the seasonal lag.
    """

    part: Literal["AR", "MA"]
    modulus: float
    period: float
    standard_error: float
    seasonal: bool = False


@dataclass(frozen=True)
class Evidence:
    """What the numbers of one rung say, without opinion; `problem` says why they could not be computed."""

    measures: Mapping[str, object] = field(default_factory=dict)
    tests: tuple[HypothesisTest, ...] = ()
    problem: str | None = None


@dataclass(frozen=True)
class Judgement:
    """What follows from the evidence of one rung."""

    verdict: Verdict
    headline: str
    reason: str
    steps: tuple[Step, ...] = ()


@dataclass(frozen=True)
class Finding:
    """Evidence and judgement of one rung.

    `headline` is a few words, `reason` one or two sentences with the numbers that decided, `tests` the hypothesis
    tests shown beside it, `measures` named numbers, `steps` what the rung proposes.
    """

    rung: str
    question: str
    verdict: Verdict
    headline: str
    reason: str
    tests: tuple[HypothesisTest, ...] = ()
    measures: Mapping[str, object] = field(default_factory=dict)
    steps: tuple[Step, ...] = ()
