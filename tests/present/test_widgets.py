"""Controls: what toggles call, what errors show, what closing leaves."""

import threading
import time
from collections.abc import Iterator
from typing import Any

import ipywidgets
import pytest
from IPython.core.interactiveshell import InteractiveShell

from preflight_magic.model import Difference, Log, RemoveTrend
from preflight_magic.plan.plan import Plan
from preflight_magic.present import registry, widgets
from preflight_magic.present.widgets import Controller
from tests.present.fakes import FakeReport, FakeSeries


class FakeKernel:
    """Knows which cell runs."""

    def __init__(self) -> None:
        self.cell: str | None = None
        self.run = ""

    def get_parent(self) -> dict[str, Any]:
        metadata = {"cellId": self.cell} if self.cell else {}
        return {"metadata": metadata, "header": {"msg_id": self.run}}


class FakeShell:
    """A shell with a kernel."""

    def __init__(self) -> None:
        self.kernel = FakeKernel()


class Handle:
    """A displayed bundle that can be drawn anew."""

    def __init__(self, bundle: dict[str, Any]) -> None:
        self.drawn = [bundle]

    def update(self, bundle: dict[str, Any], raw: bool) -> None:
        assert raw
        self.drawn.append(bundle)


@pytest.fixture
def displayed(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[Handle]]:
    made: list[Handle] = []

    def display(bundle: dict[str, Any], raw: bool, display_id: bool = False) -> Handle | None:
        assert raw
        made.append(Handle(bundle))
        return made[-1] if display_id else None

    monkeypatch.setattr("IPython.display.display", display)
    yield made
    registry.close_all()


@pytest.fixture
def kernel(monkeypatch: pytest.MonkeyPatch) -> FakeKernel:
    shell = FakeShell()
    monkeypatch.setattr("IPython.get_ipython", lambda: shell)
    return shell.kernel


def boxes(controller: Controller) -> list[ipywidgets.Checkbox]:
    return controller.card.controls.boxes


def message(controller: Controller) -> str:
    return str(controller.guard.message().value)


def fields(controller: Controller) -> dict[str, Any]:
    """The other changes, opened."""
    controller.card.controls._more.value = True
    return controller.card.controls._fields


def top(displayed: list[Handle]) -> Handle:
    """The upper part of the card: the last that was displayed before controls, first picture and rest."""
    return displayed[-4]


def test_card_is_plain_html_and_controls_are_blank_elsewhere(displayed: list[Handle]) -> None:
    controller = Controller(FakeSeries())
    controller.show()
    head, controls, first, rest = (handle.drawn[0] for handle in displayed)
    assert set(head) == set(first) == set(rest) == {"text/html", "text/plain"}
    assert "passengers" in head["text/html"]
    assert "log → difference 12" in head["text/plain"]
    assert first["text/html"].count("<img") == 1
    assert "<pre" in rest["text/html"]
    assert "application/vnd.jupyter.widget-view+json" in controls
    assert controls["text/html"].strip() == controls["text/plain"].strip() == ""


def test_switching_a_step_off_and_on(displayed: list[Handle]) -> None:
    view = FakeSeries()
    controller = Controller(view)
    controller.show()
    switch = boxes(controller)[1]
    assert switch.description == "difference 12"
    assert "12 months before" in switch.tooltip
    switch.value = False
    assert view.calls == [("with_plan", (Log(), Difference(1)))]
    assert controller.view.plan.steps == (Log(), Difference(1))
    for place in (0, 2, 3):
        assert len(displayed[place].drawn) == 2
        assert displayed[place].drawn[0] != displayed[place].drawn[1]
    assert "difference 12 (left out)" in displayed[0].drawn[1]["text/plain"]
    assert "verdict on residuals" in displayed[2].drawn[1]["text/html"]
    switch.value = True
    assert controller.view.plan == view.plan
    assert len(view.calls) == 1, "a card that was made is kept"
    assert displayed[3].drawn[2] == displayed[3].drawn[0]
    assert "what changed" not in displayed[2].drawn[2]["text/html"]


def test_a_series_switched_before_it_was_shown(displayed: list[Handle]) -> None:
    view = FakeSeries()
    controller = Controller(view.leave_out(Difference(12)))
    controller.show()
    assert "verdict on residuals" in displayed[2].drawn[0]["text/html"], "it is compared with the recommendation"
    switch = next(b for b in boxes(controller) if b.description == "difference 12")
    assert switch.value is False
    switch.value = True
    assert controller.view.plan == view.plan
    assert controller.card.controls._back.disabled


