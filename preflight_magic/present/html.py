"""Cards as HTML that needs no script and no network, and still reads well when a host takes its styles away."""

from __future__ import annotations

import re
from functools import lru_cache
from importlib import resources
from typing import TYPE_CHECKING

from preflight_magic.present import make_cards, make_overview, words
from preflight_magic.present.alt import before_after_alt
from preflight_magic.present.markup import Markup, el, join, picture
from preflight_magic.present.more_html import more_pictures
from preflight_magic.present.overview_html import overview, verdict
from preflight_magic.present.proof_html import proof_html
from preflight_magic.present.rung_html import ladder

if TYPE_CHECKING:
    from preflight_magic.present.cards import Card, CodeForm, OverviewCard, StepMark
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
# One transparent dot: an image that loads is the only place from which a display can start anything.
_DOT = "data:image/gif;base64,R0lGODlhAQABAIAAAAAAAP///yH5BAEAAAAALAAAAAABAAEAAAIBRAA7"


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
def head(card: Card, key: str = "") -> Markup:
    """Name, verdict, answer and plan; `key` is a class by which it is found."""
    full, name = words.name_text(card.name), words.name_text(card.name, 120)
    meaning = el("span", words.MEANINGS[card.verdict], class_="pfm-faint")
    return el(
        "div",
        el("h3", name, class_="pfm-name", title=full if full != name else None),
        el("p", verdict(card.verdict), " ", meaning, class_="pfm-says"),
        el("p", card.problem or card.answer, class_="pfm-answer"),
        None if card.problem else el("p", el("b", "Plan: "), _chain(card), class_="pfm-plan"),
        el("p", f"{card.span}.", class_="pfm-faint"),
        el("p", card.yours, class_="pfm-yours") if card.yours else None,
        class_=f"pfm pfm-head {key}".strip(),
    )


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
    """Everything below the top."""
    return join([first(card), rest(card, key)])


def first(card: Card) -> Markup:
    """The first picture, what a person's choice changed, and the proof where it was asked for."""
    from preflight_magic.present.figures import before_after

    image = None
    if card.picture is not None:
        image = picture(before_after(card.picture), before_after_alt(card.picture), PICTURE_WIDTH)
    figure = el("p", image, class_="pfm-figure") if image else None
    proof = None if card.proof is None else proof_html(card.proof)
    return el("div", figure, _changes(card), proof, class_="pfm pfm-body")


def _changes(card: Card) -> Markup | None:
    if not card.changes:
        return None
    heads = [el("th", text, scope="col") for text in ("what changed", "recommended", "yours")]
    rows = [el("tr", el("th", c.what, scope="row"), el("td", c.before), el("td", c.after)) for c in card.changes]
    return el("table", el("thead", el("tr", heads)), el("tbody", rows), class_="pfm-table pfm-changes")


def rest(card: Card, key: str = "card") -> Markup:
    """Further pictures, ladder, code and caution."""
    return el(
        "div",
        more_pictures(card, key),
        ladder(card, key),
        [_code(form) for form in card.codes],
        el("p", words.CAUTION, class_="pfm-caution"),
        el("img", src=_DOT, alt="", width=1, height=1, onload=_REVIVE),
        class_="pfm pfm-body",
    )


def _code(form: CodeForm) -> Markup:
    title = el("h4", form.title)
    if form.problem is not None:
        return join([title, el("p", form.problem, class_="pfm-problem")])
    copy = el("button", "Copy", type="button", class_="pfm-copy", onclick=_COPY, hidden=True,
              aria_label=f"Copy: {form.title}")  # fmt: skip
    hint = el("span", " One click in the code selects all of it.", class_="pfm-faint")
    block = el("pre", form.source, class_="pfm-code", style="user-select: all", tabindex="0", aria_label=form.title)
    return el("div", title, copy, hint, block, class_="pfm-codebox")


def overview_html(card: OverviewCard) -> Markup:
    """Table of series with its style sheet."""
    return join([style(), overview(card)])


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
        for i, one in enumerate(make_cards.with_code(make_cards.card(view), view) for view in views)
    ]
    everything = el(
        "main",
        el("h1", title, class_="pfm-title"),
        overview(make_overview.overview(report, limit=None), linked=True) if len(views) > 1 else None,
        el("h2", "Series by series", class_="pfm-title") if len(views) > 1 else None,
        sections,
        class_="pfm-page",
    )
    # On paper the pictures and the answers are open; how each question is decided would stand there for every series.
    opened = "document.querySelectorAll('.pfm-body details:not(.pfm-how)').forEach(function(d){d.open=true})"
    start = (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
        '<meta name="viewport" content="width=device-width, initial-scale=1">'
    )
    return f"{start}{el('title', title)}{style()}</head>{el('body', everything, onbeforeprint=opened)}</html>\n"
