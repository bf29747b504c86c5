"""Which of many series need a person first, and why."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Iterator, Mapping, Sequence
from math import erfc, exp, inf, nan, sqrt
from typing import TYPE_CHECKING, Protocol

import numpy as np
import pandas as pd

from preflight_magic.kernels.false_discovery import adjusted
from preflight_magic.ladder import DECIDING
from preflight_magic.model import CheckError, Difference, Finding, HypothesisTest, RemoveShift

if TYPE_CHECKING:
    from preflight_magic.plan.plan import Plan
    from preflight_magic.series_report import SeriesReport

KINDS = ("infeasible", "changed", "inconclusive", "contradicted", "noted")
"""Reasons to look, the most urgent first."""
TESTED = ("halves", "residuals")
"""Rungs whose notes are tests of one null hypothesis each, so that some reject by chance where there are many."""

_FAR = 3.0
"""Logarithm of the odds beyond which the next plan is not worth a word: 20 to 1, strong by Kass and Raftery (1995)."""

Reason = tuple[str, str]
"""Kind and sentence."""


class Earlier(Protocol):
    """A report of the same series from before: made in this process, or loaded."""

    @property
    def names(self) -> Sequence[Hashable]:
        """Names of the series."""

    def __getitem__(self, name: Hashable) -> SeriesReport: ...


def attention(
    reports: Iterable[SeriesReport], earlier: Earlier | None = None, false_alarms: float = 0.05
) -> pd.DataFrame:
    """List the series that need a person, those that need one most first.

    Parameters
    ----------
    reports : iterable of SeriesReport
    earlier : Report, optional
        Plans that differ from those of this report are listed.
    false_alarms : float
        Share of the alarms of each test, over all series, that may be false (Benjamini and Hochberg 1995).

    Returns
    -------
    DataFrame
        Indexed by series; `why`, one of `KINDS`, the most urgent where there are several, and `reason`, a sentence
        for each. Series without a reason are left out.

    Raises
    ------
    CheckError
        For a share that is none.
    """
    if not 0.0 < false_alarms < 1.0:
        raise CheckError(f"false_alarms is {false_alarms!r}; give a share between 0 and 1, such as 0.05.")
    every = list(reports)
    known = set(earlier.names) if earlier is not None else set()
    alarms = _alarms(every, false_alarms)
    rows = []
    for place, (one, tested) in enumerate(zip(every, alarms, strict=True)):
        before = earlier[one.name] if earlier is not None and one.name in known else None
        reasons = sorted((*_reasons(one, before), *tested), key=lambda reason: KINDS.index(reason[0]))
        if reasons:
            rows.append((KINDS.index(reasons[0][0]), place, reasons))
    rows.sort(key=lambda row: row[:2])
    index = pd.Index([every[place].name for _, place, _ in rows], name="series", tupleize_cols=False)
    found = {"why": [KINDS[kind] for kind, _, _ in rows], "reason": [_text(reasons) for _, _, reasons in rows]}
    return pd.DataFrame(found, index=index, dtype="string")


def _text(reasons: Sequence[Reason]) -> str:
    return " ".join(text for _, text in reasons)


# ------------------------------------------------------------------------------------------------ without any test
def _reasons(one: SeriesReport, before: SeriesReport | None) -> Iterator[Reason]:
    """Reasons that hang on this series alone."""
    if before is not None and (change := _change(before, one)):
        yield "changed", change
    if one.problem is not None:
        yield "infeasible", one.problem
        return
    unclear = {name: finding for name, finding in one.findings.items() if finding.verdict == "inconclusive"}
    doubts = [name for name in unclear if name in DECIDING]
    if doubts:
        yield "inconclusive", f"Too even to call: {', '.join(doubts)}{_runner_up(one, doubts)}."
    values = one.findings.get("values")
    alone = values.measures.get("outliers_at") if values else None
    if isinstance(alone, tuple) and alone:
        more = f" and {len(alone) - 3} more" if len(alone) > 3 else ""
        yield "noted", f"Values that stand alone: {', '.join(alone[:3])}{more}."
    for name, finding in unclear.items():
        if name not in DECIDING and not (name in TESTED and _tested(finding)):
            yield "noted", f"{name}: {finding.headline}."


def _tested(finding: Finding) -> bool:
    return finding.headline != "not examined"


def _change(before: SeriesReport, now: SeriesReport) -> str:
    was, now_is = (_plan_text(one.problem, one.plan) for one in (before, now))
    return "" if was == now_is else f"It was {was} and is {now_is}."


def _plan_text(problem: str | None, plan: Plan) -> str:
    return "infeasible" if problem is not None else f"'{plan}'"


def _runner_up(one: SeriesReport, doubts: Sequence[str]) -> str:
    """The plan that comes next, and how far behind it is; plans with and without a log are not compared there."""
    others = [(text, below) for text, below, _ in one.alternatives if text != str(one.plan)]
    if not others or others[0][1] > _FAR or not set(doubts) - {"calendar length", "spread"}:
        return ""
    text, below = others[0]
    return f"; beside '{one.plan}' stands '{text}', at odds of {exp(below):.1f} to 1"


# ----------------------------------------------------------------------------------------------- tests of one kind
def _alarms(every: Sequence[SeriesReport], share: float) -> list[list[Reason]]:
    """What each test says that still stands when all series are asked at once."""
    found: list[list[Reason]] = [[] for _ in every]
    for kind, sentence, p_of in _FAMILIES:
        p_values = np.array([nan if one.problem is not None else p_of(one) for one in every])
        asked = int(np.isfinite(p_values).sum())
        with np.errstate(invalid="ignore"):
            rejected = np.flatnonzero(adjusted(p_values) <= share)
        for place in rejected:
            p = p_values[place]
            size = "p < 0.0001" if p < 0.0001 else f"p {p:.4f}"
            among = f"; held over {asked} series, Benjamini and Hochberg 1995" if asked > 1 else ""
            found[int(place)].append((kind, f"{sentence} ({size}{among})."))
    return found


def _level_test(one: SeriesReport, name: str) -> float:
    """p-value of a test of the series before ordinary differences, with a line; a bound from below rejects nothing."""
    finding = one.findings.get("unit root")
    for test in finding.tests if finding else ():
        if test.test == name and test.terms == "ct" and "once" not in str(test.options.get("series")):
            return 1.0 if test.p_bound == "at least" else test.p_value
    return nan


def _stationary(one: SeriesReport) -> float:
    """KPSS, unless the plan explains why it rejects: it sees the series with its jump."""
    explained = any(step == Difference(1) or isinstance(step, RemoveShift) for step in one.plan.steps)
    return nan if explained else _level_test(one, "KPSS")


def _unit_root(one: SeriesReport) -> float:
    return _level_test(one, "ADF") if Difference(1) in one.plan.steps else nan


def _smallest(p_values: Iterable[float]) -> float:
    """One p-value of several that ask the same question (Bonferroni)."""
    there = [p for p in p_values if not np.isnan(p)]
    return min(1.0, len(there) * min(there)) if there else nan


def _correlation(one: SeriesReport) -> float:
    tests = _by_name(one.findings.get("residuals"))
    exact = next((found for name, found in tests.items() if name.startswith("portmanteau")), None)
    return _smallest(test.p_value for test in exact or tests.get("Ljung-Box", []))


def _arch(one: SeriesReport) -> float:
    return _smallest(test.p_value for test in _by_name(one.findings.get("residuals")).get("ARCH-LM", []))


def _by_name(finding: Finding | None) -> Mapping[str, list[HypothesisTest]]:
    found: dict[str, list[HypothesisTest]] = {}
    for test in finding.tests if finding else ():
        found.setdefault(test.test, []).append(test)
    return found


def _halves(one: SeriesReport) -> float:
    finding = one.findings.get("halves")
    moments = finding.measures.get("moments", ()) if finding else ()
    sizes = [abs(getattr(moment, "z", inf)) for moment in moments] if isinstance(moments, tuple) else []
    return _smallest(erfc(z / sqrt(2.0)) for z in sizes if np.isfinite(z))


_FAMILIES: tuple[tuple[str, str, Callable[[SeriesReport], float]], ...] = (
    ("contradicted", "KPSS rejects stationarity, and the plan takes no ordinary difference", _stationary),
    ("contradicted", "ADF rejects a unit root, and the plan takes an ordinary difference", _unit_root),
    ("noted", "Correlation is left after the plan and an ARMA model", _correlation),
    ("noted", "The spread of the innovations changes", _arch),
    ("noted", "The two halves differ after the plan", _halves),
)
"""Kind, sentence and p-value of each test that is asked of every series."""
