"""What every live part of a card shares: displaying, guarding callbacks, closing."""

from __future__ import annotations

import html as escaping
import threading
from collections.abc import Callable
from contextlib import suppress
from typing import Any

from preflight_magic.present import words

Bundle = dict[str, str]


class Guard:
    """Runs callbacks one at a time and tells what they raise.

    Callbacks of widgets may run in another thread beside a running cell, and what they raise is seen nowhere.
    """

    def __init__(self) -> None:
        self.lock = threading.RLock()
        self.closed = False
        self._deaf = 0
        self._message: Any = None

    def message(self) -> Any:
        """Widget in which messages stand; made when first asked for."""
        if self._message is None:
            import ipywidgets

            self._message = ipywidgets.HTML()
            self._message.add_class("pfm-message")
        return self._message

    def say(self, text: str) -> None:
        """Show a message, or none."""
        told = escaping.escape(words.plain(text))
        self.message().value = f'<span role="status">{told}</span>' if told else ""

    def run(self, action: Callable[[], None], restore: Callable[[], None]) -> None:
        """Run a callback alone; where it fails, `restore` sets the controls to what is shown."""
        with self.lock:
            if self._deaf or self.closed:
                return
            try:
                self.say("")
                action()
            except KeyboardInterrupt:
                self._failed("Stopped; the card shows what it showed before.", restore)
            except ValueError as error:
                self._failed(str(error), restore)
            except Exception as error:
                self._failed(f"{type(error).__name__}: {error}", restore)

    def _failed(self, message: str, restore: Callable[[], None]) -> None:
        self.quietly(restore)
        self.say(message)

    def quietly(self, action: Callable[[], None]) -> None:
        """Change controls without listening to them."""
        self._deaf += 1
        try:
            action()
        finally:
            self._deaf -= 1


def show_bundle(told: dict[str, Any], again: bool = False) -> Any:
    """Display a bundle; `again` gives a handle by which it can be drawn anew."""
    from IPython import display

    shown: Callable[..., Any] = display.display
    return shown(told, raw=True, display_id=True) if again else shown(told, raw=True)


def show_controls(box: Any) -> None:
    """Display a widget with blank HTML and text, so that nothing dead is seen where there is no kernel."""
    view = box._repr_mimebundle_()
    found = view[0] if isinstance(view, tuple) else view
    kind = "application/vnd.jupyter.widget-view+json"
    show_bundle({kind: found[kind], "text/html": " ", "text/plain": " "})


def button(words_on_it: str, tooltip: str, name: str, action: Callable[[], None]) -> Any:
    """Button that is as wide as its words."""
    import ipywidgets

    made = ipywidgets.Button(description=words_on_it, tooltip=tooltip)
    made.layout.width = "auto"
    made.add_class(name)
    made.on_click(lambda _: action())
    return made


def named(widget: Any, name: str, action: Callable[[], None]) -> Any:
    """Give a field the class by which it is found, a label as wide as its words, and what it does."""
    widget.style.description_width = "initial"
    widget.layout.width = "auto"
    widget.add_class(name)
    widget.observe(lambda _: action(), names="value")
    return widget


def row(children: list[Any], name: str) -> Any:
    """Controls side by side that wrap where there is little room."""
    import ipywidgets

    made = ipywidgets.HBox(children)
    made.layout.flex_flow = "row wrap"
    made.layout.align_items = "center"
    made.add_class(name)
    return made


def close(widget: Any) -> None:
    """Close a widget, what is in it, and what belongs to it."""
    for child in getattr(widget, "children", ()):
        close(child)
    with suppress(Exception):  # a widget may be closed already
        for part in (widget.layout, getattr(widget, "style", None)):
            if part is not None:
                part.close()
        widget.close()
