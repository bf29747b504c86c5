"""What changed since an earlier report, as a short table: plans that stand on unrevised data are only counted."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.markup import Markup, el, join
from preflight_magic.present.text import columns, text_width, wrap

if TYPE_CHECKING:
    import pandas as pd

MOST_ROWS = 60
_OF_SEVERAL = {"stands": "stand"}
_HEADS = ("series", "status", "plan to use", "what was seen")


def changes_text(changes: pd.DataFrame, width: int | None = None) -> str:
    """Changes as aligned text.

    Parameters
    ----------
    changes : DataFrame
        From ``report.against(earlier)``.
    width : int, optional
        Columns; by default those of the terminal.
    """
    width = text_width() if width is None else width
    lines = wrap(summary(changes), width)
    rows, more = _rows(changes)
    if rows:
        name = min(max(6, *(words.width_of(row[0]) for row in rows)), max(8, width // 4))
        rest = width - name - 10 - 6
        cells = [(words.fit(row[0], name).rstrip(), *row[1:]) for row in rows]
        lines += columns([_HEADS, *cells], [name, 10, rest * 2 // 5, rest - rest * 2 // 5])
    return "\n".join([*lines, *([more] if more else [])])


def changes_html(changes: pd.DataFrame) -> Markup:
    """Changes as a table; every text is escaped."""
    from preflight_magic.present.html import style

    rows, more = _rows(changes)
    body = [el("tr", el("th", row[0], scope="row"), *(el("td", cell) for cell in row[1:])) for row in rows]
    heads = el("thead", el("tr", *(el("th", head, scope="col") for head in _HEADS)))
    table = el("table", heads, el("tbody", body), class_="pfm-table") if rows else None
    parts = el("p", summary(changes), class_="pfm-summary"), table, el("p", more, class_="pfm-faint") if more else None
    return join([style(), el("div", *parts, class_="pfm pfm-changes")])


def summary(changes: pd.DataFrame) -> str:
    """How many plans stand, and what became of the others, in a sentence."""
    counts = Counter(changes["status"].tolist()).items()
    if all(status == "stands" for status, _ in counts):
        return f"Against the earlier report: {'the plan stands' if len(changes) == 1 else 'all plans stand'}."
    told = [f"{count:,} {_OF_SEVERAL.get(status, status) if count > 1 else status}" for status, count in counts]
    return f"Against the earlier report: {', '.join(told)}."


def _rows(changes: pd.DataFrame) -> tuple[list[tuple[str, str, str, str]], str]:
    """Rows that say more than that a plan stands, and how many are left out."""
    seen = [
        (name, row)
        for name, (_, row) in zip(changes.index.tolist(), changes.iterrows(), strict=True)
        if row["status"] != "stands"
        or (row["verdict_now"] != "infeasible" and isinstance(row["note"], str) and row["note"])
    ]
    rows = [
        (words.name_text(name, 40), str(row["status"]), _told(row["plan"]), words.sentence(_told(row["note"])))
        for name, row in seen[:MOST_ROWS]
    ]
    left = len(seen) - len(rows)
    return rows, f"and {left:,} more; report.changes holds them all" if left else ""


def _told(value: object) -> str:
    return words.plain(value) if isinstance(value, str) and value else words.NONE
