"""Making the overview of a report: its rows, and what each says."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.cards import OverviewCard, OverviewRow
from preflight_magic.present.make_cards import span_text
from preflight_magic.present.overview_lines import FIRST_ORDER, Line, choose, counts, read_lines

if TYPE_CHECKING:
    from preflight_magic.present.contract import ReportView

OVERVIEW_ROWS = 60
"""Rows of an overview that nobody can page through."""


def overview(report: ReportView, limit: int | None = OVERVIEW_ROWS) -> OverviewCard:
    """Overview of a report: the `limit` series that need a person first, or all."""
    lines = read_lines(report)
    positions = choose(lines)
    shown = page_of(report, lines, positions, 0, len(positions) if limit is None else limit)
    if len(shown.rows) == len(positions):
        return shown
    return replace(shown, part=f"{shown.part} All of them: report.overview.")


def page_of(
    report: ReportView,
    lines: Sequence[Line],
    positions: Sequence[int],
    start: int,
    size: int,
    order: str = FIRST_ORDER,
) -> OverviewCard:
    """One page of the series that were chosen.

    Parameters
    ----------
    report : ReportView
    lines : sequence of Line
        All series of the report.
    positions : sequence of int
        Those asked for, in their order.
    start, size : int
        Rows to show.
    order : str
        How they are sorted, in words.
    """
    shown = positions[start : start + size]
    rows = tuple(_row(report, lines[position]) for position in shown)
    part = f"Order: {order}."
    if len(rows) < len(positions):
        part = f"{start + 1:,} to {start + len(rows):,} of {len(positions):,}, {order}."
    return OverviewCard(counts(lines), rows, part, _together(report))


def _together(report: ReportView) -> str:
    """Finding about several series, as verdict, headline and reason; empty where there is none."""
    finding = getattr(report, "together", None)
    if finding is None:
        return ""
    return words.plain(f"{finding.question} {finding.verdict}: {finding.headline}. {finding.reason}")


def _row(report: ReportView, line: Line) -> OverviewRow:
    view = report[report.names[line.position]]
    changed = view.problem is None and bool(view.plan.steps) and len(view.transformed) > 1
    return OverviewRow(
        position=line.position,
        name=view.name,
        verdict=line.verdict,
        plan=words.plain(str(view.plan)) if view.problem is None else words.NONE,
        note=words.plain(view.problem) if view.problem else line.note,
        values=view.series.to_numpy(dtype=float),
        after=view.transformed.reindex(view.series.index).to_numpy(dtype=float) if changed else None,
        span=span_text(view.series, view.noun),
        rungs=tuple((f.question, f.verdict, words.plain(f.headline)) for f in view.findings.values()),
    )
