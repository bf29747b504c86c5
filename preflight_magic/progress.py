"""How far long work has come: a bar in a notebook, a line in a terminal, or a function of the caller's."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Iterator
from time import monotonic
from typing import Any, TypeVar

Progress = bool | Callable[[int, int], Any] | None

T = TypeVar("T")

PATIENCE = 3.0
"""Seconds of work still to come from which progress is shown unasked. Common practice."""


def follow(items: Iterable[T], total: int, progress: Progress) -> Iterator[T]:
    """Hand items on and tell how many are done.

    Parameters
    ----------
    items : iterable
    total : int
    progress : bool, callable or None
        None shows it when what is left will take more than some seconds; a callable gets (done, total).

    Yields
    ------
    object
        The items.
    """
    if progress is False:
        yield from items
        return
    line = _Line(total, unasked=progress is None)
    tell = progress if callable(progress) else line.tell
    done = 0
    try:
        for item in items:
            done += 1
            tell(done, total)
            yield item
    finally:
        line.close()


class _Line:
    """One line on standard error, written over itself."""

    def __init__(self, total: int, *, unasked: bool) -> None:
        self.start, self.total, self.shown, self.unasked = monotonic(), total, 0.0, unasked

    def tell(self, done: int, total: int) -> None:
        now = monotonic()
        left = (now - self.start) / done * (total - done)
        if self.unasked and not self.shown and left < PATIENCE:
            return
        if now - self.shown > 0.2 or done == total:
            self.shown = now
            text = f"{done} of {total} series checked, {left:.0f} s left"
            print(f"\r{text:<60}", end="", file=sys.stderr, flush=True)

    def close(self) -> None:
        if self.shown:
            print(file=sys.stderr, flush=True)
