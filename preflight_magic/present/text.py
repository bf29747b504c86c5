"""Cards as aligned text, for terminals and for every host that shows no HTML."""

from __future__ import annotations

import shutil
from collections.abc import Sequence
from typing import TYPE_CHECKING

from preflight_magic.present import words

if TYPE_CHECKING:
    from preflight_magic.present.cards import Card, OverviewCard, RungCard, StepMark, TestRow

ARROW = " \u2192 "


def text_width() -> int:
    """Columns of the terminal, at most 100; 80 where there is none."""
    return max(40, min(100, shutil.get_terminal_size((80, 24)).columns))


def wrap(text: str, width: int, first: str = "", rest: str | None = None) -> list[str]:
    """Lines of at most `width` columns; `first` stands before the first line and `rest` before the others."""
    rest = " " * words.width_of(first) if rest is None else rest
    lines: list[str] = []
    line, empty = first, True
    for word in filter(None, text.split(" ")):  # a no-break space holds
        pieces = _break(word, max(1, width - words.width_of(rest)))
        for piece in pieces:
            gap = "" if empty else " "
            if not empty and words.width_of(line + gap + piece) > width:
                lines.append(line.rstrip())
                line, gap = rest, ""
            line += gap + piece
            empty = False
    return [*lines, line.rstrip()]


def _break(word: str, width: int) -> list[str]:
    """Pieces of a word of at most `width` columns, cut after a hyphen where there is one."""
    pieces, piece = [], ""
    for character in word:
        if piece and words.width_of(piece + character) > width:
            cut = piece.rfind("-") + 1 or len(piece)
            pieces.append(piece[:cut])
            piece = piece[cut:]
        piece += character
    return [*pieces, piece]


def columns(rows: Sequence[Sequence[str]], widths: Sequence[int], indent: str = "") -> list[str]:
    """Rows of cells, each cell wrapped within its column and padded to it."""
    lines = []
    for row in rows:
        cells = [wrap(cell, width) for cell, width in zip(row, widths, strict=True)]
        for height in range(max(len(cell) for cell in cells)):
            parts = [
                words.fit(cell[height] if height < len(cell) else "", width)
                for cell, width in zip(cells, widths, strict=True)
            ]
            lines.append((indent + "  ".join(parts)).rstrip())
    return lines


# ------------------------------------------------------------------------------------------------ one series
def card_text(card: Card, width: int | None = None) -> str:
    """Card of one series as text.

    Parameters
    ----------
    card : Card
    width : int, optional
        Columns; by default those of the terminal.
    """
    width = text_width() if width is None else width
    lines = [_title(card, width), *wrap(card.problem or card.answer, width)]
    if not card.problem:
        lines += wrap(f"Plan: {chain(card.repairs, card.steps)}", width, "", "      ")
    lines += wrap(f"{card.span}.", width)
    if card.yours:
        lines += wrap(card.yours, width)
    if card.changes:
        lines.append("What changed, recommended \u2192 yours:")
    for change in card.changes:
        lines += wrap(f"{change.what}: {change.before}{ARROW}{change.after}", width, "  ", "    ")
    if card.proof is not None:
        told = [card.proof.problem] if card.proof.problem else [*card.proof.sentences, f"{card.proof.origins}."]
        lines += ["", *wrap(f"Forecasts from the past: {' '.join(told)}", width)]
    for rung in card.rungs:
        lines += _rung(rung, width)
    if card.plans:
        rows = [(row.text + (" (shown)" if row.shown else ""), row.odds) for row in card.plans]
        lines += ["", *wrap("Plans that were compared, and the odds of the best against each:", width)]
        lines += columns(rows, [width - 30, 26], "  ")
    if not card.problem:
        told = [form.problem for form in card.codes if form.problem]
        lines += ["", *wrap(" ".join([*told, "The pandas code: .code() of this series."]), width)]
    return "\n".join([*lines, *wrap(words.CAUTION, width)])


def _title(card: Card, width: int) -> str:
    verdict = words.verdict_text(card.verdict)
    room = width - words.width_of(verdict) - 2
    return f"{words.fit(words.name_text(card.name), room)}  {verdict}"


def chain(repairs: Sequence[StepMark], steps: Sequence[StepMark]) -> str:
    """Plan as a chain of steps."""
    told = [mark.text for mark in repairs]
    told += [mark.text if mark.state == "kept" else f"{mark.text} ({mark.state})" for mark in steps]
    return ARROW.join(["as given", *told]) if told else "as given, without steps"


def _rung(rung: RungCard, width: int) -> list[str]:
    start = f"{rung.position:>2} {words.SHAPES[rung.verdict]} "
    inside = " " * words.width_of(start)
    lines = ["", *wrap(rung.question, width, start)]
    lines += wrap(f"{rung.verdict}: {rung.headline.rstrip('.')}. {rung.reason}", width, inside)
    if rung.steps:
        lines += wrap(f"Proposes: {', '.join(rung.steps)}.", width, inside)
    if rung.before:
        lines += wrap(f"With the recommended plan: {rung.before}.", width, inside)
    lines += _tests(rung.tests, width, inside) if rung.tests else []
    if rung.measures:
        lines += wrap("; ".join(f"{label}: {value}" for label, value in rung.measures), width, inside, inside + "  ")
    return lines


def _tests(tests: Sequence[TestRow], width: int, inside: str) -> list[str]:
    room = width - len(inside) - 30
    widths = [room * 2 // 5, 9, 15, room - room * 2 // 5]
    lines = columns([("test", "statistic", "p-value", "null hypothesis")], widths, inside)
    series = ""
    for test in tests:
        if test.series and test.series != series:
            series = test.series
            lines += wrap(f"Series: {series}", width, inside)
        lines += columns([(test.test, test.statistic, test.p, test.null)], widths, inside)
        lines += wrap(test.details, width, inside + "  ")
    return lines


# ------------------------------------------------------------------------------------------------- overview
def overview_text(card: OverviewCard, width: int | None = None) -> str:
    """All series of a report, a line or two each."""
    width = text_width() if width is None else width
    longest = max([6, *(words.width_of(words.name_text(row.name)) for row in card.rows)])
    name = min(longest, max(8, width // 3))
    rest = width - name - 14 - 4
    rows = [("series", "verdict", "plan and notes" if any(row.note for row in card.rows) else "plan")]
    for row in card.rows:
        note = words.kept_together(row.note)
        told = row.plan if not note else f"{row.plan}; {note}" if row.plan != words.NONE else note
        rows.append((words.fit(words.name_text(row.name), name).rstrip(), words.verdict_text(row.verdict), told))
    counts = ", ".join(f"{count:,} {words.verdict_text(verdict)}" for verdict, count in card.counts)
    summary = f"{sum(count for _, count in card.counts):,} series: {counts}"
    lines = [*wrap(summary, width), *columns(rows, [name, 14, rest])]
    lines += wrap(card.part, width)
    if card.together:
        lines += ["", *wrap(card.together, width)]
    return "\n".join(lines)
