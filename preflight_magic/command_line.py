"""The line of a magic: its words, its options, and what they mean.

`argparse` is not used, because the line holds a Python expression that has to stay as it was typed, and because it
takes any beginning of an option for the option.
"""

from __future__ import annotations

import keyword
import re
from collections.abc import Callable, Hashable, Iterable, Mapping, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from difflib import get_close_matches
from itertools import pairwise
from typing import Literal

from IPython.core.error import UsageError

Wanted = Literal["column", "executor", "report", "other"]


@dataclass(frozen=True)
class Option:
    """One option of `checkseries`.

    `form` is how its value is written, empty for a switch; `read` turns the text into the value and raises ValueError
    with the end of a sentence; `wanted` says what completion may offer; a `repeated` option collects its values.
    """

    name: str
    form: str
    about: str
    read: Callable[[str], object] = str
    wanted: Wanted = "other"
    repeated: bool = False


@dataclass(frozen=True)
class Line:
    """A line read: the Python expression as typed, and the values of the options that were given."""

    expression: str
    options: Mapping[str, object]


# --------------------------------------------------------------------------------------------- words of a line
def split_outside(text: str, separators: str) -> list[str]:
    """Split at separators that stand outside quotes and brackets, and drop empty parts.

    Parameters
    ----------
    text : str
    separators : str
        Single characters.

    Raises
    ------
    UsageError
        Where a quote is not closed.
    """
    cuts, quote = _cuts(text, separators)
    if quote:
        raise UsageError(f"a quote {quote} is not closed; put names with spaces or quotes between two {quote}.")
    parts = [text[start + 1 : end] for start, end in pairwise([-1, *cuts, len(text)])]
    return [part for part in parts if part]


def open_word(text: str) -> str:
    """Last word of a text, with its quote where one is open; empty after a space or a comma."""
    cuts, _ = _cuts(text, " \t,")
    return text[cuts[-1] + 1 :] if cuts else text


def _cuts(text: str, separators: str) -> tuple[list[int], str]:
    """Positions of the separators outside quotes and brackets, and the quote that is open at the end."""
    cuts, depth, quote, position = [], 0, "", 0
    while position < len(text):
        character = text[position]
        if quote:
            if character == "\\":
                position += 1
            elif character == quote:
                quote = ""
        elif character in "\"'":
            quote = character
        elif character in "([{":
            depth += 1
        elif character in ")]}":
            depth -= 1
        elif character in separators and depth <= 0:
            cuts.append(position)
        position += 1
    return cuts, quote


def unquoted(text: str) -> str:
    """Text without one pair of quotes around it."""
    text = text.strip()
    return text[1:-1] if len(text) > 1 and text[0] == text[-1] and text[0] in "\"'" else text


def listed(text: str) -> list[str]:
    """Items of a list with commas; quotes protect a comma and are taken off."""
    return [item for part in split_outside(text, ",") if (item := unquoted(part))]


def did_you_mean(word: str, known: Iterable[Hashable]) -> str:
    """End of a sentence that offers the names that begin so, else the closest one, else the first few."""
    names = [str(name) for name in known]
    near = [name for name in names if name.startswith(word)][:3] or get_close_matches(word, names, 1)
    if near:
        return f"did you mean {' or '.join(near)}?"
    if not names:
        return "there are none."
    more = f" and {len(names) - 4} more" if len(names) > 5 else ""
    shown = ", ".join(names[:4] if more else names)
    return f"there {'is' if len(names) == 1 else 'are'} {shown}{more}."


# --------------------------------------------------------------------------------------------- values of options
def _whole(text: str) -> int:
    if not re.fullmatch(r"[+-]?\d+", text):
        raise ValueError("is not a whole number")
    return int(text)


def _seasons(text: str) -> int | tuple[int, ...]:
    try:
        found = tuple(_whole(part) for part in listed(text))
    except ValueError:
        found = ()
    if not found:
        raise ValueError("is not a whole number or a list of them such as 24,168")
    return found[0] if len(found) == 1 else found


def _share(text: str) -> float:
    try:
        found = float(text)
    except ValueError:
        raise ValueError("is not a number such as 0.05") from None
    if not 0.0 < found < 1.0:
        raise ValueError("is not between 0 and 1")
    return found


def _span(text: str) -> tuple[str, str]:
    start, separator, end = text.partition("..")
    if not start.strip() or (separator and not end.strip()):
        raise ValueError("is not a span such as 2020-03..2020-06")
    return start.strip(), end.strip() if separator else start.strip()


def _identifier(text: str) -> str:
    if not text.isidentifier() or keyword.iskeyword(text):
        raise ValueError("is not a name that a variable can have")
    return text


