"""Which controllers live: running a cell again closes those of its last run, so that widgets do not pile up."""

from __future__ import annotations

import threading
from typing import Any, Protocol

KEPT = 40
"""Controllers of cells without an identity that may live at once."""


class Closable(Protocol):
    """Something with widgets to close."""

    def close(self) -> None:
        """Close every widget."""


_LOCK = threading.Lock()
_BY_CELL: dict[str, tuple[str, list[Closable]]] = {}
_NAMELESS: list[Closable] = []


def register(controller: Closable) -> None:
    """Remember a controller under the cell that runs now; close those of an earlier run of the same cell."""
    cell, run = _running()
    stale: list[Closable] = []
    with _LOCK:
        if cell is None:
            _NAMELESS.append(controller)
            while len(_NAMELESS) > KEPT:
                stale.append(_NAMELESS.pop(0))
        else:
            last, living = _BY_CELL.get(cell, ("", []))
            if last != run:
                stale, living = living, []
            living.append(controller)
            _BY_CELL[cell] = run, living
    for one in stale:
        one.close()


def close_all() -> None:
    """Close every controller, for example when the extension is unloaded."""
    with _LOCK:
        stale = [*_NAMELESS, *(one for _, living in _BY_CELL.values() for one in living)]
        _NAMELESS.clear()
        _BY_CELL.clear()
    for one in stale:
        one.close()


def _running() -> tuple[str | None, str]:
    """Identity of the running cell and of this run, as the kernel knows them."""
    from IPython import get_ipython

    kernel: Any = getattr(get_ipython(), "kernel", None)
    parent: dict[str, Any] = kernel.get_parent() if kernel is not None and hasattr(kernel, "get_parent") else {}
    cell = parent.get("metadata", {}).get("cellId")
    return (str(cell) if cell else None), str(parent.get("header", {}).get("msg_id", ""))
