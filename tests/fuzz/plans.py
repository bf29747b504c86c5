"""Random plans, and series that they can be applied to."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from hypothesis import strategies as st

import preflight_magic as pf
from preflight_magic.model import Repair, Step

INDEXES = {
    "month starts": lambda n: pd.date_range("2011-01-01", periods=n, freq="MS"),
    "month ends": lambda n: pd.DatetimeIndex(pd.date_range("2011-01-01", periods=n, freq="ME").to_numpy()),
    "months": lambda n: pd.period_range("2011-01", periods=n, freq="M"),
    "fiscal quarters": lambda n: pd.period_range("1990Q1", periods=n, freq="Q-OCT"),
    "weeks": lambda n: pd.date_range("2015-01-01", periods=n, freq="W-WED"),
    "business days": lambda n: pd.date_range("2020-02-03", periods=n, freq="B"),
    "days around 29 February": lambda n: pd.date_range("2020-01-15", periods=n, freq="D"),
    "hours across a change of the clocks": lambda n: pd.date_range("2023-10-27", periods=n, freq="h", tz="Europe/Oslo"),
    "days of a zone": lambda n: pd.date_range("2023-03-01", periods=n, freq="D", tz="Europe/Oslo"),
    "numbers": lambda n: pd.RangeIndex(5, 5 + n),
}
COUNTED = ("month starts", "month ends", "months", "fiscal quarters")


@dataclass(frozen=True)
class Trial:
    """A plan, and the series that it is tried on."""

    index: str
    n: int
    seed: int
    scale: float
    steps: tuple[Step, ...]
    repairs: tuple[str, ...]
    gaps: bool
    horizon: int

    def series(self) -> pd.Series:
        """Positive values, inside the bounds of every step; the last ones are observed."""
        rng = np.random.default_rng(self.seed)
        t = np.arange(self.n)
        values = self.scale * np.exp(0.3 * np.sin(2 * np.pi * t / 12) + 0.01 * t + 0.1 * rng.standard_normal(self.n))
        if self.gaps:
            inside = 1 + rng.permutation(self.n - self.horizon - 2)[: self.n // 8]
            values[inside] = np.nan
        return pd.Series(values, index=INDEXES[self.index](self.n), name="cargo")

    def plan(self) -> pf.Plan:
        """Repairs and steps; gaps are filled where there are any."""
        index = INDEXES[self.index](self.n)
        made: list[Repair] = [pf.Sort()] * ("sort" in self.repairs)
        made += [pf.MergeDuplicates()] * ("merge" in self.repairs)
        if "calendar" in self.repairs:
            kind = {pd.PeriodIndex: "periods", pd.RangeIndex: "numbers"}.get(type(index), "dates")
            made.append(pf.RegularCalendar(None if kind == "numbers" else index_freq(index), kind))
        made += [pf.FillGaps(12 if self.seed % 2 else 1)] if self.gaps else []
        steps = tuple(pf.RemoveShift(index[self.n // 3]) if one == SHIFT else one for one in self.steps)
        return pf.Plan(tuple(made), steps)


SHIFT = pf.RemoveShift(0)
"""Stands for a shift at a third of the series, whatever its index."""


def index_freq(index: pd.Index) -> str:
    return str(index.freqstr or pd.infer_freq(index))


def trials() -> st.SearchStrategy[Trial]:
    """Plans of up to six steps."""
    bends = st.sampled_from(
        [
            (),
            (pf.Log(),),
            (pf.Power(0.5),),
            (pf.Power(-0.5, 0.0),),
            (pf.Power(2.0),),
            (pf.Power(1e-7),),
            (pf.Power(0.0),),
        ]
    )
    lags = st.lists(st.sampled_from([1, 1, 2, 4, 12]), max_size=3).map(lambda lags: tuple(map(pf.Difference, lags)))
    fixed = st.lists(
        st.sampled_from([pf.RemoveTrend(), SHIFT, pf.RemovePattern(4), pf.RemovePattern(7), pf.RemovePattern(12)]),
        max_size=3,
        unique=True,
    ).map(tuple)
    days = st.sampled_from([(), (), (pf.PerDay(),), (pf.PerDay("workdays"),)])

    def steps(kind: str) -> st.SearchStrategy[tuple[Step, ...]]:
        first = days if kind in COUNTED else st.just(())
        return st.tuples(first, bends, lags, fixed).map(lambda parts: tuple(one for part in parts for one in part))

    return st.sampled_from(list(INDEXES)).flatmap(
        lambda kind: st.builds(
            Trial,
            index=st.just(kind),
            n=st.integers(70, 110),
            seed=st.integers(0, 10**6),
            scale=st.sampled_from([1.0, 1.0, 37.0, 1e-3, 1e3]),
            steps=steps(kind),
            repairs=st.lists(st.sampled_from(["sort", "merge", "calendar"]), unique=True, max_size=3).map(tuple),
            gaps=st.booleans(),
            horizon=st.integers(1, 15),
        )
    )
