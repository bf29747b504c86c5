"""How far long work has come: a bar in a notebook, a line in a terminal, or a function of the caller's."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Iterator
from time import monotonic
from typing import TYPE_CHECKING, Any, TypeVar

if TYPE_CHECKING:
    from preflight_magic.present.progress_bar import Bar

Progress = bool | Callable[[int, int], Any] | None

T = TypeVar("T")

PATIENCE = 3.0
"""Seconds of work still to come from which progress is shown unasked. Common practice."""
FIRST_LOOK = 1.0
"""Seconds after which the pace can be told: the first series pays for what is loaded once."""
PAUSE = 0.2
"""Seconds between two writings."""


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
    teller = _Teller(asked=progress is True)
    tell = progress if callable(progress) else teller.tell
    done = 0
    try:
        for item in items:
            done += 1
            tell(done, total)
            yield item
    finally:
        teller.close()


class _Teller:
    """Tells progress where it can be seen, not too often, and unasked only when the work is long."""

    def __init__(self, *, asked: bool) -> None:
        self.asked, self.start, self.last = asked, monotonic(), 0.0
        self.place: Bar | _Line | None = None

    def tell(self, done: int, total: int) -> None:
        now = monotonic()
        left = (now - self.start) / done * (total - done)
        if self.place is None and not self.asked and (now - self.start < FIRST_LOOK or left < PATIENCE):
            return
        if now - self.last < PAUSE and done < total:
            return
        self.last = now
        if self.place is None:
            self.place = _place()
        self.place.tell(done, total, f"{done} of {total} series checked, {left:.0f} s left")

    def close(self) -> None:
        if self.place is not None:
            self.place.close()


class _Line:
    """One line on standard error, written over itself."""

    def tell(self, done: int, total: int, text: str) -> None:
        print(f"\r{text:<60}", end="", file=sys.stderr, flush=True)

    def close(self) -> None:
        print(file=sys.stderr, flush=True)


def _place() -> Bar | _Line:
    if "IPython" in sys.modules:
        from preflight_magic.present.progress_bar import Bar, in_notebook

        if in_notebook():
            return Bar()
    return _Line()
