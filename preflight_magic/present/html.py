"""Cards as HTML that needs no script and no network, and still reads well when a host takes its styles away."""

from __future__ import annotations

import re
from functools import lru_cache
from importlib import resources
from typing import TYPE_CHECKING

from preflight_magic.model import Verdict
from preflight_magic.present import make_cards, words
from preflight_magic.present.alt import before_after_alt, roots_alt, spark_alt
from preflight_magic.present.markup import Markup, el, join, picture
from preflight_magic.present.rung_html import ladder

if TYPE_CHECKING:
    from preflight_magic.present.cards import Card, OverviewCard, OverviewRow, StepMark
    from preflight_magic.present.contract import ReportView

PICTURE_WIDTH = 710
ARROW = " \u2192 "

# The old command first: the newer one is refused on plain http and inside frames of another host.
_COPY = (
    "var b=this,c=b.parentNode.querySelector('pre').textContent,t=document.createElement('textarea'),d=false;"
    "function f(w){b.textContent=w;setTimeout(function(){b.textContent='Copy'},2000)}"
    "t.value=c;t.style.position='fixed';t.style.opacity='0';document.body.appendChild(t);t.select();"
    "try{d=document.execCommand('copy')}catch(e){}document.body.removeChild(t);b.focus();"
    "if(d)f('Copied');else if(navigator.clipboard)navigator.clipboard.writeText(c).then(function(){f('Copied')},"
    "function(){f('Select it below')});else f('Select it below');"
)
# Runs where handlers run: shows the Copy button and opens again what was open before the card was drawn anew.
_REVIVE = (
    "var b=this.closest('.pfm-body'),o=window.pfmOpen||{};if(b){"
    "b.querySelectorAll('.pfm-copy').forEach(function(x){x.hidden=false});"
    "b.querySelectorAll('details[id]').forEach(function(d){if(d.id in o)d.open=o[d.id]})}"
)


@lru_cache(maxsize=1)
def style() -> Markup:
    """Style sheet of the cards as an element."""
    sheet = resources.files("preflight_magic.present").joinpath("style.css").read_text(encoding="utf-8")
    return Markup("<style>" + re.sub(r"/\*.*?\*/|\s*\n\s*", " ", sheet, flags=re.DOTALL).strip() + "</style>")


def card_html(card: Card, key: str = "card") -> Markup:
    """Whole card of one series, with its style sheet.

    Parameters
    ----------
    card : Card
    key : str
        Tells this card from others on the same page.
    """
    return join([style(), head(card), body(card, key)])


# ---------------------------------------------------------------------------------------------------- the top
def head(card: Card) -> Markup:
    """Name, verdict, answer and plan."""
    full, name = words.name_text(card.name), words.name_text(card.name, 120)
    meaning = el("span", words.MEANINGS[card.verdict], class_="pfm-faint")
    switched = " You have switched steps; this is not the recommended plan." if card.switched else None
    return el(
        "div",
        el("h3", name, class_="pfm-name", title=full if full != name else None),
        el("p", verdict(card.verdict), " ", meaning, class_="pfm-says"),
        el("p", card.problem or card.answer, class_="pfm-answer"),
        None if card.problem else el("p", el("b", "Plan: "), _chain(card), class_="pfm-plan"),
        el("p", f"{card.span}.", switched, class_="pfm-faint"),
        class_="pfm pfm-head",
    )


def verdict(value: Verdict) -> Markup:
    """Shape and word of a verdict."""
    shape = el("span", words.SHAPES[value], class_=f"pfm-shape pfm-{value}")
    return el("b", shape, " ", value, class_="pfm-verdict")


def _chain(card: Card) -> Markup:
    links = [el("span", "as given", class_="pfm-faint")]
    links += [el("span", mark.text, class_="pfm-step", title=mark.meaning) for mark in card.repairs]
    links += [_link(mark) for mark in card.steps]
    if len(links) == 1:
        return join(["as given, without steps"])
    return join([links[0], *(join([ARROW, link]) for link in links[1:])])


def _link(mark: StepMark) -> Markup:
    if mark.state == "left out":
        return join([el("s", mark.text, class_="pfm-step", title=mark.meaning), " (left out)"])
    text = el("span", mark.text, class_="pfm-step", title=mark.meaning)
    return join([text, " (put in)"]) if mark.state == "put in" else text


# --------------------------------------------------------------------------------------------------- the rest
def body(card: Card, key: str = "card") -> Markup:
    """Pictures, ladder, candidate plans, code and caution."""
    return el(
        "div",
        _pictures(card),
        ladder(card, key),
        _plans(card, key),
        _code(card),
        el("p", words.CAUTION, class_="pfm-caution"),
        class_="pfm pfm-body",
    )


def _pictures(card: Card) -> Markup:
    from preflight_magic.present.figures import before_after
    from preflight_magic.present.roots_figure import roots_strip

    parts: list[Markup] = []
    if card.picture is not None:
        image = picture(before_after(card.picture), before_after_alt(card.picture), PICTURE_WIDTH, onload=_REVIVE)
        parts.append(el("p", image, class_="pfm-figure"))
    if card.roots is not None:
        parts.append(el("p", f"Roots of {card.roots.order}, fitted to the series after the plan. {_notes(card)}",
                        class_="pfm-caption"))  # fmt: skip
        if card.roots.roots:
            image = picture(roots_strip(card.roots), roots_alt(card.roots), PICTURE_WIDTH, "pfm-roots")
            parts.append(el("p", image, class_="pfm-figure"))
    return join(parts)


