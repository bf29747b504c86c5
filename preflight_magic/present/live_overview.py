"""The overview with its controls: order, verdict, name, page, and the series whose card is shown."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, cast

from preflight_magic.model import Verdict
from preflight_magic.present import text, words
from preflight_magic.present.html import style
from preflight_magic.present.live import Guard, button, close, named, row, show_bundle, show_controls
from preflight_magic.present.make_overview import page_of
from preflight_magic.present.markup import join
from preflight_magic.present.overview_html import overview
from preflight_magic.present.overview_lines import FIRST_ORDER, ORDERS, choose, counts, read_lines

if TYPE_CHECKING:
    from preflight_magic.present.contract import ReportView

PAGE = 25
"""Rows of a page."""
FEW = 8
"""Series up to which nobody needs to sort or search."""


class LiveOverview:
    """Overview that is drawn anew as a person asks for other rows.

    Parameters
    ----------
    report : ReportView
    guard : Guard
    key : str
        Class that ties the names in the table to the selector.
    open_card : callable
        Gets the position of a series in the report.
    """

    def __init__(self, report: ReportView, guard: Guard, key: str, open_card: Callable[[int], None]) -> None:
        self._report, self._guard, self._key, self._open_card = report, guard, key, open_card
        self._lines = read_lines(report)
        self._chosen = choose(self._lines)
        self._start = 0
        self.position = self._chosen[0]
        self._handle: Any = None
        self._build()

    def _build(self) -> None:
        import ipywidgets

        self.choice = named(
            ipywidgets.Dropdown(options=self._options(), value=self.position, description="Card of",
                                tooltip="Series whose card is shown below"),
            "pfm-selector", lambda: self._run(self._select),
        )  # fmt: skip
        self.choice.layout.max_width = "340px"
        verdicts = [("every verdict", None)]
        verdicts += [(f"{words.verdict_text(v)} ({n:,})", v) for v, n in counts(self._lines)]  # type: ignore[misc]
        self.order = named(
            ipywidgets.Dropdown(options=list(ORDERS), description="Order", tooltip="Order of the rows"),
            "pfm-order", lambda: self._run(self._ask),
        )  # fmt: skip
        self.verdict = named(
            ipywidgets.Dropdown(options=verdicts, description="Show", tooltip="Rows of one verdict, or all"),
            "pfm-filter", lambda: self._run(self._ask),
        )  # fmt: skip
        self.find = named(
            ipywidgets.Text(placeholder="part of a name", description="Find", tooltip="Rows with this in their name"),
            "pfm-find", lambda: self._run(self._ask),
        )  # fmt: skip
        self.earlier = button("Earlier rows", "The page before", "pfm-earlier", lambda: self._run(self._turn(-1)))
        self.later = button("Later rows", "The next page", "pfm-later", lambda: self._run(self._turn(1)))
        self._above = row([self.order, self.verdict, self.find], "pfm-controls")
        self._below = row([self.choice], "pfm-controls")
        self._below.add_class(self._key)
        self._set_pages()

    def _run(self, action: Callable[[], None]) -> None:
        self._guard.run(action, self._show_choice)

    # ------------------------------------------------------------------------------------------- callbacks
    def _ask(self) -> None:
        verdict = cast("Verdict | None", self.verdict.value)
        self._chosen = choose(self._lines, self.order.value or FIRST_ORDER, verdict, self.find.value)
        self._start = 0
        self._redraw()

    def _turn(self, pages: int) -> Callable[[], None]:
        def turn() -> None:
            last = max(0, (len(self._chosen) - 1) // PAGE * PAGE)
            self._start = min(max(0, self._start + pages * PAGE), last)
            self._redraw()

        return turn

    def _select(self) -> None:
        wanted = self.choice.value
        if wanted is None or wanted == self.position:
            return
        self._open_card(wanted)
        self.position = wanted

    def _show_choice(self) -> None:
        self.choice.value = self.position

    # --------------------------------------------------------------------------------------------- display
    def _options(self) -> list[tuple[str, int]]:
        shown = self._chosen[self._start : self._start + PAGE]
        # The series whose card is open stays on the list, after those of the page: rows are found by their place.
        extra = [] if self.position in shown else [self.position]
        return [(words.name_text(self._report.names[at], 80), at) for at in [*shown, *extra]]

    def _redraw(self) -> None:
        def set_choice() -> None:
            self.choice.options = self._options()
            self.choice.value = self.position

        self._guard.quietly(set_choice)
        self._set_pages()
        if self._handle is not None:
            self._handle.update(self.bundle(), raw=True)

    def _set_pages(self) -> None:
        self.earlier.disabled = self._start == 0
        self.later.disabled = self._start + PAGE >= len(self._chosen)
        many = len(self._chosen) > PAGE
        wanted = (self.choice, self.earlier, self.later) if many else (self.choice,)
        if tuple(self._below.children) != wanted:
            self._below.children = wanted

    def bundle(self) -> dict[str, str]:
        """HTML and text of the rows that are shown."""
        card = page_of(self._report, self._lines, self._chosen, self._start, PAGE, self.order.value or FIRST_ORDER)
        markup = join([style(), overview(card, key=self._key)])
        return {"text/html": markup, "text/plain": text.overview_text(card)}

    def show(self) -> None:
        """Display the controls and the table."""
        if len(self._lines) > FEW:
            show_controls(self._above)
        self._handle = show_bundle(self.bundle(), True)
        show_controls(self._below)

    def close(self) -> None:
        """Close every widget."""
        for widget in (self._above, self._below, self.earlier, self.later):
            close(widget)
