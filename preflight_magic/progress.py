"""How far long work has come: a bar in a notebook, a line in a terminal, or a function of the caller's."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
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


@dataclass
class Tally:
    """How much of the work is computed: in a pool before it is handed on, and less than all where a cache answers."""

    wanted: int = 0
    finished: int = 0


def follow(items: Iterable[T], total: int, progress: Progress, tally: Tally | None = None) -> Iterator[T]:
    """Hand items on and tell how many are done.

    Parameters
    ----------
    items : iterable
    total : int
    progress : bool, callable or None
        None shows it when what is left will take more than some seconds; a callable gets (done, total).
    tally : Tally, optional
        What the pace is told from; by default the items handed on.

    Yields
    ------
    object
        The items.
    """
    if progress is False:
        yield from items
        return
    teller = _Teller(asked=progress is True, tally=tally)
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

    def __init__(self, *, asked: bool, tally: Tally | None) -> None:
        self.asked, self.tally, self.start, self.last = asked, tally, monotonic(), 0.0
        self.place: Bar | _Line | None = None

    def tell(self, done: int, total: int) -> None:
        now = monotonic()
        left = self._left(now - self.start, done, total)
        if self.place is None and not self.asked and (now - self.start < FIRST_LOOK or left < PATIENCE):
            return
        if now - self.last < PAUSE and done < total:
            return
        self.last = now
        if self.place is None:
            self.place = _place()
        self.place.tell(done, total, f"{done} of {total} series checked, {duration(left)} left")

    def _left(self, passed: float, done: int, total: int) -> float:
        """Seconds still to come at the pace so far."""
        tally = self.tally
        if tally is None or not tally.finished:
            return passed / done * (total - done)
        return passed / tally.finished * max(tally.wanted - tally.finished, 0)

    def close(self) -> None:
        if self.place is not None:
            self.place.close()


def duration(seconds: float) -> str:
    """Write a time as briefly as its size allows: ``45 s``, ``12 min``, ``3 h 20 min``."""
    if seconds < 99.5:
        return f"{seconds:.0f} s"
    minutes = round(seconds / 60.0)
    return f"{minutes} min" if minutes < 100 else f"{minutes // 60} h {minutes % 60} min"


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
