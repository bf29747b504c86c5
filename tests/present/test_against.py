"""The table of changes as text and as HTML."""

from __future__ import annotations

import pandas as pd
import pytest

from preflight_magic.against import COLUMNS
from preflight_magic.present.against import MOST_ROWS, changes_html, changes_text


def changes(*rows: tuple[object, str, str, str]) -> pd.DataFrame:
    told = [{"status": status, "plan": plan, "note": note} for _, status, plan, note in rows]
    index = pd.Index([row[0] for row in rows], tupleize_cols=False, dtype=object)
    return pd.DataFrame(told, index=index, columns=list(COLUMNS))


def test_plans_that_stand_are_only_counted() -> None:
    table = changes(("a", "stands", "log", ""), ("b", "stands", "log", ""))
    assert changes_text(table) == "Against the earlier report: all plans stand."
    assert "<table" not in changes_html(table)
    assert changes_text(table.iloc[:1]) == "Against the earlier report: the plan stands."


def test_what_was_and_is_infeasible_is_only_counted() -> None:
    table = changes(("flag", "stands", "", "text."), ("walk", "stands", "log", "The data now lean."))
    table["verdict_now"] = ["infeasible", "transform"]
    assert "flag" not in changes_text(table)
    assert "walk" in changes_text(table)


def test_others_are_told() -> None:
    table = changes(("calm", "stands", "log", ""), ("jump", "changed", "difference 1", "since 2020-03."),
                    ("lean", "stands", "as given", "The data now lean."))  # fmt: skip
    text = changes_text(table, 100)
    assert text.startswith("Against the earlier report: 2 stand, 1 changed.")
    assert "calm" not in text
    assert text.splitlines()[2].split() == ["jump", "changed", "difference", "1", "Since", "2020-03."]
    assert "The data now lean." in text
    assert changes_html(table).count("<tr>") == 3


@pytest.mark.parametrize("width", [40, 60, 100])
def test_text_stays_within_its_width(width: int) -> None:
    table = changes(("a" * 90, "changed", "log, difference 12, difference 1", "A long sentence. " * 9))
    assert max(len(line) for line in changes_text(table, width).splitlines()) <= width


def test_everything_is_escaped() -> None:
    nasty = "<img src=x onerror=alert(1)>\n\u202e"
    page = changes_html(changes((nasty, "changed", nasty, nasty), (("a", nasty), "gone", nasty, nasty)))
    assert "<img" not in page
    assert "\u202e" not in page
    assert page.count("&lt;img") >= 5


def test_very_many_are_cut() -> None:
    table = changes(*((f"s{i}", "new", "log", "x") for i in range(MOST_ROWS + 5)))
    assert changes_text(table).endswith("and 5 more; report.changes holds them all")
    assert changes_html(table).count("<tr>") == MOST_ROWS + 1
