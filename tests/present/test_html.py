"""HTML escapes everything, runs without scripts and holds every finding."""

import re
from html.parser import HTMLParser

import pytest

from preflight_magic.model import Difference, Finding
from preflight_magic.plan.plan import Plan
from preflight_magic.present import html, make_cards
from preflight_magic.present.cards import Card
from preflight_magic.present.markup import Markup, el, join
from tests.present.fakes import FakeReport, FakeSeries

HOSTILE = [
    "<script>alert(1)</script>",
    "a\"b'c",
    "line\nbreak",
    "🚢 ferry",
    "x" * 200,
    ("north", "<b>3</b>"),
    '"><img src=x onerror=alert(1)>',
    "</pre></details></div>",
    "$x$ \\(y\\) &amp;",
]
VOID = {"br", "hr", "img", "meta"}


class Reader(HTMLParser):
    """Elements, their attributes and their text; fails where an element is not closed."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.seen: list[tuple[str, dict[str, str | None]]] = []
        self.text: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.seen.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if "style" not in self.open:
            self.text.append(data)


def read(markup: str) -> Reader:
    reader = Reader()
    reader.feed(markup)
    reader.close()
    assert reader.open == []
    return reader


def whole(view: FakeSeries) -> Card:
    return make_cards.with_code(make_cards.card(view), view)


def shown(view: FakeSeries) -> Reader:
    return read(html.card_html(whole(view)))


@pytest.mark.parametrize("name", HOSTILE)
def test_names_are_escaped(name: object) -> None:
    plain, hostile = shown(FakeSeries()), shown(FakeSeries(name=name))
    assert [tag for tag, _ in hostile.seen] == [tag for tag, _ in plain.seen]
    handlers = [{key for key in attributes if key.startswith("on")} for _, attributes in hostile.seen]
    assert handlers == [{key for key in attributes if key.startswith("on")} for _, attributes in plain.seen]


@pytest.mark.parametrize("name", HOSTILE)
def test_overview_and_page_escape_names(name: object) -> None:
    reader = read(html.page(FakeReport(FakeSeries(), FakeSeries(name=name))).replace("<!DOCTYPE html>", ""))
    assert {tag for tag, _ in reader.seen}.isdisjoint({"script", "svg", "b3"})
    assert "onerror" not in {key for _, attributes in reader.seen for key in attributes}


class HostileSeries(FakeSeries):
    """Every sentence of its findings tries to be markup."""

    @property
    def findings(self) -> dict[str, Finding]:
        bad = "<script>alert('rung')</script>"
        return {bad: Finding(bad, bad, "clear", bad, bad, (), {bad: bad}, ())}

    @property
    def methods(self) -> dict[str, tuple[str, tuple[str, ...]]]:
        return {"<script>alert('rung')</script>": ("<script>", ("<script>",))}


def test_every_sentence_is_escaped() -> None:
    bad = "<script>alert(1)</script>"
    view = HostileSeries(answer=bad, noun=bad, alternatives=((bad, 0.0, ()),), source=bad)
    markup = html.card_html(whole(view))
    assert "<script" not in markup
    assert bad in "".join(read(markup).text)


def test_no_script_no_inline_svg_no_network() -> None:
    markup = html.page(FakeReport(FakeSeries(), FakeSeries(name="freight")))
    assert "<script" not in markup
    assert "<svg" not in markup
    assert not re.search(r"https?://|url\(|@import|<link", markup)


def test_pictures_have_alt_text_and_hold_themselves() -> None:
    images = [attributes for tag, attributes in shown(FakeSeries()).seen if tag == "img"]
    dot = images.pop()
    assert dot["alt"] == "", "what only starts the buttons is no picture"
    assert len(images) == 4
    for image in images:
        assert (image["src"] or "").startswith("data:image/png;base64,iVBOR")
        assert re.search(r"\d", image["alt"] or "")
        assert image["style"] == "background-color:#ffffff", "black ink stays legible without the style sheet"


def test_card_holds_every_finding() -> None:
    view = FakeSeries()
    text = "".join(shown(view).text)
    for finding in view.findings.values():
        assert finding.question in text
        assert finding.headline in text
    for part in ("◆ transform", view.answer, "log → difference 12 → difference 1", "at most 0.010", "Harville (1974)"):
        assert part in text
    assert view.code() in text
    assert "limited power" in text


def test_code_can_be_selected_and_copied() -> None:
    reader = shown(FakeSeries())
    pre = next(attributes for tag, attributes in reader.seen if tag == "pre")
    assert pre["style"] == "user-select: all"
    button = next(attributes for tag, attributes in reader.seen if tag == "button")
    handler = button["onclick"] or ""
    assert 0 < handler.index("execCommand") < handler.index("navigator.clipboard")
    assert "hidden" in button, "a dead button is not shown; a dot that loads shows it where handlers run"
    assert ".hidden=false" in ([a for t, a in reader.seen if t == "img"][-1]["onload"] or "")
    assert button["aria-label"] == "Copy: Code for pandas"


def test_ids_differ_between_series_of_a_page() -> None:
    reader = read(html.page(FakeReport(*(FakeSeries(name=i) for i in range(3)))).replace("<!DOCTYPE html>", ""))
    ids = [attributes["id"] for _, attributes in reader.seen if "id" in attributes]
    assert len(ids) == len(set(ids)) == 3 * 14


def test_steps_left_out_are_struck_and_told_in_words() -> None:
    view = FakeSeries()
    text = "".join(shown(view.leave_out(view.plan.steps[1])).text)
    assert "difference 12 (left out)" in text


def test_what_changed_stands_under_the_first_picture() -> None:
    view = FakeSeries()
    card = make_cards.card(view.leave_out(Difference(12)), view, "You left out 2020-03 to 2020-06.")
    reader = read(html.first(card))
    assert [tag for tag, _ in reader.seen if tag in ("img", "table")] == ["img", "table"]
    text = "".join(reader.text)
    assert "verdict on residuals" in text
    assert "◐ inconclusive: correlation left" in text
    assert "You left out 2020-03 to 2020-06." in html.head(card)
    assert "what changed" not in html.first(make_cards.card(view))


def test_infeasible_series_shows_its_reason() -> None:
    view = FakeSeries(problem="Column 'x' is <constant>.", verdict="infeasible", plan=Plan(), recommended=Plan())
    reader = shown(view)
    assert "Column 'x' is <constant>." in "".join(reader.text)
    assert "pre" not in [tag for tag, _ in reader.seen]


def test_compared_plans_stand_open_where_a_person_decides() -> None:
    def is_open(view: FakeSeries) -> bool:
        more = next(a for t, a in shown(view).seen if t == "details" and (a.get("id") or "").endswith("-plans"))
        return "open" in more

    assert is_open(FakeSeries(verdict="inconclusive"))
    assert not is_open(FakeSeries())


def test_elements_escape_what_is_not_markup() -> None:
    assert el("p", "<i>", Markup("<b>x</b>"), None, ["&", el("br")], title='"', hidden=True, id=None) == (
        '<p title="&quot;" hidden="hidden">&lt;i&gt;<b>x</b>&amp;<br></p>'
    )
    assert join(["\ud800"]) == "?"


def test_style_sheet_has_a_fallback_for_every_host_variable() -> None:
    sheet = html.style()
    assert "--jp-" in sheet
    assert re.findall(r"var\(--jp-[a-z0-9-]+\)", sheet) == []
    assert sheet.count("<") == 2
