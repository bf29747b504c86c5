"""What a rung is: one question asked of a series, how it is examined and how the evidence is judged."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import pandas as pd

from preflight_magic.model import Evidence, Judgement, Step, TimeSeries
from preflight_magic.policy import Settings, Thresholds


@dataclass(frozen=True)
class Context:
    """What a rung may know besides the series.

    Attributes
    ----------
    settings : Settings
    comparison : object or None
        The comparison of candidate plans that several rungs share, computed once by the ladder.
    steps : tuple of Step
        The plan so far.
    transformed : pandas.Series or None
        The series after the plan; only for rungs that come after it.
    """

    settings: Settings = field(default_factory=Settings)
    comparison: object | None = None
    steps: tuple[Step, ...] = ()
    transformed: pd.Series | None = None


@dataclass(frozen=True)
class Rung:
    """One decision of the ladder.

    Attributes
    ----------
    name : str
        As it appears in findings.
    question : str
        The one question this rung asks of a series.
    after : tuple of str
        Names of the rungs it comes after.
    method : str
        How this is decided, in a few plain sentences.
    sources : tuple of str
        Published sources of the methods.
    examine : Callable[[TimeSeries, Context], Evidence]
        Computes; never sees the significance.
    judge : Callable[[Evidence, Thresholds], Judgement]
        Decides; never sees data.
    """

    name: str
    question: str
    after: tuple[str, ...]
    method: str
    sources: tuple[str, ...]
    examine: Callable[[TimeSeries, Context], Evidence]
    judge: Callable[[Evidence, Thresholds], Judgement]
