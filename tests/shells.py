"""A real IPython shell with the magics loaded, and a recorder in place of the check."""

from __future__ import annotations

import builtins
import sys
import types
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import pandas as pd
import pytest
from IPython.core.error import UsageError
from IPython.core.interactiveshell import InteractiveShell
from traitlets.config import Config

from preflight_magic import magic


class Report:
    """Stands for a report: keeps what the check was called with."""

    def __init__(self, frame: Any, options: dict[str, Any]) -> None:
        self.frame, self.options = frame, options
        self.names: tuple[Any, ...] = ("passengers", "crew overtime", 2020)

    def code(self, names: list[Any] | None = None) -> str:
        return f"# code of {names}"

    def __repr__(self) -> str:
        return "the report is shown"


@contextmanager
def running_shell(folder: Path) -> Iterator[InteractiveShell]:
    """A shell whose namespace holds the frame `monthly`; `folder` is its own IPython folder."""
    config = Config()
    config.HistoryManager.enabled = False
    config.InteractiveShell.colors = "nocolor"
    recorder = types.ModuleType("preflight_magic.batch")
    recorder.check = lambda frame, **options: Report(frame, options)  # type: ignore[attr-defined]
    InteractiveShell.clear_instance()
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("IPYTHONDIR", str(folder))
        # where something has set the builtin, as a doctest does, IPython leaves `_` alone
        patch.delattr(builtins, "_", raising=False)
        patch.setitem(sys.modules, "preflight_magic.batch", recorder)
        shell = InteractiveShell.instance(config=config)
        shell.user_ns["monthly"] = frame()
        magic.load(shell)
        yield shell
        magic.unload(shell)
        shell.restore_sys_module_state()
    InteractiveShell.clear_instance()


def frame() -> pd.DataFrame:
    """Three series of 24 months; the name of the last is a number."""
    index = pd.period_range("2019-01", periods=24, freq="M")
    return pd.DataFrame({"passengers": range(24), "crew overtime": range(24), 2020: range(24)}, index=index)


def checked(shell: InteractiveShell, text: str) -> Report:
    """Run a cell that has to give a report."""
    result = shell.run_cell(text)
    result.raise_error()
    assert isinstance(result.result, Report)
    return result.result


def refused(shell: InteractiveShell, text: str) -> str:
    """Run a cell that has to end in a usage error of one sentence."""
    error = shell.run_cell(text).error_in_exec
    assert isinstance(error, UsageError), error
    message = str(error)
    assert "\n" not in message
    assert message.endswith((".", "?"))
    return message
