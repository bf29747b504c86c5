"""Python literals and comments that no name or sentence can escape from."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Hashable

import numpy as np
import pandas as pd

from preflight_magic.stamps import is_midnight

WIDTH = 100


def plain(name: Hashable) -> Hashable:
    """Name of a series as a value that has a literal: any object that has none becomes the text it prints as."""
    if isinstance(name, np.generic):
        name = name.item()
    if type(name) is tuple:
        return tuple(plain(item) for item in name)
    if isinstance(name, str):
        return str.__str__(name)
    if isinstance(name, pd.Timestamp | pd.Period) or name is None or type(name) in (bool, int, complex, bytes):
        return name
    if type(name) is float and math.isfinite(name):
        return name
    return str.__str__(str(name))


def literal(name: Hashable) -> str:
    """Source of a name of a series, on one line; `plain` says which value it stands for."""
    value = plain(name)
    if isinstance(value, pd.Timestamp | pd.Period):
        return stamp_literal(value)
    if isinstance(value, tuple):
        items = ", ".join(literal(item) for item in value)
        return f"({items},)" if len(value) == 1 else f"({items})"
    return repr(value)


def stamp_literal(stamp: object) -> str:
    """Source of a stamp of a time index."""
    if isinstance(stamp, pd.Period):
        text = stamp.start_time.date().isoformat() if "/" in str(stamp) else str(stamp)
        return f'pd.Period("{text}", freq="{stamp.freqstr}")'
    if isinstance(stamp, pd.Timestamp):
        plain = stamp.tz is None and is_midnight(stamp)
        return f'pd.Timestamp("{stamp.date() if plain else stamp.isoformat()}")'
    return repr(int(stamp))  # type: ignore[call-overload]


def number(value: float) -> str:
    """Source of a number, without a decimal point where it is whole."""
    value = float(value)
    return str(int(value)) if value == int(value) and abs(value) < 1e15 else repr(value)


def key_lines(name: Hashable, value: str) -> list[str]:
    """Lines of one entry of a dict; text that is too long for a line is split into pieces that Python joins again."""
    line = f"    {literal(name)}: {value},"
    if len(line) <= WIDTH or not isinstance(name, str):
        return [line]
    # An escaped character takes two places, or ten where it cannot be printed.
    size = 40 if name.isprintable() else 8
    pieces = [str.__repr__(str(name)[at : at + size]) for at in range(0, len(name), size)]
    return ["    (", *(f"        {piece}" for piece in pieces), f"    ): {value},"]


def one_line(text: object) -> str:
    """Text on one line: line breaks, control and direction characters become spaces."""
    return " ".join("".join(c if c.isprintable() else " " for c in str(text)).split())


def comment(text: object, indent: int = 0) -> list[str]:
    """Comment lines that hold the text, wrapped at the width of the source."""
    prefix = " " * indent + "# "
    return textwrap.wrap(one_line(text), WIDTH, initial_indent=prefix, subsequent_indent=prefix) or [prefix.rstrip()]
