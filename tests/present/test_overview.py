"""Which series an overview shows, in which order, and what a row says."""

from typing import Any

import numpy as np
import pytest

from preflight_magic.model import Difference, Verdict
from preflight_magic.plan.plan import Plan
from preflight_magic.present import make_overview, text
from preflight_magic.present.overview_html import overview
from preflight_magic.present.overview_lines import Line, choose, counts, read_lines
from tests.present.fakes import FakeReport, FakeSeries


def line(position: int, name: str, verdict: Verdict, plan: str = "as given", note: str = "") -> Line:
    return Line(position, name, verdict, plan, note)


LINES = (
    line(0, "berth 10", "clear"),
    line(1, "berth 2", "transform", "log"),
    line(2, "Fuel", "inconclusive", "difference 1", "unit root: one difference, too even to call"),
    line(3, "freight", "transform", "log", "residuals: correlation left"),
    line(4, "closed", "infeasible", "–", "column 'closed': one value only."),
    line(5, "crew", "clear", note="halves: variance differs"),
)


def test_what_needs_a_person_comes_first() -> None:
    assert choose(LINES) == [2, 4, 3, 5, 1, 0]


@pytest.mark.parametrize(
    ("asked", "positions"),
    [
        ({"order": "as in the table"}, [0, 1, 2, 3, 4, 5]),
        ({"order": "by name"}, [1, 0, 4, 5, 3, 2]),
        ({"order": "by plan"}, [0, 5, 2, 1, 3, 4]),
        ({"verdict": "transform"}, [3, 1]),
        ({"part": " FUEL"}, [2]),
        ({"part": "berth", "order": "by name"}, [1, 0]),
        ({"part": "f", "verdict": "transform"}, [3]),
        ({"part": "nowhere"}, []),
    ],
)
def test_order_verdict_and_name(asked: dict[str, Any], positions: list[int]) -> None:
    assert choose(LINES, **asked) == positions


def test_verdicts_are_counted() -> None:
    assert counts(LINES) == (("clear", 2), ("transform", 2), ("inconclusive", 1), ("infeasible", 1))


def test_rows_of_a_report() -> None:
    one, two = FakeSeries(), FakeSeries(name=("a", 1), verdict="infeasible", problem="No values.", plan=Plan())
    three = FakeSeries(name="calm", verdict="clear", plan=Plan(), recommended=Plan())
    report = FakeReport(one, two, three)
    assert [(found.name, found.note) for found in read_lines(report)] == [
        ("passengers", ""),
        ("a / 1", "No values."),
        ("calm", ""),
    ]
    card = make_overview.overview(report)
    assert card.counts == (("clear", 1), ("transform", 1), ("infeasible", 1))
    assert [row.name for row in card.rows] == [("a", 1), "passengers", "calm"]
    assert [row.position for row in card.rows] == [1, 0, 2]
    assert [row.plan for row in card.rows] == ["–", "log, difference 12, difference 1", "as given"]
    assert np.array_equal(card.rows[1].values, one.series.to_numpy(), equal_nan=True)
    after = card.rows[1].after
    assert after is not None
    assert np.isnan(after[:13]).all(), "the small picture after the plan keeps the time of the one before"
    assert [row.after is None for row in card.rows] == [True, False, True]
    assert card.part == "Order: what needs a person first."


def test_no_more_rows_than_anyone_reads() -> None:
    report = FakeReport(*(FakeSeries(name=i) for i in range(100)))
    card = make_overview.overview(report)
    assert len(card.rows) == 60
    assert card.part == "1 to 60 of 100, what needs a person first. All of them: report.overview."
    assert len(make_overview.overview(report, limit=None).rows) == 100
    page = make_overview.page_of(report, read_lines(report), range(100), 75, 50, "as in the table")
    assert [row.name for row in page.rows] == list(range(75, 100))
    assert page.part == "76 to 100 of 100, as in the table."
    assert page.part in text.overview_text(page)


def test_names_open_cards_only_where_there_is_a_selector() -> None:
    card = make_overview.overview(FakeReport(FakeSeries(), FakeSeries(name="fuel").leave_out(Difference(12))))
    assert "<button" not in overview(card)
    live = overview(card, key="pfm-shown-7")
    assert live.count(' hidden="hidden"') == live.count("<button") == 2
    assert ".pfm-shown-7 select" in live
    assert overview(card, linked=True).count('href="#pfm-series-') == 2


def test_no_row_says_so() -> None:
    report = FakeReport(FakeSeries(), FakeSeries(name="fuel"))
    assert "No series is like that" in overview(make_overview.page_of(report, read_lines(report), [], 0, 25))