OPTIONS: tuple[Option, ...] = (
    Option("--season", "N[,N]", "observations per cycle, several with commas; 1 for none", _seasons),
    Option("--horizon", "N", "steps ahead for the proof and the reference forecast", _whole),
    Option("--time", "COLUMN", "column with the dates, where they are not the index", wanted="column"),
    Option("--series", "COLUMN", "column with the name of the series, in a long table", wanted="column"),
    Option("--value", "COLUMN", "column with the values, in a long table", wanted="column"),
    Option("--significance", "SHARE", "size of the tests shown", _share),
    Option("--only", "NAME[,NAME]", "series to check; may be repeated", listed, "column", True),
    Option("--target", "NAME", "series that the others are meant to explain", wanted="column"),
    Option("--exclude", "START..END", "special span, both ends included, treated as missing; may be repeated", _span,
           repeated=True),
    Option("--pool", "NAME", "variable that holds a concurrent.futures executor", _identifier, "executor"),
    Option("--into", "NAME", "variable that gets the report", _identifier),
    Option("--against", "FILE", "earlier report, to compare with: its file, or a variable that holds it",
           wanted="report"),
    Option("--quiet", "", "show nothing"),
)  # fmt: skip
"""Every option, in the order of the help text."""

_BY_NAME = {option.name: option for option in OPTIONS}


def read_line(line: str) -> Line:
    """Read the line of `checkseries`.

    Parameters
    ----------
    line : str
        What follows the name of the magic: options in any place, everything else is the expression.

    Raises
    ------
    UsageError
        For an unknown option, a missing or unreadable value, an option given twice.
    """
    words = split_outside(line, " \t\n")
    expression: list[str] = []
    options: dict[str, object] = {}
    while words:
        word = words.pop(0)
        name, has_value, text = word.partition("=")
        if not name.startswith("--") and f"-{name}" not in _BY_NAME:
            expression.append(word)
            continue
        option = _BY_NAME.get(name)
        if option is None:
            raise UsageError(f"there is no option {name}; {_near_option(name)}")
        if not option.form:
            if has_value:
                raise UsageError(f"{name} takes no value.")
            options[name] = True
            continue
        if not has_value:
            text = _next_value(option, words)
        while text.endswith(",") and words and not words[0].startswith("--"):
            text += words.pop(0)
        _store(options, option, text)
    return Line(" ".join(expression), options)


def _near_option(name: str) -> str:
    word = "--" + name.lstrip("-")
    if word in _BY_NAME or any(known.startswith(word) for known in _BY_NAME) or get_close_matches(word, _BY_NAME, 1):
        return did_you_mean(word, _BY_NAME)
    return "%checkseries? shows them all."


def _next_value(option: Option, words: list[str]) -> str:
    if not words or words[0].startswith("--"):
        raise UsageError(f"{option.name} needs a value; write {option.name} {option.form}.")
    return words.pop(0)


def _store(options: dict[str, object], option: Option, text: str) -> None:
    if option.name in options and not option.repeated:
        raise UsageError(f"{option.name} is given twice; give it once.")
    try:
        # A list takes off the quotes of its items itself.
        value = option.read(text if option.read is listed else unquoted(text))
    except ValueError as error:
        raise UsageError(f"{option.name} {unquoted(text)} {error}; write {option.name} {option.form}.") from None
    if value in ("", []):
        raise UsageError(f"{option.name} needs a value; write {option.name} {option.form}.")
    if option.repeated:
        earlier = options.get(option.name, [])
        assert isinstance(earlier, list)
        options[option.name] = earlier + (value if isinstance(value, list) else [value])
    else:
        options[option.name] = value


# --------------------------------------------------------------------------------------------- kinds of variables
# The class is asked, not the object, which might answer any question with code of its own.
def is_frame(value: object) -> bool:
    """Whether a value is a table or a series, or can become one."""
    return hasattr(type(value), "iloc") or hasattr(type(value), "to_pandas")


def is_report(value: object) -> bool:
    """Whether a value is the report of a check."""
    return hasattr(type(value), "code") and (hasattr(type(value), "names") or "names" in getattr(value, "__dict__", ()))


def is_executor(value: object) -> bool:
    """Whether a value can run tasks for `--pool`."""
    return isinstance(value, Executor)


def label_of(text: str, labels: Sequence[Hashable]) -> Hashable:
    """Label that a typed name stands for: itself, or the only label that is written so (a number, say)."""
    if text in labels:
        return text
    written = [label for label in labels if str(label) == text]
    return written[0] if len(written) == 1 else text
