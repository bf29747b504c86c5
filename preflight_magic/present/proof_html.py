"""A proof as HTML: what follows, the errors drawn, and the table."""

from __future__ import annotations

from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.alt import proof_alt
from preflight_magic.present.markup import Markup, el, join, picture

if TYPE_CHECKING:
    from preflight_magic.present.cards import ProofCard

PICTURE_WIDTH = 710


def proof_html(proof: ProofCard) -> Markup:
    """Forecasts from the past; a proof decides nothing, and says so."""
    title = el("h4", "Forecasts from the past")
    if proof.problem is not None:
        return join([title, el("p", proof.problem, class_="pfm-problem")])
    from preflight_magic.present.proof_figure import errors_strip

    image = picture(errors_strip(proof), proof_alt(proof), PICTURE_WIDTH, "pfm-proof")
    heads = ("forecast", "error", "over that of the plan", "inside the 90 % interval", "p-value against the plan")
    rows = [
        el("tr", el("th", row.forecast, scope="row"), [el("td", told, class_="pfm-figures") for told in figures])
        for row in proof.rows
        for figures in [(words.number(row.error), row.ratio, row.coverage, row.p)]
    ]
    table = el(
        "table",
        el("thead", el("tr", [el("th", text, scope="col") for text in heads])),
        el("tbody", rows),
        class_="pfm-table pfm-errors",
    )
    return join(
        [
            title,
            el("p", " ".join(proof.sentences)),
            el("p", image, class_="pfm-figure"),
            table,
            el("p", f"{words.sentence(proof.origins)}. It decides nothing.", class_="pfm-faint"),
        ]
    )
