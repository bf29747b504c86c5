"""What this layer asks of a report: two protocols, so that cards can be built from anything that answers them."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Mapping, Sequence
from typing import TYPE_CHECKING, Any, Protocol, runtime_checkable

if TYPE_CHECKING:
    import numpy as np
    import pandas as pd

    from preflight_magic.model import Finding, Repair, Step, Verdict


class PlanView(Protocol):
    """Repairs and steps in canonical order; ``str(plan)`` is short text."""

    @property
    def repairs(self) -> tuple[Repair, ...]:
        """What makes the data a regular series."""

    @property
    def steps(self) -> tuple[Step, ...]:
        """Transforms that can be undone."""


class ProofRowView(Protocol):
    """Errors of one way to forecast from past origins."""

    @property
    def forecast(self) -> str:
        """Its name; the plan comes first."""

    @property
    def mase(self) -> float:
        """Mean absolute scaled error, over origins and steps."""

    @property
    def coverage(self) -> float:
        """Share of the values inside the 90 % interval."""

    @property
    def ratio(self) -> float:
        """Error over that of the plan."""

    @property
    def p_value(self) -> float:
        """Of a test against the plan; NaN where there is none."""


class ProofView(Protocol):
    """Forecasts of a series from past origins."""

    @property
    def horizon(self) -> int:
        """Steps ahead."""

    @property
    def origins(self) -> Sequence[object]:
        """Last stamp of each training part."""

    @property
    def rows(self) -> Sequence[ProofRowView]:
        """The plan first."""

    @property
    def by_origin(self) -> Mapping[str, Sequence[float]]:
        """Forecast -> error at each origin."""

    @property
    def sentences(self) -> Sequence[str]:
        """What follows."""

    @property
    def problem(self) -> str | None:
        """Why nothing could be computed, or None."""


class SeriesView(Protocol):
    """One checked series."""

    @property
    def name(self) -> Hashable:
        """The column, or the group of a long table."""

    @property
    def series(self) -> pd.Series:
        """Values as given on a regular index, NaN where one is missing; shape (n,)."""

    @property
    def transformed(self) -> pd.Series:
        """Values after the plan, without NaN; shape (m,), m <= n."""

    @property
    def findings(self) -> Mapping[str, Finding]:
        """Rung name -> finding, in the order of the ladder."""

    @property
    def verdict(self) -> Verdict:
        """Verdict of the series."""

    @property
    def plan(self) -> PlanView:
        """The plan that `transformed` and the findings belong to."""

    @property
    def recommended(self) -> PlanView:
        """The plan that was recommended; differs from `plan` when a person has switched steps."""

    @property
    def answer(self) -> str:
        """One sentence."""

    @property
    def noun(self) -> str:
        """A step of the calendar: ``month``."""

    @property
    def season(self) -> tuple[int, ...]:
        """Seasonal periods considered, shortest first; (1,) for none."""

    @property
    def alternatives(self) -> tuple[tuple[str, float, tuple[Step, ...]], ...]:
        """Candidate plans as (text, natural log of the odds of the best against it, steps)."""

    @property
    def methods(self) -> Mapping[str, tuple[str, tuple[str, ...]]]:
        """Rung name -> (how it is decided, published sources)."""

    @property
    def problem(self) -> str | None:
        """Why the series cannot be checked, or None."""

    @property
    def proof(self) -> ProofView:
        """Forecasts from the past, computed when first asked for: this takes seconds."""

    def correlograms(self, nlags: int) -> tuple[np.ndarray, np.ndarray, float]:
        """Autocorrelations as given and transformed at lags 1 ... nlags, and half the width of the 95 % band."""

    def code(self, form: str = "pandas") -> str:
        """Python source of the plan."""

    def with_plan(self, steps: Iterable[Step]) -> SeriesView:
        """The series examined again with these steps; the recommendation stays what it was."""

    def with_season(self, season: int | Sequence[int]) -> SeriesView:
        """The series checked anew with other seasonal periods, with the plan that is recommended then."""

    def without_span(self, start: Any, end: Any) -> SeriesView:
        """The series checked anew without the values from start to end, both included."""


@runtime_checkable
class ReportView(Protocol):
    """Several checked series."""

    @property
    def names(self) -> Sequence[Hashable]:
        """Names in the order of the frame."""

    @property
    def overview(self) -> pd.DataFrame:
        """One row a series, indexed by name; at least ``verdict``, ``plan`` and ``note``."""

    def __getitem__(self, name: Hashable, /) -> SeriesView: ...

    def __len__(self) -> int: ...
