"""The ladder as HTML: one rung opens on demand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.markup import Markup, el, join
from preflight_magic.present.more_html import REMEMBER

if TYPE_CHECKING:
    from preflight_magic.present.cards import Card, RungCard, TestRow


def ladder(card: Card, key: str) -> Markup | None:
    """All rungs in order, closed."""
    if not card.rungs:
        return None
    rungs = el("div", [_rung(rung, key) for rung in card.rungs], class_="pfm-ladder")
    return join([el("h4", "The ladder, question by question"), rungs])


def _rung(rung: RungCard, key: str) -> Markup:
    shape = el("span", words.SHAPES[rung.verdict], class_=f"pfm-shape pfm-{rung.verdict}")
    summary = el(
        "summary",
        el("span", f"{rung.position} ", class_="pfm-number"),
        el("span", rung.question, class_="pfm-question"), " ",
        el("b", rung.headline, class_="pfm-headline"), " ",
        el("span", shape, f" {rung.verdict}", el("small", " (changed)") if rung.before else None, class_="pfm-word"),
    )  # fmt: skip
    return el(
        "details",
        summary,
        el("div", _inside(rung), class_="pfm-inside"),
        class_="pfm-rung" if rung.verdict == "clear" else "pfm-rung pfm-speaks",
        id=f"pfm-{key}-rung-{rung.position}",
        ontoggle=REMEMBER,
    )


def _inside(rung: RungCard) -> Markup:
    steps = f"Proposes: {', '.join(rung.steps)}." if rung.steps else None
    return join(
        [
            el("p", rung.reason) if rung.reason else None,
            el("p", el("b", steps)) if steps else None,
            el("p", f"With the recommended plan: {rung.before}.", class_="pfm-faint") if rung.before else None,
            _tests(rung.tests) if rung.tests else None,
            _measures(rung.measures) if rung.measures else None,
            _how(rung),
        ]
    )


def _tests(tests: tuple[TestRow, ...]) -> Markup:
    heads = [el("th", text, scope="col") for text in ("test", "null hypothesis", "statistic", "p-value")]
    rows = []
    for place, test in enumerate(tests):
        if test.series and (place == 0 or test.series != tests[place - 1].series):
            rows.append(el("tr", el("th", f"Series: {test.series}", colspan=4, scope="colgroup"), class_="pfm-group"))
        name = el("th", test.test, el("br"), el("small", test.details, class_="pfm-faint"), scope="row")
        figures = [el("td", told, class_="pfm-figures") for told in (test.statistic, test.p)]
        rows.append(el("tr", name, el("td", test.null), figures))
    return el("table", el("thead", el("tr", heads)), el("tbody", rows), class_="pfm-table pfm-tests")


def _measures(measures: tuple[tuple[str, str], ...]) -> Markup:
    rows = [el("tr", el("th", label, scope="row"), el("td", value)) for label, value in measures]
    return el("table", el("tbody", rows), class_="pfm-table pfm-measures")


def _how(rung: RungCard) -> Markup | None:
    if not rung.method:
        return None
    sources = el("p", f"Sources: {'; '.join(rung.sources)}.", class_="pfm-faint") if rung.sources else None
    return el("details", el("summary", "How this is decided"), el("p", rung.method), sources, class_="pfm-how")
