"""Cards in a notebook: plain HTML that is drawn anew, and widgets for the controls alone."""

from __future__ import annotations

import html as escaping
import threading
from collections.abc import Callable, Hashable, Sequence
from contextlib import suppress
from typing import TYPE_CHECKING, Any

from preflight_magic.present import html, make_cards, registry, text, words
from preflight_magic.present.contract import ReportView
from preflight_magic.present.markup import join
from preflight_magic.present.switches import Switch, settle, states, switches, walk

if TYPE_CHECKING:
    import pandas as pd

    from preflight_magic.present.contract import SeriesView

FIND_FROM = 30
SHOWN_NAMES = 200

Bundle = dict[str, str]


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
    from preflight_magic.present.changes import changes_html, changes_text

    if in_notebook():
        _display({"text/html": changes_html(changes), "text/plain": changes_text(changes)})
    else:
        print(f"\n{changes_text(changes)}")


def bundle(view: ReportView | SeriesView) -> Bundle:
    """HTML and text of a report or one series, without controls."""
    if not isinstance(view, ReportView):
        card = make_cards.card(view)
        return {"text/html": html.card_html(card), "text/plain": text.card_text(card)}
    if len(view) == 1:
        return bundle(view[view.names[0]])
    overview = make_cards.overview(view)
    return {"text/html": html.overview_html(overview), "text/plain": text.overview_text(overview)}