def test_back_to_the_recommendation(displayed: list[Handle]) -> None:
    controller = Controller(FakeSeries())
    controller.show()
    back = controller.card.controls._back
    assert back.disabled
    for box in boxes(controller):
        box.value = False
    assert controller.view.plan.steps == ()
    assert not back.disabled
    back.click()
    assert controller.view.plan == controller.view.recommended
    assert all(box.value for box in boxes(controller))
    assert back.disabled


def test_putting_in_a_step(displayed: list[Handle]) -> None:
    controller = Controller(FakeSeries())
    controller.show()
    put_in = fields(controller)["put in"]
    offered = {label: step for label, step in put_in.options if step != ""}
    assert "remove trend: a straight line subtracted" in offered
    assert Log() not in offered.values()
    put_in.value = RemoveTrend()
    assert controller.view.plan.steps == (Log(), Difference(12), Difference(1), RemoveTrend())
    assert [box.description for box in boxes(controller)][-1] == "remove trend"
    assert put_in.value == ""
    assert RemoveTrend() not in [step for _, step in put_in.options]
    boxes(controller)[-1].value = False
    assert [box.description for box in boxes(controller)][-1] == "remove trend", "what was asked for stays offered"
    assert controller.view.plan == controller.view.recommended
    controller.card.controls._back.click()
    assert controller.card.controls._back.disabled


def test_taking_a_plan_that_was_compared(displayed: list[Handle]) -> None:
    controller = Controller(FakeSeries())
    controller.show()
    take = fields(controller)["take"]
    labels = [label for label, _ in take.options]
    assert labels[1:3] == ["log, difference 12, difference 1 (best)", "log, difference 12 (4.1 to 1 against it)"]
    assert take.value == (Log(), Difference(12), Difference(1))
    take.value = (Log(), Difference(12))
    assert controller.view.plan.steps == (Log(), Difference(12))
    assert [box.value for box in boxes(controller)] == [True, True, False]
    boxes(controller)[0].value = False
    assert take.value == "", "none of the plans compared"


def test_another_season(displayed: list[Handle]) -> None:
    view = FakeSeries()
    controller = Controller(view)
    controller.show()
    season = fields(controller)["season"]
    assert season.value == "12"
    season.value = "4"
    assert view.calls[0] == ("with_season", (4,))
    assert controller.view.season == (4,)
    assert "You chose the season: 4, where the check took 12." in displayed[0].drawn[-1]["text/plain"]
    assert [box.description for box in boxes(controller)] == ["log", "difference 12", "difference 1"]
    season.value = "many"
    assert "is no season" in message(controller)
    assert season.value == "4", "the field tells what is shown"
    controller.card.controls._back.click()
    assert controller.view.season == (12,)
    assert season.value == "12"


def test_a_span_left_out(displayed: list[Handle]) -> None:
    view = FakeSeries()
    controller = Controller(view)
    controller.show()
    span = fields(controller)["span"]
    assert span.placeholder == "2019-05..2019-07"
    span.value = "2016-03..2016-05"
    assert view.calls[0] == ("without_span", ("2016-03", "2016-05"))
    assert controller.view.series.isna().sum() == 5
    assert "You left out 2016-03 to 2016-05." in displayed[0].drawn[-1]["text/plain"]
    assert span.value == ""
    boxes(controller)[1].value = False
    assert controller.view.series.isna().sum() == 5, "the span stays left out when a step is switched"
    assert controller.view.plan.steps == (Log(), Difference(1))
    controller.card.controls._back.click()
    assert controller.view is view


def test_a_proof_when_asked_for(displayed: list[Handle]) -> None:
    view = FakeSeries()
    controller = Controller(view)
    controller.show()
    prove = controller.card.controls._prove
    assert view.calls == [], "nothing is computed unasked"
    prove.click()
    assert view.calls == [("proof", view.plan.steps)]
    assert "Forecasts from the past" in displayed[2].drawn[-1]["text/html"]
    assert "Without the log the error is 12" in displayed[0].drawn[-1]["text/plain"]
    assert prove.disabled
    boxes(controller)[1].value = False
    assert not prove.disabled
    assert "hold-out error" not in displayed[2].drawn[-1]["text/html"]
    prove.click()
    assert "hold-out error, mean absolute scaled: 0.8 → 1.3" in displayed[0].drawn[-1]["text/plain"]
    boxes(controller)[1].value = True
    assert "Forecasts from the past" in displayed[2].drawn[-1]["text/html"], "a proof that was made is kept"
    assert prove.disabled


def test_other_changes_are_open_where_a_person_decides(displayed: list[Handle]) -> None:
    assert Controller(FakeSeries(verdict="inconclusive")).card.controls._others.children
    assert not Controller(FakeSeries()).card.controls._others.children


