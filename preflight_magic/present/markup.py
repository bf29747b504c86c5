"""HTML made of elements: whatever is not markup already is escaped, so nothing can be forgotten."""

from __future__ import annotations

import base64
import html
from collections.abc import Iterable

_VOID = frozenset({"br", "hr", "img", "meta"})


class Markup(str):
    """Text that is HTML already."""

    __slots__ = ()


Child = str | None | Iterable["Child"]


def el(tag: str, *children: Child, **attributes: str | int | bool | None) -> Markup:
    """Element with children and attributes.

    Strings are escaped unless they are `Markup`; None is left out; sequences are flattened. A trailing underscore of
    an attribute's name is dropped and others become hyphens; True gives an attribute its own name as value.
    """
    told = "".join(_attribute(name, value) for name, value in attributes.items())
    if tag in _VOID:
        return Markup(f"<{tag}{told}>")
    return Markup(f"<{tag}{told}>{join(children)}</{tag}>")


def join(children: Iterable[Child]) -> Markup:
    """Children one after another, escaped where they are not markup."""
    return Markup("".join(_text(child) for child in children))


def _text(child: Child) -> str:
    if child is None:
        return ""
    if isinstance(child, Markup):
        return str(child)
    if isinstance(child, str):
        return html.escape(child.encode("utf-8", "replace").decode("utf-8"))
    return join(child)


def _attribute(name: str, value: str | int | bool | None) -> str:
    if value is None or value is False:
        return ""
    name = name.rstrip("_").replace("_", "-")
    # An attribute without a value is dropped by some hosts that clean markup.
    return f' {name}="{name if value is True else html.escape(str(value), quote=True)}"'


def picture(png: bytes, alt: str, width: int, extra: str = "", onload: str | None = None) -> Markup:
    """Image that needs no file. White behind it where no style sheet says otherwise, for hosts with a dark theme."""
    source = "data:image/png;base64," + base64.b64encode(png).decode("ascii")
    style = "background-color:#ffffff"
    return el(
        "img", src=source, alt=alt, width=width, class_=f"pfm-picture {extra}".strip(), style=style, onload=onload
    )
