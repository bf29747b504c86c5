"""A checked series made by hand, and a report of several."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Mapping
from dataclasses import dataclass, field, replace

import numpy as np
import pandas as pd

from preflight_magic.model import Difference, Finding, HypothesisTest, Log, Repair, Root, Step, Verdict
from preflight_magic.plan.plan import Plan


@dataclass(frozen=True)
class Moment:
    """A moment of both halves, and how many standard errors they lie apart."""

    name: str
    first: float
    second: float
    z: float


QUESTIONS = {
    "time index": "Is the time index regular, and how long is a season?",
    "values": "Are the values complete and usable?",
    "calendar length": "Do the values follow the number of days?",
    "spread": "Does the spread grow with the level?",
    "shift and trend": "Is there one change of level, or a straight trend?",
    "season": "Is there a season, fixed or wandering?",
    "unit root": "Does the series wander without returning?",
    "roots": "How near to one are the roots of a model of what remains?",
    "halves": "Do the two halves look alike?",
    "residuals": "Is anything left in the residuals?",
}


def values(n: int = 120, missing: tuple[int, ...] = (40, 41)) -> pd.Series:
    """Monthly passengers of a ferry line: growing, with a season that grows along, from a fixed seed."""
    rng = np.random.default_rng(11)
    t = np.arange(n)
    level = 6 + 0.008 * t + np.cumsum(rng.normal(0, 0.02, n))
    y = np.exp(level + 0.35 * np.sin(2 * np.pi * t / 12) + rng.normal(0, 0.03, n))
    y[list(missing)] = np.nan
    return pd.Series(y, index=pd.period_range("2014-05", periods=n, freq="M"), name="passengers")


def roots() -> tuple[Root, ...]:
    seasonal = [Root("MA", 0.95, p, 0.02, True) for p in (np.inf, 12.0, 6.0, 4.0, 3.0, 2.4, 2.0)]
    return (Root("AR", 0.62, np.inf, 0.11), Root("AR", 0.8, 5.3, 0.07), Root("MA", 0.41, 2.0, np.nan), *seasonal)


def tests() -> tuple[HypothesisTest, ...]:
    levels = {"1%": -3.49, "5%": -2.89, "10%": -2.58}
    options = {"series": "log", "lag choice": "modified AIC"}
    return (
        HypothesisTest("ADF", "a unit root", -1.234, 0.6584, "exact", 105, 12, "c", levels, options),
        HypothesisTest("KPSS", "level stationary", 1.85, 0.01, "at most", 118, 4, "ct", {}, {"kernel": "Bartlett"}),
    )


def findings(steps: tuple[Step, ...]) -> dict[str, Finding]:
    made: dict[str, Finding] = {}
    for name, question in QUESTIONS.items():
        verdict: Verdict = "clear"
        headline, reason, proposed = "Nothing to do", "The numbers give no reason to act.", ()
        if name == "spread" and Log() in steps:
            verdict, headline = "transform", "Take logs"
            reason, proposed = "-2 log likelihood falls by 31.4 with the log; lambda is 0.05 (-0.12 to 0.21).", (Log(),)
        if name == "unit root":
            differences = tuple(s for s in steps if isinstance(s, Difference))
            verdict, headline, proposed = "transform", f"{len(differences)} differences", differences
        measures: dict[str, object] = {"missing_share": 0.0167, "lambda": (0.05, -0.12, 0.21)}
        if name == "roots":
            measures = {
                "roots": roots(),
                "psi_sum": 2.3456,
                "variance_implied": 0.0121,
                "variance_sample": 0.0118,
                "order": "ARMA(1,1)(0,1) at 12",
                "half_life": 1.45,
            }
        if name == "halves":
            measures = {
                "moments": (Moment("mean", 0.012, 0.009, -0.41), Moment("variance", 0.0021, 0.0052, 3.4)),
                "second_from": pd.Period("2019-11", "M"),
            }
        shown = tests() if name in ("unit root", "season") else ()
        if name == "residuals":
            p = 0.43 if Difference(12) in steps else 0.0004
            shown = tuple(
                HypothesisTest("Ljung-Box", f"no correlation up to lag {lags}", 9.1, p, "exact", 107, lags, "c")
                for lags in (12, 24)
            )
            if p < 0.05:
                verdict, headline = "inconclusive", "correlation left"
        made[name] = Finding(name, question, verdict, headline, reason, shown, measures, proposed)
    return made


@dataclass(frozen=True)
class FakeProofRow:
    """Errors of one way to forecast."""

    forecast: str
    mase: float
    ratio: float
    coverage: float = 0.91
    p_value: float = np.nan


@dataclass(frozen=True)
class FakeProof:
    """Forecasts from four origins."""

    rows: tuple[FakeProofRow, ...]
    sentences: tuple[str, ...] = ("Without the log the error is 12 % larger.",)
    horizon: int = 12
    origins: tuple[pd.Period, ...] = tuple(pd.period_range("2021-04", periods=4, freq="6M"))
    problem: str | None = None

    @property
    def by_origin(self) -> dict[str, tuple[float, ...]]:
        return {row.forecast: (row.mase - 0.1, row.mase, np.nan, row.mase + 0.2) for row in self.rows}


@dataclass
class FakeSeries:
    """Answers the protocol of a checked series; records which steps were switched."""

    name: Hashable = "passengers"
    series: pd.Series = field(default_factory=values)
    plan: Plan = field(default_factory=lambda: Plan((), (Log(), Difference(12), Difference(1))))
    recommended: Plan = field(default_factory=lambda: Plan((), (Log(), Difference(12), Difference(1))))
    verdict: Verdict = "transform"
    answer: str = "Take logs and difference at lags 12 and 1 before modelling."
    noun: str = "month"
    season: tuple[int, ...] = (12,)
    problem: str | None = None
    alternatives: tuple[tuple[str, float, tuple[Step, ...]], ...] = (
        ("log, difference 12, difference 1", 0.0, (Log(), Difference(12), Difference(1))),
        ("log, difference 12", 1.4, (Log(), Difference(12))),
        ("log, remove pattern 12, difference 1", 8.25, (Log(),)),
    )
    source: str = "import numpy as np\n\n\ndef prepare(y, history=None):\n    return np.log(y)  # <b>log</b>\n"
    calls: list[tuple[str, object]] = field(default_factory=list)
    failing: dict[str, Exception] = field(default_factory=dict)

    @property
    def transformed(self) -> pd.Series:
        shown = self.series
        for step in self.plan.steps:
            shown = np.log(shown) if isinstance(step, Log) else shown
            shown = shown.diff(step.lag) if isinstance(step, Difference) else shown
        return shown.dropna()

    @property
    def findings(self) -> dict[str, Finding]:
        return findings(self.plan.steps) if self.problem is None else {}

    @property
    def methods(self) -> Mapping[str, tuple[str, tuple[str, ...]]]:
        told = ("Plans are compared by their restricted likelihood.", ("Harville (1974)", "MacKinnon (1994)"))
        return dict.fromkeys(QUESTIONS, told)

    @property
    def proof(self) -> FakeProof:
        self._called("proof", self.plan.steps)
        error = 0.8 if Difference(12) in self.plan.steps else 1.3
        rows = (FakeProofRow("the plan", error, 1.0), FakeProofRow("seasonal naive", 1.1, 1.1 / error, 0.86, 0.0004))
        return FakeProof(rows)

    @property
    def repairs(self) -> tuple[Repair, ...]:
        return self.plan.repairs

    def correlograms(self, nlags: int) -> tuple[np.ndarray, np.ndarray, float]:
        return _acf(self.series, nlags), _acf(self.transformed, nlags), 1.96 / np.sqrt(len(self.transformed))

    def code(self, form: str = "pandas") -> str:
        if "code" in self.failing:
            raise self.failing["code"]
        return f"{self.source}# plan: {self.plan}\n"

    def leave_out(self, step: Step) -> FakeSeries:
        return replace(self, plan=self.plan.without(step))

    def put_in(self, step: Step) -> FakeSeries:
        return replace(self, plan=self.plan.with_step(step))

    def with_plan(self, steps: Iterable[Step]) -> FakeSeries:
        plan = Plan(self.plan.repairs, tuple(steps))
        self._called("with_plan", plan.steps)
        return replace(self, plan=plan, answer=f"Examined with {plan}.")

    def with_season(self, season: tuple[int, ...]) -> FakeSeries:
        self._called("with_season", season)
        plan = Plan((), tuple(step for step in self.plan.steps if step != Difference(12)))
        return replace(self, season=season, plan=plan, recommended=plan, answer=f"Examined with season {season}.")

    def without_span(self, start: object, end: object) -> FakeSeries:
        self._called("without_span", (start, end))
        shown = self.series.copy()
        shown.loc[start:end] = np.nan  # type: ignore[misc]
        return replace(self, series=shown, answer="Examined without a span.")

    def _called(self, call: str, asked: object) -> None:
        self.calls.append((call, asked))
        if call in self.failing:
            raise self.failing[call]


def _acf(series: pd.Series, nlags: int) -> np.ndarray:
    centred = series - series.mean()
    variance = float((centred**2).mean())
    return np.array(
        [float((centred * centred.shift(lag)).sum()) / len(series) / variance for lag in range(1, nlags + 1)]
    )


class FakeReport:
    """Several checked series by name."""

    def __init__(self, *many: FakeSeries) -> None:
        self._many = {one.name: one for one in many}

    @property
    def names(self) -> tuple[Hashable, ...]:
        return tuple(self._many)

    @property
    def overview(self) -> pd.DataFrame:
        rows = [{"verdict": v.verdict, "plan": str(v.plan), "note": v.problem or pd.NA} for v in self._many.values()]
        return pd.DataFrame(rows, index=pd.Index(list(self._many), tupleize_cols=False, name="name"))

    def __getitem__(self, name: Hashable) -> FakeSeries:
        return self._many[name]

    def __len__(self) -> int:
        return len(self._many)
