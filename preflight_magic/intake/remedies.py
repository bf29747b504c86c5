"""What a person is told to do, in terms of what they passed: code that mends an index, options as they type them."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Literal

import pandas as pd

from preflight_magic.model import Calendar, CheckError

_PASSED = re.compile(
    r"""`[^`]*`|'[^']*'|"[^"]*"|\b(season|horizon|time|series|value|significance|target)=('[^']*'|"[^"]*"|-?\w[\w.]*)"""
)
"""Code and names in quotes, which stay as they are, or a parameter of the check with its value."""

Kind = Literal["dates", "periods", "numbers"]


@dataclass(frozen=True)
class Remedies:
    """Code that mends an index, in terms of what the person passed.

    `base` is an expression for the table with the time index as its index, and `also` is what to change in the call
    when it is used; `present`, `sort` and `unique` are statements about the table itself, `merge` and `zone` the ends
    of sentences. `stamps` is an expression for the stamps, where the person keeps them.
    """

    base: str = "frame"
    stamps: str = "frame.index"
    present: str = "frame = frame[frame.index.notna()]"
    sort: str = "frame = frame.sort_index()"
    unique: str = "frame = frame[~frame.index.duplicated()]"
    merge: str = "merge them with `frame = frame.groupby(level=0).sum()`, or mean() where they are levels"
    also: str = ""

    @property
    def zone(self) -> str:
        """What to do about local hours that repeat."""
        at = "" if self.stamps.endswith(".index") else ".dt"
        code = f"{self.stamps} = {self.stamps}{at}.tz_localize('Europe/Oslo', ambiguous='infer')"
        return f"give your own time zone, for example with `{code}`"

    def mend(self, code: str) -> str:
        """Write an expression that continues `base`, with what else to change."""
        return f"`{self.base}{code}`{self.also}"


def as_options(sentence: str) -> str:
    """Sentence in which parameters of the check are written as options: ``--season 12`` for ``season=12``."""

    def option(found: re.Match[str]) -> str:
        name, value = found.groups()
        if name is None:
            return found[0]
        return f"--{name} {value if ' ' in value else value.strip(chr(39) + chr(34))}"

    return _PASSED.sub(option, sentence)


class LacksStampsError(CheckError):
    """A known calendar that lacks stamps: `regular` has them all."""

    def __init__(self, message: str, calendar: Calendar, regular: pd.Index, kind: Kind) -> None:
        super().__init__(message)
        self.calendar, self.regular, self.kind = calendar, regular, kind