class Controller:
    """One displayed report: which series is selected and which steps are on.

    State is guarded by a lock, since callbacks of widgets may run in another thread beside a running cell. What a
    callback raises is shown in the card.
    """

    def __init__(self, view: ReportView | SeriesView) -> None:
        self._report = view if isinstance(view, ReportView) else None
        self._lock = threading.RLock()
        self._quiet = False
        self._closed = False
        self._made: dict[Hashable, dict[tuple[bool, ...], tuple[SeriesView, Bundle, Bundle]]] = {}
        self._base: SeriesView = view[view.names[0]] if isinstance(view, ReportView) else view
        self._offered: tuple[Switch, ...] = ()
        self._shown: tuple[bool, ...] = ()
        self._boxes: list[Any] = []
        self._top: Any = None
        self._rest: Any = None
        self._build()

    # ------------------------------------------------------------------------------------------ controls
    def _build(self) -> None:
        import ipywidgets

        self._message = ipywidgets.HTML()
        self._message.add_class("pfm-message")
        self._back = ipywidgets.Button(
            description="Back to the recommendation", tooltip="Switch every step as recommended"
        )
        self._back.add_class("pfm-back")
        self._back.layout.width = "auto"
        self._back.on_click(lambda _: self._guarded(self._recommend))
        self._steps = ipywidgets.HBox()
        self._steps.layout.flex_flow = "row wrap"
        self._controls = ipywidgets.VBox([self._steps, self._message])
        self._controls.add_class("pfm-controls")
        self._selector = self._selection() if self._report is not None and len(self._report) > 1 else None
        self._load(self._base)

    def _selection(self) -> Any:
        import ipywidgets

        names = list(self._report.names) if self._report is not None else []
        self._choice = ipywidgets.Dropdown(
            options=_options(names[:SHOWN_NAMES]), value=0, description="Series", tooltip="Series whose card is shown"
        )
        self._choice.style.description_width = "initial"
        self._choice.add_class("pfm-selector")
        self._choice.observe(lambda _: self._guarded(self._select), names="value")
        parts = [self._choice]
        if len(names) > FIND_FROM:
            find = ipywidgets.Text(
                placeholder="part of a name", description="Find", tooltip="Narrow the list of series"
            )
            find.style.description_width = "initial"
            self._find = find
            find.add_class("pfm-find")
            find.observe(lambda _: self._guarded(self._narrow), names="value")
            parts.append(find)
        box = ipywidgets.HBox(parts)
        box.layout.flex_flow = "row wrap"
        box.add_class("pfm-controls")
        return box

    def _load(self, base: SeriesView) -> None:
        """Make the switches of a series; those of the last one are closed."""
        import ipywidgets

        self._base = base
        self._offered = switches(base)
        self._shown = states(base, self._offered)
        old, self._boxes = self._boxes, []
        for position, (switch, on) in enumerate(zip(self._offered, self._shown, strict=True)):
            box = ipywidgets.Checkbox(value=on, description=switch.text, indent=False, tooltip=switch.meaning)
            box.add_class("pfm-switch")
            box.layout.width = "auto"
            box.observe(self._turn(position), names="value")
            self._boxes.append(box)
        self._back.disabled = self._is_recommended()
        self._steps.children = [*self._boxes, self._back] if self._boxes else []
        for box in old:
            _close(box)

    def _turn(self, position: int) -> Callable[[Any], None]:
        return lambda _: self._guarded(lambda: self._switch(position))

    # ------------------------------------------------------------------------------------------ callbacks
    def _guarded(self, action: Callable[[], None]) -> None:
        """Run a callback alone; what it raises is told in the card, and the switches go back to what is shown."""
        with self._lock:
            if self._quiet or self._closed:
                return
            try:
                self._say("")
                action()
            except KeyboardInterrupt:
                self._restore("Stopped; the card shows what it showed before.")
            except Exception as error:
                self._restore(f"{type(error).__name__}: {error}" if not isinstance(error, ValueError) else str(error))

    def _restore(self, message: str) -> None:
        self._set_boxes(self._shown)
        self._say(message)

    def _say(self, message: str) -> None:
        told = escaping.escape(words.plain(message))
        self._message.value = f'<span role="status">{told}</span>' if told else ""

    def _set_boxes(self, wanted: Sequence[bool]) -> None:
        self._quiet = True
        try:
            for box, on in zip(self._boxes, wanted, strict=True):
                if box.value != on:  # a click that arrives meanwhile is not undone
                    box.value = on
        finally:
            self._quiet = False

    def _switch(self, position: int) -> None:
        # What the boxes say now counts, not what they said when this was called: fast clicks end in the last state.
        seen = [bool(box.value) for box in self._boxes]
        wanted = settle(self._offered, seen, position)
        self._set_boxes(wanted)
        self._go(wanted)

    def _recommend(self) -> None:
        wanted = tuple(switch.recommended for switch in self._offered)
        self._set_boxes(wanted)
        self._go(wanted)

    def _go(self, wanted: tuple[bool, ...]) -> None:
        if wanted == self._shown:
            return
        if wanted not in self._cache():
            self._say("Examining again \u2026")
        self._draw(wanted)
        self._shown = wanted
        self._back.disabled = self._is_recommended()
        self._say("")

    def _select(self) -> None:
        position = self._choice.value
        if self._report is None or position is None:
            return
        base = self._report[list(self._report.names)[position]]
        if base.name != self._base.name:
            self._load(base)
            self._draw(self._shown)

    def _narrow(self) -> None:
        part = str(self._find.value).casefold()
        names = list(self._report.names) if self._report is not None else []
        found = [(words.name_text(n, 80), i) for i, n in enumerate(names) if part in words.name_text(n).casefold()]
        self._quiet = True
        try:
            self._choice.options = found[:SHOWN_NAMES]
        finally:
            self._quiet = False
        self._say("" if found else "No series has this in its name.")
        self._select()

    def _is_recommended(self) -> bool:
        return all(on == switch.recommended for on, switch in zip(self._shown, self._offered, strict=True))

    # -------------------------------------------------------------------------------------------- display
    def _cache(self) -> dict[tuple[bool, ...], tuple[SeriesView, Bundle, Bundle]]:
        return self._made.setdefault(self._base.name, {})

    @property
    def view(self) -> SeriesView:
        """The series that is shown, with the plan that is shown."""
        return self._bundles(self._shown)[0]

    def _bundles(self, wanted: tuple[bool, ...]) -> tuple[SeriesView, Bundle, Bundle]:
        """Series, upper and lower part of the card for these states; made once."""
        cache = self._cache()
        if wanted not in cache:
            view = self._base
            if wanted != states(self._base, self._offered):
                view = walk(self._base, self._offered, wanted)
            is_base = view is self._base or self._base.plan.steps != self._base.recommended.steps
            card = make_cards.card(view, None if is_base else self._base)
            key = f"{id(self)}-{words.name_text(self._base.name, 20)}".replace(" ", "-")
            top = {"text/html": join([html.style(), html.head(card)]), "text/plain": text.card_text(card)}
            cache[wanted] = view, top, {"text/html": html.body(card, key), "text/plain": ""}
        return cache[wanted]

    def _draw(self, wanted: tuple[bool, ...]) -> None:
        _, top, rest = self._bundles(wanted)
        if self._top is not None:
            self._top.update(top, raw=True)
            self._rest.update(rest, raw=True)

    def show(self) -> None:
        """Display everything: overview and selector where there are several series, the card, its controls."""
        with self._lock:
            if self._report is not None and self._selector is not None:
                overview = make_cards.overview(self._report)
                told = {"text/html": html.overview_html(overview), "text/plain": text.overview_text(overview)}
                _display(told)
                _display(_controls(self._selector))
            _, top, rest = self._bundles(self._shown)
            self._top = _display(top, True)
            if self._boxes or self._selector is not None:
                _display(_controls(self._controls))
            self._rest = _display(rest, True)

    def close(self) -> None:
        """Close every widget; the card stays as it is."""
        with self._lock:
            self._closed = True
            for box in (self._controls, self._selector, self._back, *self._boxes):
                if box is not None:
                    _close(box)


def _display(told: dict[str, Any], again: bool = False) -> Any:
    """Display a bundle; `again` gives a handle by which it can be drawn anew."""
    from IPython import display

    shown: Callable[..., Any] = display.display
    return shown(told, raw=True, display_id=True) if again else shown(told, raw=True)


def _options(names: Sequence[Hashable]) -> list[tuple[str, int]]:
    return [(words.name_text(name, 80), position) for position, name in enumerate(names)]


def _controls(box: Any) -> dict[str, Any]:
    """Bundle of a widget whose HTML and text are blank, so that nothing dead is seen where there is no kernel."""
    view = box._repr_mimebundle_()
    found = view[0] if isinstance(view, tuple) else view
    kind = "application/vnd.jupyter.widget-view+json"
    return {kind: found[kind], "text/html": " ", "text/plain": " "}


def _close(widget: Any) -> None:
    for child in getattr(widget, "children", ()):
        _close(child)
    with suppress(Exception):  # a widget may be closed already
        for part in (widget.layout, getattr(widget, "style", None)):
            if part is not None:
                part.close()
        widget.close()
