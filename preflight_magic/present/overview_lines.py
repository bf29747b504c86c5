"""Which series an overview shows, and in which order: plain functions on plain lines."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, cast

import pandas as pd

from preflight_magic.model import Verdict
from preflight_magic.present import words

if TYPE_CHECKING:
    from preflight_magic.present.contract import ReportView


@dataclass(frozen=True)
class Line:
    """A series as it is sorted and searched; `position` is its place in the report."""

    position: int
    name: str
    verdict: Verdict
    plan: str
    note: str


def read_lines(report: ReportView) -> tuple[Line, ...]:
    """All series of a report, from its overview alone."""
    frame, names = report.overview, report.names
    columns = ([str(v) for v in frame["verdict"]], _texts(frame["plan"]), _texts(frame["note"]))
    return tuple(
        Line(position, words.name_text(name), cast(Verdict, verdict), plan or words.NONE, note)
        for position, (name, verdict, plan, note) in enumerate(zip(names, *columns, strict=True))
    )


def _texts(column: pd.Series) -> list[str]:
    return ["" if missing else words.plain(str(text)) for text, missing in zip(column, column.isna(), strict=True)]


def urgency(line: Line) -> int:
    """How soon a person should look, the smallest first.

    What waits for a decision; what cannot be checked; plans with a note; plans without; nothing to do.
    """
    if line.verdict in ("inconclusive", "infeasible"):
        return 0 if line.verdict == "inconclusive" else 1
    return 2 if line.note else 3 if line.verdict == "transform" else 4


def _natural(text: str) -> tuple[tuple[bool, int, str], ...]:
    """Key that sorts ``berth 2`` before ``berth 10``."""
    pieces = re.split(r"([0-9]+)", text.casefold())
    return tuple((piece.isdecimal(), int(piece) if piece.isdecimal() else 0, piece) for piece in pieces)


ORDERS: Mapping[str, Callable[[Line], object]] = {
    "what needs a person first": urgency,
    "as in the table": lambda line: line.position,
    "by name": lambda line: _natural(line.name),
    "by plan": lambda line: (line.plan == words.NONE, line.plan),
}
"""Orders by the words in which they are offered; the first is taken where none is chosen."""
FIRST_ORDER = next(iter(ORDERS))


def choose(
    lines: Sequence[Line], order: str = FIRST_ORDER, verdict: Verdict | None = None, part: str = ""
) -> list[int]:
    """Positions of the series that are asked for.

    Parameters
    ----------
    lines : sequence of Line
    order : str
        One of `ORDERS`; what is equal keeps the order of the table.
    verdict : str, optional
        This verdict only.
    part : str
        Part of the name, small and capital letters alike.
    """
    wanted = words.plain(part).casefold()
    kept = [line for line in lines if (verdict is None or line.verdict == verdict) and wanted in line.name.casefold()]
    return [line.position for line in sorted(kept, key=ORDERS[order])]  # type: ignore[arg-type]


def counts(lines: Sequence[Line]) -> tuple[tuple[Verdict, int], ...]:
    """Verdicts that occur, and how often."""
    seen = [line.verdict for line in lines]
    return tuple((verdict, seen.count(verdict)) for verdict in words.SHAPES if verdict in seen)