def _notes(card: Card) -> str:
    if card.roots is None or not card.roots.notes:
        return ""
    told = "; ".join(f"{label} {value}" for label, value in card.roots.notes)
    return told[0].upper() + told[1:] + "."


def _plans(card: Card, key: str) -> Markup | None:
    if not card.plans:
        return None
    rows = []
    for row in card.plans:
        plan = el("td", el("b", row.text), " (shown)") if row.shown else el("td", row.text)
        rows.append(el("tr", plan, el("td", row.odds)))
    header = el("thead", el("tr", el("th", "plan", scope="col"), el("th", "odds of the best against it", scope="col")))
    return el(
        "details",
        el("summary", "Plans that were compared, and the odds against each"),
        el("table", header, el("tbody", rows), class_="pfm-table"),
        class_="pfm-more",
        id=f"pfm-{key}-plans",
        open=card.verdict == "inconclusive",
        ontoggle="(window.pfmOpen=window.pfmOpen||{})[this.id]=this.open",
    )


def _code(card: Card) -> Markup | None:
    if card.code_problem:
        return join([el("h4", "Code"), el("p", card.code_problem, class_="pfm-problem")])
    if card.code is None:
        return None
    copy = el("button", "Copy", type="button", class_="pfm-copy", onclick=_COPY, hidden=card.picture is not None,
              title="Copy the code")  # fmt: skip
    hint = el("span", " One click in the code selects all of it.", class_="pfm-faint")
    block = el("pre", card.code, class_="pfm-code", style="user-select: all", tabindex="0")
    return el("div", el("h4", "Code"), copy, hint, block, class_="pfm-codebox")


# --------------------------------------------------------------------------------------------------- overview
def overview_html(card: OverviewCard) -> Markup:
    """Table of all series with its style sheet."""
    return join([style(), overview(card)])


def overview(card: OverviewCard, linked: bool = False) -> Markup:
    """Table of all series: name, small picture, verdict, and plan with what each rung says."""
    from preflight_magic.present.figures import sparklines

    pictures = sparklines([row.values for row in card.rows])
    heads = [el("th", text, scope="col") for text in ("series", "", "verdict", "plan")]
    links = [f"#pfm-series-{i}" if linked else None for i in range(len(card.rows))]
    rows = [_row(*parts) for parts in zip(card.rows, pictures, links, strict=True)]
    more = f"and {card.left_out:,} more; report.overview holds them all" if card.left_out else None
    return el(
        "div",
        el("p", _summary(card), class_="pfm-summary"),
        el("table", el("thead", el("tr", heads)), el("tbody", rows), class_="pfm-table pfm-overview"),
        el("p", more, class_="pfm-faint") if more else None,
        el("p", card.together, class_="pfm-together") if card.together else None,
        class_="pfm pfm-many",
    )


def _summary(card: OverviewCard) -> Markup:
    total = sum(count for _, count in card.counts)
    parts = [join([f"{count:,} ", verdict(value)]) for value, count in card.counts]
    return join([f"{total:,} series: ", parts[:1], *([", ", part] for part in parts[1:])])


def _row(row: OverviewRow, png: bytes, link: str | None) -> Markup:
    full, name = words.name_text(row.name), words.name_text(row.name, 40)
    shown = el("a", name, href=link) if link else name
    said = [el("li", question, " ", verdict(value), ". ", headline) for question, value, headline in row.rungs]
    plan = el("details", el("summary", row.plan), el("ul", said)) if said else row.plan
    return el(
        "tr",
        el("th", shown, scope="row", title=full if full != name else None),
        el("td", picture(png, spark_alt(row), 120, "pfm-spark"), class_="pfm-spark"),
        el("td", verdict(row.verdict)),
        el("td", plan, el("div", words.sentence(row.note), class_="pfm-faint") if row.note else None),
    )


# --------------------------------------------------------------------------------------------- a file by itself
def page(report: ReportView, title: str = "Series checked before forecasting") -> str:
    """Self-contained HTML document: overview and every card.

    Parameters
    ----------
    report : ReportView
    title : str
    """
    views = [report[name] for name in report.names]
    sections = [
        el("section", head(one), body(one, str(i)), id=f"pfm-series-{i}")
        for i, one in enumerate(make_cards.card(view) for view in views)
    ]
    everything = el(
        "main",
        el("h2", title, class_="pfm-title"),
        overview(make_cards.overview(report, limit=None), linked=True) if len(views) > 1 else None,
        sections,
        class_="pfm-page",
    )
    opened = "document.querySelectorAll('details').forEach(function(d){d.open=true})"
    start = (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
        '<meta name="viewport" content="width=device-width, initial-scale=1">'
    )
    return f"{start}{el('title', title)}{style()}</head>{el('body', everything, onbeforeprint=opened)}</html>\n"
