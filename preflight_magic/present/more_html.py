"""The pictures that open on demand, each under a line that says what it shows."""

from __future__ import annotations

from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.alt import halves_alt, plans_alt, roots_alt
from preflight_magic.present.markup import Child, Markup, el, join, picture

if TYPE_CHECKING:
    from preflight_magic.present.cards import Card

PICTURE_WIDTH = 710
_SCALE = (
    "From odds of 3, 20 and 150 to 1 on, evidence is called positive, strong and very strong (Kass and Raftery 1995)."
)
REMEMBER = "(window.pfmOpen=window.pfmOpen||{})[this.id]=this.open"


def more_pictures(card: Card, key: str) -> Markup | None:
    """How clear the decision was, the roots, and the two halves."""
    parts = [part for part in (_plans(card, key), _roots(card, key), _halves(card, key)) if part is not None]
    return el("div", parts, class_="pfm-pictures") if parts else None


def _opening(title: str, gist: str, key: str, children: Child, is_open: bool = False) -> Markup:
    return el(
        "details",
        el("summary", el("b", title), " ", el("span", gist, class_="pfm-gist")),
        el("div", children, class_="pfm-inside"),
        class_="pfm-more",
        id=f"pfm-{key}",
        open=is_open,
        ontoggle=REMEMBER,
    )


def _plans(card: Card, key: str) -> Markup | None:
    if not card.plans:
        return None
    from preflight_magic.present.plans_figure import plans_strip

    rows = []
    for row in card.plans:
        plan = el("td", el("b", row.text), " (shown)") if row.shown else el("td", row.text)
        rows.append(el("tr", plan, el("td", row.odds)))
    header = el("thead", el("tr", el("th", "plan", scope="col"), el("th", "odds of the best against it", scope="col")))
    image = picture(plans_strip(card.plans), plans_alt(card.plans), PICTURE_WIDTH, "pfm-plans")
    inside = [
        el("p", image, class_="pfm-figure"),
        el("p", _SCALE, class_="pfm-faint"),
        el("table", header, el("tbody", rows), class_="pfm-table"),
    ]
    return _opening(
        "How clear the decision was", _runner_up(card), f"{key}-plans", inside, card.verdict == "inconclusive"
    )


def _runner_up(card: Card) -> str:
    if len(card.plans) < 2:
        return "no other plan was compared"
    second = card.plans[1]
    return f"next best: {second.text}, {second.odds} against it"


def _roots(card: Card, key: str) -> Markup | None:
    if card.roots is None:
        return None
    from preflight_magic.present.roots_figure import roots_strip

    notes = "; ".join(f"{label} {value}" for label, value in card.roots.notes)
    inside: list[Markup] = [el("p", words.sentence(f"{notes}."))] if notes else []
    if card.roots.roots:
        image = picture(roots_strip(card.roots), roots_alt(card.roots), PICTURE_WIDTH, "pfm-roots")
        inside.insert(0, el("p", image, class_="pfm-figure"))
    return _opening("Roots of what remains", f"{card.roots.order}, {_headline(card, 'roots')}", f"{key}-roots", inside)


def _halves(card: Card, key: str) -> Markup | None:
    if card.halves is None:
        return None
    from preflight_magic.present.halves_figure import halves_picture

    image = picture(halves_picture(card.halves), halves_alt(card.halves), PICTURE_WIDTH, "pfm-halves")
    heads = [el("th", text, scope="col") for text in ("moment", "first half", "second half", "standard errors apart")]
    rows = [
        el("tr", el("th", name, scope="row"), [el("td", words.number(v), class_="pfm-figures") for v in values])
        for name, *values in card.halves.moments
    ]
    table = el("table", el("thead", el("tr", heads)), el("tbody", rows), class_="pfm-table")
    inside = join([el("p", image, class_="pfm-figure"), table])
    return _opening("The two halves", _headline(card, "halves"), f"{key}-halves", inside)


def _headline(card: Card, rung: str) -> str:
    found = next((one.headline for one in card.rungs if one.rung == rung), "")
    return found[:1].lower() + found[1:]
