"""The one sentence about a series, and the note of its row in the overview."""

from __future__ import annotations

from collections.abc import Mapping

from preflight_magic.ladder import DECIDING
from preflight_magic.model import Finding, Verdict
from preflight_magic.plan.plan import Plan


def answer_of(
    verdict: Verdict, plan: Plan, recommended: Plan, findings: Mapping[str, Finding], problem: str | None
) -> str:
    """Say in one sentence what is to be done with a series.

    Parameters
    ----------
    verdict : Verdict
    plan, recommended : Plan
        The plan that was examined, and the one that the rungs propose.
    findings : Mapping from rung name to Finding
    problem : str or None
        Why the series cannot be checked.

    Returns
    -------
    str
    """
    if problem is not None:
        return problem
    if plan != recommended:
        return f"Your plan is {_quoted(plan)}; the recommendation is {_quoted(recommended)}."
    text = f"Before a model is fitted: {plan}." if plan else "Use the series as given: no transform is called for."
    if verdict != "inconclusive":
        return text
    doubts = [name for name in DECIDING if name in findings and findings[name].verdict == "inconclusive"]
    return f"{text} The evidence on {_and(doubts)} is too even to call, so a person decides."


def note_of(findings: Mapping[str, Finding]) -> str:
    """Say what a person should look at first in a series; empty where there is nothing.

    Parameters
    ----------
    findings : Mapping from rung name to Finding

    Returns
    -------
    str
        Headlines of the rungs that are inconclusive, those that decide first.
    """
    notes = [
        f"{name}: {finding.headline}, too even to call" if name in DECIDING else f"{name}: {finding.headline}"
        for name, finding in findings.items()
        if finding.verdict == "inconclusive"
    ]
    return "; ".join(notes)


def _quoted(plan: Plan) -> str:
    return f"'{plan}'"


def _and(names: list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
