"""The overview of a report as HTML: one row a series."""

from __future__ import annotations

from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.alt import spark_alts
from preflight_magic.present.markup import Markup, el, join, picture
from preflight_magic.present.sparks import spark

if TYPE_CHECKING:
    from preflight_magic.model import Verdict
    from preflight_magic.present.cards import OverviewCard, OverviewRow

SPARK_WIDTH = 100
# Speaks to the selector of the same display; where there is none, nothing happens.
_OPEN = (
    "var a=document.querySelector('.{key} select'),r=this;if(a){{a.selectedIndex={row};"
    "a.dispatchEvent(new Event('change',{{bubbles:true}}));"
    "setTimeout(function(){{var h=document.querySelector('.pfm-head.{key}');"
    "if(h)h.scrollIntoView({{block:'nearest'}})}},700)}}"
)


def verdict(value: Verdict) -> Markup:
    """Shape and word of a verdict."""
    shape = el("span", words.SHAPES[value], class_=f"pfm-shape pfm-{value}", aria_hidden="true")
    return el("b", shape, " ", value, class_="pfm-verdict")


def overview(card: OverviewCard, linked: bool = False, key: str | None = None) -> Markup:
    """Table of series: name, small pictures, verdict, and plan with what each rung says.

    Parameters
    ----------
    card : OverviewCard
    linked : bool
        Names are links to the cards of the same page.
    key : str, optional
        Class of the selector by which a name opens its card, where there is one.
    """
    heads = [el("th", text, scope="col") for text in ("series", "as given", "after the plan", "verdict", "plan")]
    rows = [_row(row, i, linked, key) for i, row in enumerate(card.rows)]
    table = el("table", el("thead", el("tr", heads)), el("tbody", rows), class_="pfm-table pfm-overview")
    return el(
        "div",
        el("p", _summary(card), class_="pfm-summary"),
        table if rows else el("p", "No series is like that; ask for another name or verdict."),
        el("p", card.part, class_="pfm-faint") if rows else None,
        el("p", card.together, class_="pfm-together") if card.together else None,
        class_="pfm pfm-many",
    )


def _summary(card: OverviewCard) -> Markup:
    total = sum(count for _, count in card.counts)
    parts = [join([f"{count:,} ", verdict(value)]) for value, count in card.counts]
    return join([f"{total:,} series: ", parts[:1], *([", ", part] for part in parts[1:])])


def _row(row: OverviewRow, place: int, linked: bool, key: str | None) -> Markup:
    full, name = words.name_text(row.name), words.name_text(row.name, 40)
    shown: list[Markup | str] = [el("a", name, href=f"#pfm-series-{row.position}")] if linked else [name]
    if key is not None:
        handler = _OPEN.format(key=key, row=place)
        button = el("button", name, type="button", class_="pfm-open", hidden=True, onclick=handler)
        shown = [el("span", name, class_="pfm-closed"), button]
    said = [el("li", question, " ", verdict(value), ": ", headline) for question, value, headline in row.rungs]
    plan = el("details", el("summary", row.plan), el("ul", said)) if said else row.plan
    before, after = spark_alts(row)
    small = el("td", picture(spark(row.after), after, SPARK_WIDTH, "pfm-spark")) if row.after is not None else el("td")
    return el(
        "tr",
        el("th", shown, scope="row", title=full if full != name else None),
        el("td", picture(spark(row.values), before, SPARK_WIDTH, "pfm-spark")),
        small,
        el("td", verdict(row.verdict)),
        el("td", plan, el("div", words.sentence(row.note), class_="pfm-faint") if row.note else None),
    )
