"""Shares of the evidence, counted and told."""

from __future__ import annotations

from types import SimpleNamespace

import pytest

from preflight_magic.model import HypothesisTest
from preflight_magic.rungs.shares import capital, p_text, per_cent, shares, told
from tests.sentences import assert_reads_well


def comparison(*pairs):
    """What `shares` reads of a comparison: pairs of a plan and its weight, the best plan first."""
    candidates, weights = zip(*pairs, strict=True)
    return SimpleNamespace(candidates=candidates, weights=weights)


def candidate(d, *, trend=False):
    return SimpleNamespace(d=d, trend=trend)


def test_shares_are_summed_and_the_leading_plan_answers_first():
    found = shares(
        comparison((candidate(1), 0.4), (candidate(0), 0.35), (candidate(0, trend=True), 0.25)), lambda one: one.d
    )
    assert list(found) == [1, 0]
    assert found == pytest.approx({1: 0.4, 0: 0.6})


@pytest.mark.parametrize(
    ("share", "text"),
    [
        (0.0, "under 1 %"),
        (0.0099, "under 1 %"),
        (0.01, "1 %"),
        (0.5, "50 %"),
        (0.704, "70 %"),
        (0.99, "99 %"),
        (0.9901, "over 99 %"),
        (1.0, "over 99 %"),
    ],
)
def test_per_cent(share, text):
    assert per_cent(share) == text


@pytest.mark.parametrize(
    ("found", "text"),
    [
        ({"a": 1.0}, "Over 99 % of the evidence is for A."),
        ({"a": 0.92, "b": 0.08}, "92 % of the evidence is for A, 8 % for B."),
        ({"b": 0.5, "a": 0.2, "c": 0.3}, "50 % of the evidence is for B, 30 % for C."),
        ({"a": 0.999, "c": 0.001}, "Over 99 % of the evidence is for A, under 1 % for C."),
    ],
)
def test_told(found, text):
    assert told(found, {"a": "A", "b": "B", "c": "C"}) == text
    assert_reads_well(told(found, {"a": "A", "b": "B", "c": "C"}))


def test_capital_leaves_the_rest_alone():
    assert capital("an ARMA(1,1) of Box") == "An ARMA(1,1) of Box"
    assert capital("") == ""


@pytest.mark.parametrize(
    ("p", "bound", "said"),
    [
        (0.0324, "exact", "p = 0.032"),
        (0.0004, "exact", "p < 0.001"),
        (0.0004, "at most", "p < 0.001"),
        (0.01, "at most", "p at most 0.010"),
        (0.1, "at least", "p at least 0.100"),
    ],
)
def test_a_p_value_in_a_sentence(p, bound, said):
    assert p_text(HypothesisTest("KPSS", "stationary", 1.0, p, bound, 100, 3, "c")) == said
