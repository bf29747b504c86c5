"""Text keeps within its width and holds every finding."""

import pytest

from preflight_magic.plan.plan import Plan
from preflight_magic.present import make_cards, make_overview, text, words
from tests.present.fakes import FakeReport, FakeSeries

NAMES = ["passengers", "漢字" * 60, "🚢" * 90, "x" * 200, ("a\nb", "c"), "<script>"]


@pytest.mark.parametrize("width", [40, 60, 80, 100])
@pytest.mark.parametrize("name", NAMES)
def test_width_is_respected(name: object, width: int) -> None:
    view = FakeSeries(name=name, answer="An answer with averyveryvery" + "long" * 30 + " word in it.")
    lines = text.card_text(make_cards.card(view), width).split("\n")
    lines += text.overview_text(make_overview.overview(FakeReport(FakeSeries(), view)), width).split("\n")
    assert max(words.width_of(line) for line in lines) <= width
    assert not any(line != line.rstrip() for line in lines)


def test_text_holds_every_finding() -> None:
    view = FakeSeries()
    told = " ".join(text.card_text(make_cards.card(view), 80).split())
    for finding in view.findings.values():
        assert finding.question in told
        assert f"{finding.verdict}: {finding.headline}" in told
    for part in ("◆ transform", view.answer, "log → difference 12", "at most 0.010", "critical values", "4.1 to 1"):
        assert part in told
    assert "Sources" not in told


def test_text_tells_switched_steps_and_problems() -> None:
    view = FakeSeries()
    told = text.card_text(make_cards.card(view.leave_out(view.plan.steps[0]), view), 80)
    assert "log (left out)" in told
    told = " ".join(told.split())
    assert "plan: log, difference 12, difference 1 → difference 12, difference 1 odds" in told
    assert "With the recommended plan: ◆ transform: Take logs." in told
    infeasible = FakeSeries(problem="No values.", verdict="infeasible", plan=Plan(), recommended=Plan())
    told = text.card_text(make_cards.card(infeasible), 80)
    assert "No values." in told
    assert "Plan:" not in told


def test_overview_lines_up() -> None:
    lines = text.overview_text(make_overview.overview(FakeReport(FakeSeries(), FakeSeries(name="fuel"))), 80).split(
        "\n"
    )
    assert lines[0] == "2 series: 2 ◆ transform"
    assert lines[1].index("verdict") == lines[2].index("◆") == lines[3].index("◆")


def test_a_no_break_space_holds() -> None:
    assert text.wrap("up to 5\u00a0% of it", 8) == ["up to", "5\u00a0% of", "it"]


def test_words_longer_than_a_line_are_broken() -> None:
    assert text.wrap("a bcdefghij k", 4, "- ") == ["- a", "  bc", "  de", "  fg", "  hi", "  j", "  k"]


def test_a_long_name_is_cut_after_a_hyphen() -> None:
    assert text.wrap("Harvey-Leybourne-Taylor trend test", 18) == ["Harvey-Leybourne-", "Taylor trend test"]
    assert text.wrap("abcdefghij", 4) == ["abcd", "efgh", "ij"]
