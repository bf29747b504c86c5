"""A place in a record that is being read: what stands there is asked for by kind, and refused in one sentence."""

from __future__ import annotations

import math
from collections.abc import Collection, Hashable, Iterator
from dataclasses import dataclass
from typing import Any

from preflight_magic.model import CheckError
from preflight_magic.record.tags import BadTagError, decode


@dataclass(frozen=True)
class Node:
    """A JSON value and where it stands; `file` names the record."""

    value: object
    file: str
    place: str = ""

    def refuse(self, seen: str) -> CheckError:
        """Error that says what was seen here."""
        where = f"{self.place} " if self.place else "what it holds "
        return CheckError(f"The record '{self.file}' is damaged: {where}{seen}; save the report again.")

    # ----------------------------------------------------------------------------------------- containers
    def fields(self, names: Collection[str]) -> dict[str, Node]:
        """Values of an object that has these keys and no others."""
        if not isinstance(self.value, dict):
            raise self.refuse("is not an object")
        missing = [name for name in names if name not in self.value]
        if missing:
            raise self.refuse(f"has no '{missing[0]}'")
        unknown = [name for name in self.value if name not in names]
        if unknown:
            raise self.refuse(f"has {_short(unknown[0])}, which is not known")
        return {name: self._below(f".{name}" if self.place else name, self.value[name]) for name in names}

    def entries(self) -> Iterator[tuple[str, Node]]:
        """Keys and values of an object with keys of any kind."""
        if not isinstance(self.value, dict):
            raise self.refuse("is not an object")
        for key, value in self.value.items():
            yield key, self._below(f"[{_short(key)}]", value)

    def items(self) -> Iterator[Node]:
        """Values of a list."""
        if not isinstance(self.value, list):
            raise self.refuse("is not a list")
        for position, value in enumerate(self.value):
            yield self._below(f"[{position}]", value)

    def _below(self, step: str, value: object) -> Node:
        return Node(value, self.file, self.place + step)

    # --------------------------------------------------------------------------------------------- values
    def text(self) -> str:
        """Text."""
        if not isinstance(self.value, str):
            raise self.refuse("is not text")
        return self.value

    def text_or_none(self) -> str | None:
        """Text, or nothing."""
        return None if self.value is None else self.text()

    def one_of(self, words: Collection[str]) -> str:
        """One of some words."""
        found = self.text()
        if found not in words:
            raise self.refuse(f"is {_short(found)}, not one of {', '.join(words)}")
        return found

    def yes_or_no(self) -> bool:
        """True or false."""
        if not isinstance(self.value, bool):
            raise self.refuse("is neither true nor false")
        return self.value

    def whole(self, least: int = 0) -> int:
        """Whole number from `least` up."""
        if not isinstance(self.value, int) or isinstance(self.value, bool) or self.value < least:
            raise self.refuse(f"is not a whole number of at least {least}")
        return self.value

    def number(self, least: float = -math.inf, most: float = math.inf) -> float:
        """Number between two bounds, or NaN."""
        found = self.plain()
        if not isinstance(found, int | float) or isinstance(found, bool):
            raise self.refuse("is not a number")
        if found < least or found > most:
            raise self.refuse(f"is {found}, not between {least:g} and {most:g}")
        return float(found)

    def plain(self) -> Any:
        """Any value that a record can hold."""
        try:
            return decode(self.value)
        except BadTagError as error:
            raise self.refuse(str(error)) from None

    def label(self) -> Hashable:
        """Value that can be a name."""
        found: Hashable = self.plain()
        try:
            hash(found)
        except TypeError:
            raise self.refuse("cannot be a name") from None
        return found


def _short(text: str) -> str:
    told = repr(text)
    return told if len(told) <= 40 else f"{told[:37]}..."
