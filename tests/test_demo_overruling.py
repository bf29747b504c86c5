"""The notebook of overruling shows what its words say."""

from __future__ import annotations

import html as escapes
import re

import pytest
from nbformat import NotebookNode

from tests import demo_notebook
from tests.demo_notebook import html, text


@pytest.fixture(scope="module")
def fresh() -> NotebookNode:
    return demo_notebook.fresh("overruling")


def rows(notebook: NotebookNode, name: str) -> list[list[str]]:
    """Cells of a table, those of its index too."""
    lines = re.findall(r"<tr[^>]*>(.*?)</tr>", html(notebook, name), flags=re.DOTALL)
    return [[escapes.unescape(one) for one in re.findall(r"<t[hd][^>]*>(.*?)</t[hd]>", line)] for line in lines]


def test_one_difference_too_many_leaves_a_root_at_one(fresh: NotebookNode) -> None:
    told = " ".join(text(fresh, "overtime").split())
    assert "Your plan is 'difference 1'; the recommendation is 'as given'." in told
    assert "as given: stationary" in told
    period = re.search(r"a cycle of (\d+\.\d+) steps", told)
    assert period is not None
    assert 7.5 < float(period[1]) < 9.0
    assert re.search(r"difference 1: over-differenced.* The largest MA root is (1\.000|0\.99\d)", told)


def test_the_card_is_that_of_the_chosen_plan_with_a_picture(fresh: NotebookNode) -> None:
    assert "Plan: as given → difference 1 (put in)" in text(fresh, "card")
    assert "Roots of what remains" in html(fresh, "card")
    assert re.search(r'<img src="data:image/png;base64,[^"]{9000,}" alt="[^"]+"', html(fresh, "card"))


def test_the_interval_of_the_fuel_price_holds_one_and_a_return_within_a_year(fresh: NotebookNode) -> None:
    assert "one more difference may be needed" in " ".join(text(fresh, "fuel").split())
    (row,) = [one for one in rows(fresh, "fuel") if "AR sum" in one]
    modulus, lower, upper, _, shortest = (float(one) for one in row[3:])
    assert lower < modulus < 1.0 <= upper
    assert shortest < 12.0


def test_each_choice_costs_what_the_words_say(fresh: NotebookNode) -> None:
    found = [one[-4:] for one in rows(fresh, "cost")[2:]]
    odds = [one[0] for one in found]
    median, width = ([float(one[place].replace(",", "")) for one in found] for place in (-2, -1))
    assert len(found) == 7
    assert odds[0] == odds[2] == odds[4] == "1"
    assert odds[5] == odds[6] == "over 1,000"
    assert width[0] < width[1] < 1.05 * width[0]
    assert median[1] < median[0]
    assert width[3] < width[2]
    assert width[6] > 1.5 * width[4]


def test_the_past_leans_to_the_other_plan_within_chance(fresh: NotebookNode) -> None:
    fuel = " ".join(text(fresh, "proof").split("crew_overtime")[0].split())
    p = re.search(r"Without 'difference 1' the error is \d+ % smaller \(12 origins, p = (0\.\d+)\)", fuel)
    assert p is not None
    assert float(p[1]) > 0.05