def test_a_series_that_cannot_be_checked_has_no_controls(displayed: list[Handle]) -> None:
    bad = FakeSeries(name="closed", problem="One value only.", verdict="infeasible", plan=Plan(), recommended=Plan())
    controller = Controller(FakeReport(bad, FakeSeries()))
    controller.show()
    steps = controller.card.controls._steps
    assert controller.view is bad
    assert steps.children == ()
    assert controller.overview is not None
    controller.overview.choice.value = 1
    assert len(steps.children) == 3 + 3


def test_a_series_without_its_data_has_no_controls(displayed: list[Handle]) -> None:
    empty = FakeSeries(series=FakeSeries().series.iloc[:0], verdict="inconclusive")
    controller = Controller(empty)
    controller.show()
    assert controller.card.controls._steps.children == controller.card.controls._others.children == ()
    assert "passengers" in displayed[0].drawn[0]["text/html"]
    assert "<pre" in displayed[3].drawn[0]["text/html"]


@pytest.mark.parametrize("error", [ValueError("A plan <cannot> do this."), RuntimeError("broken"), KeyboardInterrupt()])
def test_errors_are_shown_and_the_card_stays(displayed: list[Handle], error: BaseException) -> None:
    view = FakeSeries(failing={"with_plan": error})
    controller = Controller(view)
    controller.show()
    switch = boxes(controller)[0]
    switch.value = False
    told = message(controller)
    expected = {
        "ValueError": "A plan &lt;cannot&gt; do this.",
        "RuntimeError": "RuntimeError: broken",
        "KeyboardInterrupt": "Stopped",
    }
    assert expected[type(error).__name__] in told
    assert switch.value is True, "the switch tells what is shown"
    assert len(displayed[0].drawn) == 1
    view.failing.clear()
    switch.value = False
    assert message(controller) == ""
    assert len(displayed[0].drawn) == 2


class SlowSeries(FakeSeries):
    """Takes its time to be examined again."""

    def with_plan(self, steps: Any) -> FakeSeries:
        time.sleep(0.02)
        return super().with_plan(steps)


