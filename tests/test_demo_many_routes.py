"""The notebook of many routes shows what its words say."""

from __future__ import annotations

import re

import pytest
from nbformat import NotebookNode

from tests import demo_notebook
from tests.demo_notebook import text

pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def fresh() -> NotebookNode:
    return demo_notebook.fresh("many_routes")


def numbers(notebook: NotebookNode, name: str, head: str) -> list[str]:
    """What stands behind the head of a line."""
    return [line.removeprefix(head).strip() for line in text(notebook, name).splitlines() if line.startswith(head)]


def test_the_usual_plan_of_each_book_is_the_one_it_was_made_with(fresh: NotebookNode) -> None:
    # Columns of a table are printed in two parts: berth power and overtime, then passengers.
    usual = {"remove pattern 12": 0, "as given": 1, "log, difference 12, difference 1": 2}
    found = 0
    for plan, column in usual.items():
        counts = [int(one) for part in numbers(fresh, "check", f"{plan}  ") for one in part.split()]
        assert len(counts) == 3
        assert counts[column] == max(counts) >= 60
        found += counts[column]
    # "here a dozen of 210 differ", beside the three that an accident changed
    assert 10 <= 210 - found - 2 <= 15


def test_attention_begins_with_what_cannot_be_checked(fresh: NotebookNode) -> None:
    counts = dict(line.split() for line in text(fresh, "attention").splitlines()[1:4])
    assert counts["infeasible"] == "1"
    assert 20 <= int(counts["inconclusive"]) <= 40
    rows = re.findall(r"^(\w+ \d\d) +(\w+)", text(fresh, "attention"), flags=re.MULTILINE)
    assert rows[0] == ("passengers 07", "infeasible")
    assert ("crew_overtime 12", "inconclusive") in rows
    assert "pd.to_numeric(frame['passengers 07'], errors='coerce')" in text(fresh, "attention")


def test_the_lists_find_the_accidents(fresh: NotebookNode) -> None:
    told = text(fresh, "lists")
    assert "berth_power 23: 96 values, none missing, 1 isolated outlier" in told
    assert told.count("isolated outlier") == 1
    assert re.search(r"crew_overtime 31 +transform +remove shift from 2018-01", told)
    assert re.search(r"berth_power 34 +inconclusive +remove shift from 2015-01", told)


def test_what_was_mended_has_the_plan_of_its_kind(fresh: NotebookNode) -> None:
    told = text(fresh, "mend")
    assert re.search(r"passengers 07 .*log, difference 12, difference 1 +95 +1", told)
    assert re.search(r"berth_power 23 +transform +remove pattern 12 +96 +0", told)


def test_one_plan_costs_little(fresh: NotebookNode) -> None:
    assert numbers(fresh, "group", "log, difference 12, difference 1") == ["70"]
    odds = [float(one) for one in re.findall(r"^passengers \d\d +([\d.]+)$", text(fresh, "group"), flags=re.MULTILINE)]
    assert 3 <= len(odds) <= 12
    assert 1.0 <= max(odds) < 20.0


def test_the_file_grows_by_what_is_new(fresh: NotebookNode) -> None:
    assert numbers(fresh, "file", "rows written:") == ["12", "0", "3"]
