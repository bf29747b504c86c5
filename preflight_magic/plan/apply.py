"""Applying a plan to a series."""

from __future__ import annotations

from itertools import accumulate
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from preflight_magic.plan.fixed_part import fixed_part, lags_of, regressors
from preflight_magic.plan.points import transform_points
from preflight_magic.plan.regular import regular
from preflight_magic.plan.repair import repaired
from preflight_magic.plan.timeline import as_float, join

if TYPE_CHECKING:
    from preflight_magic.plan.plan import Plan


def apply(plan: Plan, series: pd.Series, history: pd.Series | None = None) -> pd.Series:
    """Repair and transform a series; see `Plan.apply`."""
    # A person's own `np.seterr` must not stop it.
    with np.errstate(all="ignore"):
        return _applied(plan, series, history)


def _applied(plan: Plan, series: pd.Series, history: pd.Series | None) -> pd.Series:
    y = regular(plan.repairs, as_float(series))
    if history is None or history is series:
        past, timeline, x = y, join(y, y), y
    else:
        past = regular(plan.repairs, as_float(history))
        timeline = join(past, y)
        x = past.reindex(timeline)
        x.loc[y.index] = y
    x = levels(plan, x, past, series)[-1]
    if regressors(plan.steps):
        # The history is differenced by itself, so that nothing outside it enters the estimates.
        known = x if past is y else levels(plan, past, past, series)[-1].reindex(timeline)
        x = x - fixed_part(plan.steps, known, series)
    return pd.Series(x.reindex(y.index).to_numpy(), index=y.index, name=series.name, copy=True)


def levels(plan: Plan, x: pd.Series, history: pd.Series, given: pd.Series) -> list[pd.Series]:
    """The series after repairs and point steps, and after each difference in turn."""
    x = repaired(plan.repairs, x, history)
    x = transform_points(plan.steps, x, given)
    return list(accumulate(lags_of(plan.steps), lambda level, lag: level.diff(lag), initial=x))
