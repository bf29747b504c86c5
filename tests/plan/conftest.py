"""Time indexes, a ferry line's series on them, and plans to try."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import (
    Difference,
    FillGaps,
    Log,
    Logit,
    PerDay,
    Power,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
)
from preflight_magic.plan.plan import Plan

N = 90

INDEXES = {
    "yearly periods": pd.period_range("1930", periods=N, freq="Y"),
    "quarterly periods": pd.period_range("1999Q2", periods=N, freq="Q-NOV"),
    "monthly periods": pd.period_range("2014-03", periods=N, freq="M"),
    "weekly periods": pd.period_range("2019-01-07", periods=N, freq="W-SUN"),
    "daily periods": pd.period_range("2020-02-01", periods=N, freq="D"),
    "two-monthly periods": pd.period_range("2014-01", periods=N, freq="2M"),
    "year starts": pd.date_range("1930-01-01", periods=N, freq="YS"),
    "quarter starts": pd.date_range("1999-02-01", periods=N, freq="QS-FEB"),
    "quarter ends": pd.date_range("1999-02-01", periods=N, freq="QE-NOV"),
    "month starts": pd.date_range("2014-03-01", periods=N, freq="MS"),
    "month ends": pd.date_range("2014-03-01", periods=N, freq="ME"),
    "weeks": pd.date_range("2019-01-07", periods=N, freq="W-WED"),
    "days": pd.date_range("2020-02-01", periods=N, freq="D"),
    "business days": pd.date_range("2020-02-03", periods=N, freq="B"),
    "hours": pd.date_range("2021-03-27 05:00", periods=N, freq="h"),
    # Clocks change in this span.
    "hours with a time zone": pd.date_range("2021-03-27 05:00", periods=N, freq="h", tz="Europe/Oslo"),
    "stamps without a frequency": pd.DatetimeIndex(list(pd.date_range("2014-03-01", periods=N, freq="MS"))),
    "range": pd.RangeIndex(N),
    "integers": pd.Index(np.arange(1850, 1850 + 4 * N, 4)),
}

PLANS = {
    "as given": lambda index: (),
    "log": lambda index: (Log(),),
    "difference": lambda index: (Difference(1),),
    "two differences": lambda index: (Difference(1), Difference(1)),
    "airline": lambda index: (Log(), Difference(12), Difference(1)),
    "seasonal difference": lambda index: (Power(0.5), Difference(4)),
    "two seasons": lambda index: (Difference(12), Difference(5)),
    "trend": lambda index: (Log(), RemoveTrend()),
    "drift": lambda index: (Log(), Difference(1), RemoveTrend()),
    "everything fixed": lambda index: (
        Power(-0.25, 3.0),
        RemoveTrend(),
        RemoveShift(index[41]),
        RemovePattern(12),
    ),
    "shift and pattern after a difference": lambda index: (
        Logit(0.0, 5000.0),
        Difference(1),
        RemoveShift(index[41]),
        RemovePattern(7),
    ),
    "shift after a seasonal difference": lambda index: (Log(), Difference(12), RemoveShift(index[50]), RemoveTrend()),
    "nothing left to remove": lambda index: (Difference(12), Difference(1), RemoveTrend(), RemovePattern(6)),
    "pattern after two differences": lambda index: (Difference(1), Difference(1), RemovePattern(4)),
    "two patterns": lambda index: (Log(), RemovePattern(4), RemovePattern(7)),
    "power near zero": lambda index: (Power(1e-6), Difference(1)),
    "power zero": lambda index: (Power(0.0, 2.0), RemoveTrend()),
}

MONTHLY = ["monthly periods", "month starts", "month ends", "stamps without a frequency"]
LONG_PERIODS = [*MONTHLY, "quarterly periods", "quarter starts", "quarter ends", "yearly periods", "year starts"]


TYPICAL = ["monthly periods", "stamps without a frequency", "hours with a time zone", "integers"]
RICH = ["airline", "everything fixed", "shift and pattern after a difference"]


def passengers(index, seed=7):
    """Invented passengers of a ferry line: growth, season and noise in proportion to the level."""
    t = np.arange(len(index))
    noise = np.random.default_rng(seed).standard_normal(len(index))
    values = 400 * np.exp(0.008 * t + 0.3 * np.sin(2 * np.pi * t / 12) + 0.05 * noise)
    return pd.Series(values, index=index, name="passengers")


@pytest.fixture(params=INDEXES, ids=lambda kind: kind.replace(" ", "-"))
def series(request):
    return passengers(INDEXES[request.param])


@pytest.fixture(params=PLANS, ids=lambda name: name.replace(" ", "-"))
def steps_for(request):
    return PLANS[request.param]


@pytest.fixture(params=TYPICAL, ids=lambda kind: kind.replace(" ", "-"))
def typical(request):
    """Series on one of the few indexes that differ most."""
    return passengers(INDEXES[request.param])


@pytest.fixture(params=RICH, ids=lambda name: name.replace(" ", "-"))
def rich_steps_for(request):
    """One of the few plans that do most."""
    return PLANS[request.param]


@pytest.fixture(params=LONG_PERIODS, ids=lambda kind: kind.replace(" ", "-"))
def totals(request):
    return passengers(INDEXES[request.param])


@pytest.fixture
def monthly():
    return passengers(INDEXES["monthly periods"])


@pytest.fixture
def gappy(monthly):
    monthly.iloc[[5, 20, 21, 22, 60]] = np.nan
    return monthly


@pytest.fixture
def day_plans():
    return [
        Plan((), (PerDay(),)),
        Plan((FillGaps(12),), (PerDay("workdays"), Log(), Difference(4), RemoveTrend())),
        Plan((), (PerDay(), Power(0.3), RemoveTrend(), RemovePattern(4))),
    ]
