"""What the options of a magic name: variables of the person, and files."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from IPython.core.error import UsageError

from preflight_magic.command_line import Line, did_you_mean, is_executor, is_report
from preflight_magic.model import CheckError


def executor_of(variables: Mapping[str, object], given: Line) -> object:
    """Executor of `--pool`, or None."""
    name = given.options.get("--pool")
    if name is None:
        return None
    pools = [known for known, value in variables.items() if is_executor(value) and not known.startswith("_")]
    if name not in variables:
        raise UsageError(
            f"--pool {name}: there is no such variable; "
            + (did_you_mean(str(name), pools) if pools else "make an executor of concurrent.futures first.")
        )
    pool: object = variables[str(name)]
    if not is_executor(pool):
        raise UsageError(f"--pool {name} is a {type(pool).__name__}, not an executor of concurrent.futures.")
    return pool


def earlier_of(variables: Mapping[str, object], given: Line) -> Any:
    """Report of `--against`: that of a variable, or of a file."""
    text = given.options.get("--against")
    if text is None:
        return None
    known = variables.get(str(text))
    if known is not None:
        if not is_report(known):
            raise UsageError(f"--against {text} is a {type(known).__name__}, not a report; make one with --into NAME.")
        return known

    from preflight_magic.record.read import load

    try:
        return load(str(text))
    except CheckError as error:
        raise UsageError(f"--against {text}: {one_line(error)}") from None
    except OSError as error:
        why = (error.strerror or "it cannot be read").lower()
        raise UsageError(f"--against {text}: {why}; save a record first with report.save('{text}').") from None


def one_line(error: CheckError) -> str:
    """Message of an error on one line."""
    return " ".join(str(error).split())
