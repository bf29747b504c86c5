"""A bar that tells in a notebook how far long work has come."""

from __future__ import annotations

from typing import Any


class Bar:
    """One output of a cell that is written over as the work goes on, and empty when it is closed."""

    def __init__(self) -> None:
        self._handle: Any = None

    def tell(self, done: int, total: int, text: str) -> None:
        """Show how many of all are done.

        Parameters
        ----------
        done, total : int
        text : str
            The same in words.
        """
        bar = f'<progress value="{done:d}" max="{total:d}" aria-label="{text}"></progress>'
        bundle = {
            "text/html": f"{bar} <span>{text}</span>",
            "text/plain": text,
        }
        if self._handle is None:
            from IPython.display import display

            self._handle = display(bundle, raw=True, display_id=True)  # type: ignore[no-untyped-call]
        else:
            self._handle.update(bundle, raw=True)

    def close(self) -> None:
        """Leave nothing on the page."""
        if self._handle is not None:
            self._handle.update({"text/html": "", "text/plain": ""}, raw=True)


def in_notebook() -> bool:
    """Whether the output goes to a notebook: there is a shell, and it belongs to a kernel."""
    from IPython import get_ipython

    return getattr(get_ipython(), "kernel", None) is not None
