"""Cards as text and HTML, kept in files so that every change of what is shown is seen and read.

``python -m tests.golden.write`` from the root of the project writes the files anew; read the difference.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from pathlib import Path

from preflight_magic.model import Difference
from preflight_magic.plan.plan import Plan
from preflight_magic.present import html, make_cards, make_overview, text
from tests.present.fakes import FakeReport, FakeSeries

FOLDER = Path(__file__).parent
_BLOCKS = "div|details|summary|table|thead|tbody|tr|p|h3|h4|ul|li|pre|img"


def made() -> Mapping[str, str]:
    """File name to content."""
    view = FakeSeries()
    switched = make_cards.card(view.leave_out(Difference(12)), view, "You left out 2016-03 to 2016-05.")
    closed = FakeSeries(
        name=("north", "berth <3>"), problem="Column 'closed' has one value only.", verdict="infeasible", plan=Plan(),
        recommended=Plan(),
    )  # fmt: skip
    doubtful = FakeSeries(name="fuel", verdict="inconclusive")
    whole = make_cards.with_code(make_cards.card(view), view)
    many = make_overview.overview(FakeReport(view, closed, doubtful))
    return {
        "card.txt": text.card_text(make_cards.card(view), 80) + "\n",
        "card.html": readable(html.head(whole) + html.body(whole)),
        "switched.txt": text.card_text(switched, 80) + "\n",
        "switched.html": readable(html.head(switched) + html.first(switched)),
        "infeasible.txt": text.card_text(make_cards.card(closed), 80) + "\n",
        "overview.txt": text.overview_text(many, 80) + "\n",
        "narrow.txt": text.overview_text(many, 48) + "\n",
        "overview.html": readable(html.overview(many, key="pfm-shown-1")),
    }


def readable(markup: str) -> str:
    """Markup with a line for each block, and without the dots of the pictures."""
    markup = re.sub(r'src="data:image/(\w+);base64,[^"]*"', r'src="\1"', markup)
    return re.sub(rf"(?=<(?:{_BLOCKS})[ >])", "\n", markup).strip() + "\n"


if __name__ == "__main__":
    for name, content in made().items():
        (FOLDER / name).write_text(content, encoding="utf-8")
