"""The one sentence about a series, and the note of its row in the overview."""

from __future__ import annotations

from collections.abc import Mapping

from preflight_magic.ladder import DECIDING, needs_another_road
from preflight_magic.model import Difference, Finding, Verdict
from preflight_magic.plan.plan import Plan
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.shares import per_cent

_CHOSEN = {
    "kept": "The earlier plan {plan} is kept: the data now lean to {recommended}, but not clearly.",
    "group": "The plan of the group is {plan}; alone the recommendation is {recommended}.",
}


def answer_of(
    verdict: Verdict,
    plan: Plan,
    recommended: Plan,
    findings: Mapping[str, Finding],
    problem: str | None,
    chosen: str = "person",
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
    chosen : str
        Where a plan that is not the recommended one comes from.

    Returns
    -------
    str
    """
    if problem is not None:
        return problem
    if plan != recommended:
        text = _CHOSEN.get(chosen, "Your plan is {plan}; the recommendation is {recommended}.")
        return text.format(plan=_quoted(plan), recommended=_quoted(recommended))
    text = f"Before a model is fitted: {plan}." if plan else "Use the series as given: no transform is called for."
    if not plan and needs_another_road(findings, Thresholds()):
        text = "Demand comes now and then: use a method of its own or sums over longer periods, not an ARMA plan."
    if verdict != "inconclusive":
        return text
    doubts = [name for name in DECIDING if name in findings and findings[name].verdict == "inconclusive"]
    return f"{text} The evidence on {_and(doubts)} is too even to call, so a person decides."


def note_of(findings: Mapping[str, Finding], near_share: float = Thresholds.near_share) -> str:
    """Say what a person should look at first in a series; empty where there is nothing.

    Parameters
    ----------
    findings : Mapping from rung name to Finding
    near_share : float
        Share of the evidence for one difference less from which a root is called near one.

    Returns
    -------
    str
        Headlines of the rungs that are inconclusive, in the order of the ladder. What a person has to know of the
        decision is said in fixed words: ``too even to call``, ``near-unit root``, ``over-differenced``, ``too short``.
    """
    notes = []
    for name, finding in findings.items():
        if finding.verdict == "inconclusive":
            notes.append(f"{name}: {finding.headline}{_even(name, finding)}")
        elif name == "unit root" and (near := _near_one(finding, near_share)):
            notes.append(f"{name}: near-unit root, {near} of the evidence is for one difference less")
    return "; ".join(notes)


def _even(name: str, finding: Finding) -> str:
    """What is said of a rung that decides and cannot."""
    if name not in DECIDING or finding.headline == "not examined":
        return ""
    return ", near-unit root, too even to call" if name == "unit root" else ", too even to call"


def _near_one(finding: Finding, bound: float) -> str:
    """Share of the evidence for one difference less than is taken, where it is notable."""
    split = finding.measures.get("d_shares")
    taken = sum(isinstance(step, Difference) for step in finding.steps)
    share = split.get(taken - 1, 0.0) if taken and isinstance(split, Mapping) else 0.0
    return per_cent(share) if share >= bound else ""


def _quoted(plan: Plan) -> str:
    return f"'{plan}'"


def _and(names: list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
