"""The notebook of the next month shows what its words say."""

from __future__ import annotations

import ast
import re

import pytest
from nbformat import NotebookNode

from tests import demo_notebook
from tests.demo_notebook import cell, text


@pytest.fixture(scope="module")
def fresh() -> NotebookNode:
    return demo_notebook.fresh("next_month")


def test_a_model_sees_what_the_plan_leaves(fresh: NotebookNode) -> None:
    assert "log, difference 12, difference 1; the first 13 of 132 months are missing" in text(fresh, "load")


def test_the_model_differences_inside(fresh: NotebookNode) -> None:
    source = cell(fresh, "generated").source
    assert re.search(r"order=\(\d, 1, \d\)", source)
    assert re.search(r"seasonal_order=\(\d, 1, \d, 12\)", source)


def test_the_mean_lies_a_little_above_the_median_and_both_near_the_year(fresh: NotebookNode) -> None:
    told = text(fresh, "year")
    sums = ast.literal_eval(re.search(r"Sum of the year: (\{.*\})", told)[1])  # type: ignore[index]
    assert sums["median"] < sums["mean"] < 1.005 * sums["median"]
    assert abs(sums["mean"] / sums["carried"] - 1.0) < 0.01
    months = [line.split() for line in told.splitlines() if line.startswith("2024-")]
    assert len(months) == 12
    for _, median, mean, lower, upper, yardstick, _ in months:
        assert int(lower) < int(median) < int(mean) < int(upper)
        assert abs(int(yardstick) / int(median) - 1.0) < 0.01


def test_nothing_moved_in_january(fresh: NotebookNode) -> None:
    told = text(fresh, "record")
    assert "of the evidence is for one difference" in told
    assert len(re.findall(r" stands .* longer$", told, flags=re.MULTILINE)) == 5


def test_the_new_berth_changes_the_plan_nine_months_later(fresh: NotebookNode) -> None:
    told = text(fresh, "change")
    status = re.findall(r"^(2019-\d\d) +(stands|changed) ", told, flags=re.MULTILINE)
    assert status == [("2019-06", "stands"), ("2019-09", "stands"), ("2019-11", "stands"), ("2019-12", "changed")]
    assert "in the record now: remove shift from 2019-04" in told


def test_the_exit_status_tells_what_happened(fresh: NotebookNode) -> None:
    told = re.findall(r"--- (2019-\d\d): exit status (\d)", text(fresh, "script"))
    assert told == [("2019-03", "0"), ("2019-04", "0"), ("2019-12", "3")]
    assert "1 changed, 1 stands" in text(fresh, "script")
