"""Cards: what is shown of a report, as plain data."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass
from typing import Literal

import numpy as np
import pandas as pd

from preflight_magic.model import Root, Verdict


@dataclass(frozen=True)
class StepMark:
    """A step of the plan as it is shown; `state` tells it from the recommendation."""

    text: str
    meaning: str
    state: Literal["kept", "left out", "put in"] = "kept"


@dataclass(frozen=True)
class TestRow:
    """A hypothesis test in words; `series` says which series it looks at."""

    series: str
    test: str
    null: str
    statistic: str
    p: str
    details: str


@dataclass(frozen=True)
class RungCard:
    """One rung; `before` is what it said of the recommended plan where that was something else."""

    position: int
    rung: str
    question: str
    verdict: Verdict
    headline: str
    reason: str
    steps: tuple[str, ...]
    tests: tuple[TestRow, ...]
    measures: tuple[tuple[str, str], ...]
    method: str
    sources: tuple[str, ...]
    before: str | None = None


@dataclass(frozen=True)
class PlanRow:
    """A candidate plan and the odds of the best plan against it, in words and as natural logarithm."""

    text: str
    odds: str
    below: float
    shown: bool


@dataclass(frozen=True)
class Change:
    """What is different from the recommendation: what, what it was, what it is."""

    what: str
    before: str
    after: str


@dataclass(frozen=True)
class CodeForm:
    """Code in one form: pandas, or arguments of a model; without source `problem` says why."""

    title: str
    source: str
    problem: str | None = None


@dataclass(frozen=True, eq=False)
class Picture:
    """Numbers of the first picture; `after` is None where the plan has no steps, arrays hold lags 1 ... nlags."""

    before: pd.Series
    after: pd.Series | None
    correlogram_before: np.ndarray
    correlogram_after: np.ndarray | None
    band: float
    period: int
    shifts: tuple[object, ...]
    noun: str
    plan: str


@dataclass(frozen=True)
class RootsPicture:
    """Numbers of the strip of roots; `notes` are label and value of what follows from them."""

    roots: tuple[Root, ...]
    order: str
    noun: str
    notes: tuple[tuple[str, str], ...]


@dataclass(frozen=True, eq=False)
class HalvesPicture:
    """Numbers of the picture of both halves; `moments` are name, first half, second half, and z of the difference."""

    after: pd.Series
    second_from: object
    moments: tuple[tuple[str, float, float, float], ...]
    noun: str


@dataclass(frozen=True)
class ProofLine:
    """One way to forecast; `error` and `at_origins` are mean absolute scaled errors, NaN where there is none."""

    forecast: str
    error: float
    ratio: str
    coverage: str
    p: str
    at_origins: tuple[float, ...]


@dataclass(frozen=True)
class ProofCard:
    """Forecasts from the past, the plan first; `origins` tells in words where they start and how far they reach."""

    rows: tuple[ProofLine, ...]
    sentences: tuple[str, ...]
    origins: str
    problem: str | None


@dataclass(frozen=True, eq=False)
class Card:
    """Everything that is shown of one series; `yours` tells season and spans that a person chose."""

    name: Hashable
    verdict: Verdict
    answer: str
    span: str
    problem: str | None
    repairs: tuple[StepMark, ...] = ()
    steps: tuple[StepMark, ...] = ()
    yours: str = ""
    changes: tuple[Change, ...] = ()
    picture: Picture | None = None
    roots: RootsPicture | None = None
    halves: HalvesPicture | None = None
    proof: ProofCard | None = None
    rungs: tuple[RungCard, ...] = ()
    plans: tuple[PlanRow, ...] = ()
    codes: tuple[CodeForm, ...] = ()


@dataclass(frozen=True, eq=False)
class OverviewRow:
    """One series in a line; `values` and `after` are those of its small pictures, `after` None without steps.

    `position` is its place in the report, `rungs` holds question, verdict and headline.
    """

    position: int
    name: Hashable
    verdict: Verdict
    plan: str
    note: str
    values: np.ndarray
    after: np.ndarray | None
    span: str
    rungs: tuple[tuple[str, Verdict, str], ...]


@dataclass(frozen=True, eq=False)
class OverviewCard:
    """Some or all series of a report.

    `counts` counts the verdicts of all, `part` says which are shown and how; `together` says whether the others may
    explain a target, and is empty without one.
    """

    counts: tuple[tuple[Verdict, int], ...]
    rows: tuple[OverviewRow, ...]
    part: str
    together: str = ""
