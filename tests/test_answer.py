"""The one sentence about a series, and its note."""

from __future__ import annotations

import pytest

from preflight_magic.answer import answer_of, note_of
from preflight_magic.model import Difference, Finding, Log, RemovePattern
from preflight_magic.plan.plan import Plan
from tests.sentences import assert_reads_well

ONE = Plan((), (Difference(1),))
TWO = Plan((), (Log(), Difference(12)))


def findings(*doubts, **others):
    names = ["values", "spread", "shift and trend", "season", "unit root", "roots"]
    return {
        name: Finding(name, "?", "inconclusive" if name in doubts else "clear", f"headline of {name}", "")
        for name in names
    }


@pytest.mark.parametrize(
    ("verdict", "plan", "recommended", "doubts", "expected"),
    [
        ("clear", Plan(), Plan(), (), "Use the series as given: no transform is called for."),
        ("transform", TWO, TWO, (), "Before a model is fitted: log, difference 12."),
        ("transform", ONE, TWO, (), "Your plan is 'difference 1'; the recommendation is 'log, difference 12'."),
        (
            "inconclusive",
            ONE,
            TWO,
            ("season",),
            "Your plan is 'difference 1'; the recommendation is 'log, difference 12'.",
        ),
        (
            "inconclusive",
            ONE,
            ONE,
            ("unit root",),
            "Before a model is fitted: difference 1. The evidence on unit root is too even to call, so a person "
            "decides.",
        ),
        (
            "inconclusive",
            Plan(),
            Plan(),
            ("spread", "season", "unit root"),
            "Use the series as given: no transform is called for. The evidence on spread, season and unit root is too "
            "even to call, so a person decides.",
        ),
        (
            "inconclusive",
            ONE,
            ONE,
            ("shift and trend", "unit root", "roots"),
            "Before a model is fitted: difference 1. The evidence on shift and trend and unit root is too even to "
            "call, so a person decides.",
        ),
    ],
)
def test_answer(verdict, plan, recommended, doubts, expected):
    text = answer_of(verdict, plan, recommended, findings(*doubts), None)
    assert text == expected
    assert_reads_well(text)


def test_problem_is_the_answer():
    assert answer_of("infeasible", Plan(), Plan(), {}, "column 'x': no values.") == "column 'x': no values."


def test_plan_as_given_by_a_person_reads_well():
    text = answer_of("clear", Plan(), Plan((), (RemovePattern(12),)), {}, None)
    assert text == "Your plan is 'as given'; the recommendation is 'remove pattern 12'."


@pytest.mark.parametrize(
    ("doubts", "expected"),
    [
        ((), ""),
        (("season",), "season: headline of season, too even to call"),
        (("roots",), "roots: headline of roots"),
        (
            ("unit root", "spread", "roots"),
            "spread: headline of spread, too even to call; unit root: headline of unit root, near-unit root, too "
            "even to call; roots: headline of roots",
        ),
    ],
)
def test_note(doubts, expected):
    assert note_of(findings(*doubts)) == expected


def unit_root(verdict, steps, **shares):
    split = {int(d[1:]): share for d, share in shares.items()}
    return {"unit root": Finding("unit root", "?", verdict, "one difference", "", (), {"d_shares": split}, steps)}


@pytest.mark.parametrize(
    ("found", "expected"),
    [
        (unit_root("transform", (Difference(1),), d1=0.9, d0=0.1), ""),
        (
            unit_root("transform", (Difference(1),), d1=0.75, d0=0.25),
            "unit root: near-unit root, 25 % of the evidence is for one difference less",
        ),
        # A second difference that is not taken is no root near one.
        (unit_root("transform", (Difference(1),), d1=0.75, d2=0.25), ""),
        (unit_root("clear", (), d0=0.75, d1=0.25), ""),
        (
            unit_root("inconclusive", (Difference(1),), d1=0.6, d0=0.4),
            "unit root: one difference, near-unit root, too even to call",
        ),
    ],
)
def test_a_root_near_one_is_noted(found, expected):
    assert note_of(found) == expected


def test_what_was_not_examined_is_not_called_even():
    found = {"season": Finding("season", "?", "inconclusive", "not examined", "No plan could be computed.")}
    assert note_of(found) == "season: not examined"