def test_fast_clicks_from_several_threads_end_in_the_last_state(displayed: list[Handle]) -> None:
    controller = Controller(SlowSeries())
    controller.show()
    switches = boxes(controller)

    def click(box: ipywidgets.Checkbox, states: list[bool]) -> None:
        for state in states:
            box.value = state
            time.sleep(0.001)

    wanted = [[False, True, False], [False, True], [False]]
    threads = [threading.Thread(target=click, args=pair) for pair in zip(switches, wanted, strict=False)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(timeout=20)
    assert [box.value for box in switches[:3]] == [False, True, False]
    assert controller.view.plan.steps == (Difference(12),)
    assert message(controller) == ""
    last = controller.card._drawn(controller.card._wish)
    assert displayed[0].drawn[-1] == last.top
    assert displayed[3].drawn[-1] == last.rest


def test_selecting_a_series(displayed: list[Handle]) -> None:
    report = FakeReport(FakeSeries(), FakeSeries(name="freight"), FakeSeries(name="<b>fuel</b>"))
    controller = Controller(report)
    controller.show()
    assert "3 series" in displayed[0].drawn[0]["text/plain"]
    assert controller.overview is not None
    choice = controller.overview.choice
    assert [label for label, _ in choice.options] == ["passengers", "freight", "<b>fuel</b>"]
    choice.value = 1
    assert controller.view.name == "freight"
    assert "freight" in top(displayed).drawn[-1]["text/html"]
    choice.value = 2
    assert "&lt;b&gt;fuel&lt;/b&gt;" in top(displayed).drawn[-1]["text/html"]
    assert len(displayed[0].drawn) == 1, "the overview stays"


def test_the_series_that_needs_a_person_is_open_first(displayed: list[Handle]) -> None:
    report = FakeReport(FakeSeries(), FakeSeries(name="freight", verdict="inconclusive"))
    controller = Controller(report)
    controller.show()
    assert controller.view.name == "freight"
    assert controller.overview is not None
    assert controller.overview.choice.value == 1


def test_paging_and_finding_among_many(displayed: list[Handle]) -> None:
    controller = Controller(FakeReport(*(FakeSeries(name=f"berth {i}") for i in range(250))))
    controller.show()
    overview = controller.overview
    assert overview is not None
    table = displayed[1]
    assert "1 to 25 of 250" in table.drawn[-1]["text/plain"]
    assert overview.earlier.disabled
    overview.later.click()
    assert "26 to 50 of 250" in table.drawn[-1]["text/plain"]
    assert [at for _, at in overview.choice.options] == [*range(25, 50), 0], "the open card stays on the list"
    overview.find.value = "berth 24"
    assert "Order: what needs" in table.drawn[-1]["text/plain"]
    assert [label for label, _ in overview.choice.options] == [
        "berth 24", *(f"berth {i}" for i in range(240, 250)), "berth 0",
    ]  # fmt: skip
    assert overview.later not in overview._below.children
    assert controller.view.name == "berth 0", "narrowing the rows opens no other card"
    overview.choice.value = 249
    assert controller.view.name == "berth 249"
    overview.find.value = "nowhere"
    assert "No series is like that" in table.drawn[-1]["text/html"]
    assert controller.view.name == "berth 249"


def test_filter_and_order(displayed: list[Handle]) -> None:
    calm = [FakeSeries(name=f"calm {i}", verdict="clear", plan=Plan(), recommended=Plan()) for i in range(9)]
    controller = Controller(FakeReport(*calm, FakeSeries()))
    controller.show()
    overview = controller.overview
    assert overview is not None
    assert [label for label, _ in overview.verdict.options] == ["every verdict", "○ clear (9)", "◆ transform (1)"]
    assert overview.choice.options[0] == ("passengers", 9)
    overview.verdict.value = "clear"
    assert len(overview.choice.options) == 10
    overview.verdict.value, overview.order.value = None, "as in the table"
    assert [at for _, at in overview.choice.options] == list(range(10))


def test_a_hint_is_given_once_and_goes_with_the_first_click(
    displayed: list[Handle], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(widgets, "_hints", iter([widgets.HINT]))
    first, second = Controller(FakeSeries()), Controller(FakeSeries())
    first.show()
    second.show()
    assert "%seriescode" in message(first)
    assert message(second) == ""
    boxes(first)[0].value = False
    assert message(first) == ""


def test_every_control_has_words(displayed: list[Handle]) -> None:
    controller = Controller(FakeReport(FakeSeries(), FakeSeries(name="freight")))
    overview, controls = controller.overview, controller.card.controls
    assert overview is not None
    every = [*boxes(controller), *fields(controller).values(), controls._back, controls._more, overview.choice]
    every += [overview.order, overview.verdict, overview.find, overview.earlier, overview.later]
    for widget in every:
        assert widget.description
        assert widget.tooltip
        assert any(name.startswith("pfm-") for name in widget._dom_classes)


def test_closing_leaves_no_widget(displayed: list[Handle]) -> None:
    from ipywidgets.widgets import widget

    before = set(widget._instances)
    controller = Controller(FakeReport(FakeSeries(), FakeSeries(name="freight")))
    controller.show()
    assert controller.overview is not None
    controller.overview.choice.value = 1
    boxes(controller)[0].value = False
    fields(controller)["put in"].value = RemoveTrend()
    assert len(set(widget._instances) - before) > 8
    controller.close()
    assert set(widget._instances) - before == set()
    controller.close()


def test_running_a_cell_again_closes_its_last_controls(displayed: list[Handle], kernel: FakeKernel) -> None:
    from ipywidgets.widgets import widget

    registry.close_all()
    before = set(widget._instances)
    kernel.cell, kernel.run = "cell-1", "run-1"
    widgets.show(FakeSeries())
    once = len(set(widget._instances) - before)
    widgets.show(FakeSeries())
    assert len(set(widget._instances) - before) == 2 * once, "two cards of one run live side by side"
    for run in range(2, 6):
        kernel.run = f"run-{run}"
        widgets.show(FakeSeries())
    assert len(set(widget._instances) - before) == once
    kernel.cell, kernel.run = "cell-2", "run-9"
    widgets.show(FakeSeries())
    assert len(set(widget._instances) - before) == 2 * once


def test_cells_without_identity_are_bounded(
    displayed: list[Handle], kernel: FakeKernel, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(registry, "KEPT", 4)
    registry.close_all()
    made = [widgets.show(FakeSeries()) for _ in range(registry.KEPT + 2)]
    closed = [one.guard.closed for one in made if one is not None]
    assert closed == [True] * 2 + [False] * registry.KEPT


def test_terminal_shows_text(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    shell = InteractiveShell.instance()
    monkeypatch.setattr("IPython.get_ipython", lambda: shell)
    assert widgets.show(FakeSeries()) is None
    told = capsys.readouterr().out
    assert "◆ transform" in told
    assert "<" not in told.replace("< 0.001", "")
    InteractiveShell.clear_instance()


def test_bundle_without_controls() -> None:
    one = widgets.bundle(FakeReport(FakeSeries()))
    assert "passengers" in one["text/html"]
    assert "Is the time index regular" in one["text/plain"]
    many = widgets.bundle(FakeReport(FakeSeries(), FakeSeries(name="freight")))
    assert "2 series" in many["text/html"]
