"""The first notebook shows what its words say."""

from __future__ import annotations

import re

import pytest
from nbformat import NotebookNode

from tests import demo_notebook
from tests.demo_notebook import html, text

PLANS = {
    "passengers": ("transform", "log, difference 12, difference 1"),
    "freight": ("transform", "remove shift from 2019-04"),
    "fuel_price": ("transform", "difference 1"),
    "crew_overtime": ("clear", "as given"),
    "berth_power": ("transform", "remove pattern 12"),
}


@pytest.fixture(scope="module")
def fresh() -> NotebookNode:
    return demo_notebook.fresh("first_check")


@pytest.mark.parametrize("name", PLANS)
def test_the_check_shows_verdict_and_plan(fresh: NotebookNode, name: str) -> None:
    verdict, plan = PLANS[name]
    row = next(line for line in text(fresh, "check").splitlines() if line.startswith(name))
    assert verdict in row
    assert plan in row


def test_the_card_has_a_picture_with_words(fresh: NotebookNode) -> None:
    pictures = re.findall(r'<img src="data:image/png;base64,[^"]{9000,}" alt="([^"]+)"', html(fresh, "check"))
    assert pictures
    assert "132 months from 2013-01 to 2023-12" in pictures[0]


def test_what_is_said_of_fuel_is_what_was_found(fresh: NotebookNode) -> None:
    assert "of the evidence is for one difference" in " ".join(text(fresh, "doubt").split())


def test_leaving_the_log_out_lets_the_spread_grow(fresh: NotebookNode) -> None:
    told = text(fresh, "switch")
    assert "Your plan is 'difference 12, difference 1'" in told
    with_log, without_log = (float(found) for found in re.findall(r"ratio (\d+\.\d+)", told))
    assert with_log < 1.15
    assert without_log > 1.25


def test_the_forecast_beats_last_year(fresh: NotebookNode) -> None:
    forecast, last_year = (int(found) for found in re.findall(r"(\d+)$", text(fresh, "errors"), flags=re.MULTILINE))
    assert 0 < forecast < last_year


def test_the_round_trip_is_exact(fresh: NotebookNode) -> None:
    difference, most = re.fullmatch(r"largest difference: (\S+) of (\d+) passengers\s*", text(fresh, "exact")).groups()  # type: ignore[union-attr]
    assert float(difference) < 1e-12 * int(most)


def test_the_stored_card_is_that_of_a_run(fresh: NotebookNode) -> None:
    def rows(notebook: NotebookNode) -> list[list[str]]:
        lines = [line.split() for line in text(notebook, "check").splitlines()]
        return [line for line in lines if line and line[0] in PLANS]

    assert rows(demo_notebook.stored("first_check")) == rows(fresh)
