"""Completion of the lines of the magics: options, frames, reports, columns and executors."""

from __future__ import annotations

import re
from collections.abc import Callable, Hashable, Iterable, Mapping
from pathlib import Path
from typing import Any

from IPython.core.completer import CompletionContext, SimpleCompletion, context_matcher

from preflight_magic.command_line import OPTIONS, is_executor, is_frame, is_report, open_word, split_outside

IDENTIFIER = "preflight_magic"
"""By this the matcher is found again among those of the shell."""

MOST_FILES = 50
_MAGIC = re.compile(r"^\s*(?:[\w\s,]+=\s*)?(%%?)(checkseries|seriescode)\s(.*)$", re.DOTALL)


def matcher(shell: Any) -> Callable[[CompletionContext], Any]:
    """Build the matcher for the list of custom matchers of an InteractiveShell."""

    def match(context: CompletionContext) -> dict[str, Any]:
        lines = context.full_text.split("\n")[: context.cursor_line]
        offered: list[tuple[str, str]] = []
        fragment = ""
        found = _MAGIC.match(context.text_until_cursor)
        # A cell magic stands in the first line; further down the same words are Python.
        if found and (found[1] == "%" or not "".join(lines).strip()):
            fragment, offered = offers(found[2], found[1] == "%%", found[3], shell.user_ns)
        return {
            "completions": [SimpleCompletion(text=text, type=kind) for text, kind in offered],
            "matched_fragment": fragment,
            # Python's own completions would offer names that mean nothing here.
            "suppress": bool(offered),
        }

    marked: Callable[[CompletionContext], Any] = context_matcher(identifier=IDENTIFIER)(match)
    return marked


def offers(magic: str, in_cell: bool, rest: str, variables: Mapping[str, object]) -> tuple[str, list[tuple[str, str]]]:
    """Completions of a line.

    Parameters
    ----------
    magic : {"checkseries", "seriescode"}
    in_cell : bool
        Of a cell magic, whose frame is the value of the cell.
    rest : str
        The line after the name of the magic, up to the cursor.
    variables : Mapping
        The person's namespace.

    Returns
    -------
    fragment : str
        The part of the line that a completion replaces.
    completions : list of (str, str)
        Text and kind.
    """
    fragment = open_word(rest)
    words = split_outside(rest[: len(rest) - len(fragment)], " \t")
    if magic == "seriescode":
        return fragment, _code_words(words, fragment, variables)
    # After "--only a," the option is still --only.
    last = next((word for word in reversed(words) if not word.endswith(",")), "")
    option = next((option for option in OPTIONS if option.form and option.name == last), None)
    if option is not None:
        if option.wanted == "column":
            return fragment, _quoted(_columns(words, variables), fragment, "column")
        if option.wanted == "report":
            return fragment, _variables(variables, is_report, fragment) + _records(fragment)
        return fragment, _variables(variables, is_executor, fragment) if option.wanted == "executor" else []
    offered = []
    if not in_cell and not any(variables.get(word) is not None for word in words):
        offered = _variables(variables, is_frame, fragment)
    unused = [option.name for option in OPTIONS if option.repeated or option.name not in words]
    return fragment, offered + [(name, "option") for name in unused if name.startswith(fragment)]


def _code_words(words: list[str], fragment: str, variables: Mapping[str, object]) -> list[tuple[str, str]]:
    if not words:
        return _variables(variables, is_report, fragment)
    report: Any = variables.get(words[0])
    return _quoted(report.names, fragment, "series") if is_report(report) else []


def _columns(words: list[str], variables: Mapping[str, object]) -> Iterable[Hashable]:
    """Columns of the frame that the line names."""
    for word in words:
        frame = variables.get(word)
        if is_frame(frame):
            return tuple(getattr(frame, "columns", ()))
    return ()


def _variables(
    variables: Mapping[str, object], wanted: Callable[[object], bool], fragment: str
) -> list[tuple[str, str]]:
    return [
        (name, "variable")
        for name, value in variables.items()
        if name.startswith(fragment) and not name.startswith("_") and wanted(value)
    ]


def _records(fragment: str) -> list[tuple[str, str]]:
    """Files and folders that lead to a record, as far as they begin like the fragment."""
    quote = fragment[:1] if fragment[:1] in ("'", '"') else ""
    typed = fragment[len(quote) :]
    folder, _, start = typed.rpartition("/")
    try:
        names = sorted(
            one.name + "/" if one.is_dir() else one.name
            for one in Path(f"{folder}/" if "/" in typed else ".").iterdir()
            if one.name.startswith(start) and not one.name.startswith(".") and (one.is_dir() or one.suffix == ".json")
        )
    except OSError:
        return []
    return _quoted([f"{folder}/{name}" if "/" in typed else name for name in names[:MOST_FILES]], fragment, "path")


def _quoted(labels: Iterable[Hashable], fragment: str, kind: str) -> list[tuple[str, str]]:
    """Labels that begin like the fragment, in quotes where they need them or where the fragment has one."""
    quote = fragment[:1] if fragment[:1] in ("'", '"') else ""
    offered = []
    for label in map(str, labels):
        if label.startswith(fragment[len(quote) :]):
            around = quote or ('"' if re.search(r"[\s,'\"\[\](){}]", label) else "")
            offered.append((f"{around}{label}{around}", kind))
    return offered
