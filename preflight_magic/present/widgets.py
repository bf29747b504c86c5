"""Cards in a notebook: plain HTML that is drawn anew, and widgets for the controls alone."""

from __future__ import annotations

import itertools
from typing import TYPE_CHECKING

from preflight_magic.present import html, make_cards, make_overview, registry, text
from preflight_magic.present.contract import ReportView
from preflight_magic.present.live import Bundle, Guard, close, show_bundle
from preflight_magic.present.live_card import LiveCard
from preflight_magic.present.live_overview import LiveOverview

if TYPE_CHECKING:
    import pandas as pd

    from preflight_magic.present.contract import SeriesView

_NUMBERS = itertools.count(1)
HINT = "Turn a step off to see what it does; More changes has other plans; %seriescode puts the code into a cell."
"""Said once in a session, until the first click."""
_hints = iter([HINT])


def in_notebook() -> bool:
    """Whether a kernel runs this code, so that HTML and widgets can be shown."""
    from IPython import get_ipython

    return getattr(get_ipython(), "kernel", None) is not None


def show(view: ReportView | SeriesView) -> Controller | None:
    """Show a report or one series: live in a notebook, as text in a terminal.

    Parameters
    ----------
    view : ReportView or SeriesView

    Returns
    -------
    Controller or None
        What keeps the controls alive; None where there are none.
    """
    if not in_notebook():
        print(bundle(view)["text/plain"])
        return None
    controller = Controller(view)
    registry.register(controller)
    controller.show()
    return controller


def show_changes(changes: pd.DataFrame) -> None:
    """Show what changed since an earlier report: a table in a notebook, as text in a terminal."""
    from preflight_magic.present.against import changes_html, changes_text

    if in_notebook():
        show_bundle({"text/html": changes_html(changes), "text/plain": changes_text(changes)})
    else:
        print(f"\n{changes_text(changes)}")


def bundle(view: ReportView | SeriesView) -> Bundle:
    """HTML and text of a report or one series, without controls."""
    if not isinstance(view, ReportView):
        card = make_cards.with_code(make_cards.card(view), view)
        return {"text/html": html.card_html(card), "text/plain": text.card_text(card)}
    if len(view) == 1:
        return bundle(view[view.names[0]])
    overview = make_overview.overview(view)
    return {"text/html": html.overview_html(overview), "text/plain": text.overview_text(overview)}


class Controller:
    """One displayed report or series: the overview where there are several series, and one card."""

    def __init__(self, view: ReportView | SeriesView) -> None:
        self.guard = Guard()
        key = f"pfm-shown-{next(_NUMBERS)}"
        self.overview: LiveOverview | None = None
        if isinstance(view, ReportView):
            names, report = view.names, view
            if len(report) > 1:
                self.overview = LiveOverview(report, self.guard, key, lambda at: self.card.open(report[names[at]]))
            view = report[names[self.overview.position if self.overview else 0]]
        self.card = LiveCard(view, self.guard, key, styled=self.overview is not None)

    @property
    def view(self) -> SeriesView:
        """The series that is shown, with the plan that is shown."""
        return self.card.view

    def show(self) -> None:
        """Display everything."""
        with self.guard.lock:
            if self.overview is not None:
                self.overview.show()
            self.card.show()
            if self.card.view.problem is None:
                self.guard.say(next(_hints, ""))

    def close(self) -> None:
        """Close every widget; what is shown stays as it is."""
        with self.guard.lock:
            self.guard.closed = True
            for part in (self.overview, self.card):
                if part is not None:
                    part.close()
            close(self.guard.message())
