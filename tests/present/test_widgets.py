"""Controls: what toggles call, what errors show, what closing leaves."""

import threading
import time
from collections.abc import Iterator
from typing import Any

import ipywidgets
import pytest
from IPython.core.interactiveshell import InteractiveShell

from preflight_magic.model import Difference, Log
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
    return [w for w in controller._steps.children if isinstance(w, ipywidgets.Checkbox)]


def alive() -> set[str]:
    return set(ipywidgets.widget._instances) if hasattr(ipywidgets, "widget") else set()


def test_card_is_plain_html_and_controls_are_blank_elsewhere(displayed: list[Handle]) -> None:
    controller = Controller(FakeSeries())
    controller.show()
    top, controls, rest = (handle.drawn[0] for handle in displayed)
    assert set(top) == set(rest) == {"text/html", "text/plain"}
    assert "passengers" in top["text/html"]
    assert "log → difference 12" in top["text/plain"]
    assert "<img" in rest["text/html"]
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
    assert view.calls == [("leave_out", Difference(12))]
    assert controller.view.plan.steps == (Log(), Difference(1))
    for handle in (displayed[0], displayed[2]):
        assert len(handle.drawn) == 2
        assert handle.drawn[0] != handle.drawn[1]
    assert "difference 12 (left out)" in displayed[0].drawn[1]["text/plain"]
    switch.value = True
    assert controller.view.plan == view.plan
    assert len(view.calls) == 1, "a card that was made is kept"
    assert displayed[2].drawn[2] == displayed[2].drawn[0]


def test_putting_in_what_was_left_out(displayed: list[Handle]) -> None:
    view = FakeSeries()
    left = view.leave_out(Difference(12))
    controller = Controller(left)
    controller.show()
    switch = next(b for b in boxes(controller) if b.description == "difference 12")
    assert switch.value is False
    switch.value = True
    assert view.calls[-1] == ("put_in", Difference(12))
    assert controller.view.plan == view.plan


def test_back_to_the_recommendation(displayed: list[Handle]) -> None:
    controller = Controller(FakeSeries())
    controller.show()
    assert controller._back.disabled
    for box in boxes(controller):
        box.value = False
    assert controller.view.plan.steps == ()
    assert not controller._back.disabled
    controller._back.click()
    assert controller.view.plan == controller.view.recommended
    assert all(box.value for box in boxes(controller))
    assert controller._back.disabled


@pytest.mark.parametrize("error", [ValueError("A plan <cannot> do this."), RuntimeError("broken"), KeyboardInterrupt()])
def test_errors_are_shown_and_the_card_stays(displayed: list[Handle], error: BaseException) -> None:
    view = FakeSeries(failing={"leave_out": error})
    controller = Controller(view)
    controller.show()
    switch = boxes(controller)[0]
    switch.value = False
    told = controller._message.value
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
    assert controller._message.value == ""
    assert len(displayed[0].drawn) == 2


class SlowSeries(FakeSeries):
    """Takes its time to be examined again."""

    def leave_out(self, step: Any) -> FakeSeries:
        time.sleep(0.02)
        return super().leave_out(step)


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
    assert controller._message.value == ""


def test_selecting_a_series(displayed: list[Handle]) -> None:
    report = FakeReport(FakeSeries(), FakeSeries(name="freight"), FakeSeries(name="<b>fuel</b>"))
    controller = Controller(report)
    controller.show()
    assert "3 series" in displayed[0].drawn[0]["text/plain"]
    choice = controller._choice
    assert [label for label, _ in choice.options] == ["passengers", "freight", "<b>fuel</b>"]
    before = boxes(controller)
    choice.value = 1
    assert controller.view.name == "freight"
    assert "freight" in displayed[2].drawn[-1]["text/html"]
    assert all(box.comm is None for box in before), "controls of the last series are closed"
    choice.value = 2
    assert "&lt;b&gt;fuel&lt;/b&gt;" in displayed[2].drawn[-1]["text/html"]


def test_finding_a_series_among_many(displayed: list[Handle]) -> None:
    controller = Controller(FakeReport(*(FakeSeries(name=f"berth {i}") for i in range(250))))
    controller.show()
    assert len(controller._choice.options) == widgets.SHOWN_NAMES
    controller._find.value = "berth 249"
    assert controller._choice.options == (("berth 249", 249),)
    assert controller.view.name == "berth 249"
    controller._find.value = "nowhere"
    assert "No series" in controller._message.value
    assert controller.view.name == "berth 249"


def test_every_control_has_words(displayed: list[Handle]) -> None:
    controller = Controller(FakeReport(FakeSeries(), FakeSeries(name="freight")))
    for widget in [*boxes(controller), controller._back, controller._choice]:
        assert widget.description
        assert widget.tooltip
        assert any(name.startswith("pfm-") for name in widget._dom_classes)


def test_closing_leaves_no_widget(displayed: list[Handle]) -> None:
    from ipywidgets.widgets import widget

    before = set(widget._instances)
    controller = Controller(FakeReport(FakeSeries(), FakeSeries(name="freight")))
    controller.show()
    controller._choice.value = 1
    boxes(controller)[0].value = False
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
    closed = [one._closed for one in made if one is not None]
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
