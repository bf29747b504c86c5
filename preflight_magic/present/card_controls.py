"""The controls of a card as widgets: what they look like and what they say, not what happens then."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any, Protocol

from preflight_magic.model import Step
from preflight_magic.plan.words import describe
from preflight_magic.present import words
from preflight_magic.present.live import Guard, button, close, named, row
from preflight_magic.present.switches import Switch

PLANS = 12
"""Compared plans that are offered."""
NO_STEP = "put in a step \u2026"
NO_PLAN = "choose a plan \u2026"

PlanChoice = tuple[str, float, tuple[Step, ...]]


class Asks(Protocol):
    """What a person can ask for."""

    def turn(self, position: int) -> None:
        """A switch was turned."""

    def put_in(self, step: Step) -> None:
        """One more step."""

    def take(self, steps: tuple[Step, ...]) -> None:
        """One of the plans that were compared."""

    def season(self, text: str) -> None:
        """Another season."""

    def span(self, text: str) -> None:
        """One more span left out."""

    def prove(self) -> None:
        """Forecasts from the past."""

    def back(self) -> None:
        """The recommendation again."""

    def restore(self) -> None:
        """Let the controls tell what is shown."""


class CardControls:
    """Switches of the steps, and beside them what else can be changed.

    Parameters
    ----------
    asks : Asks
    guard : Guard
    """

    def __init__(self, asks: Asks, guard: Guard) -> None:
        import ipywidgets

        self._asks, self._guard = asks, guard
        self.boxes: list[Any] = []
        self._back = button("As recommended", "Back to the recommendation: steps, season and spans", "pfm-back",
                            lambda: self._run(asks.back))  # fmt: skip
        self._prove = button("Forecast the past", "From past origins, with this plan and others; takes seconds",
                             "pfm-prove", lambda: self._run(asks.prove))  # fmt: skip
        self._more = ipywidgets.ToggleButton(
            description="More changes", tooltip="Other steps, other plans, another season, a span left out"
        )
        self._more.layout.width = "auto"
        self._more.add_class("pfm-more-changes")
        self._more.observe(lambda _: self._run(self._open), names="value")
        self._fields: dict[str, Any] = {}
        self._steps, self._others = row([], "pfm-steps"), row([], "pfm-others")
        self.box = ipywidgets.VBox([self._steps, self._others, guard.message()])
        self.box.add_class("pfm-controls")

    def _run(self, action: Callable[[], None]) -> None:
        self._guard.run(action, self._asks.restore)

    # ---------------------------------------------------------------------------------------------- switches
    def set_switches(self, offered: Sequence[Switch], usable: bool) -> None:
        """Show these switches in place of the last ones; nothing where the series cannot be checked."""
        old, self.boxes = self.boxes, [self._box(i, one) for i, one in enumerate(offered)]
        self._steps.children = [*self.boxes, self._back, self._more, self._prove] if usable else []
        for box in old:
            close(box)

    def set_boxes(self, on: Sequence[bool]) -> None:
        """Turn the switches on and off."""
        for box, value in zip(self.boxes, on, strict=True):
            if box.value != value:
                box.value = value

    def set_back(self, possible: bool, proved: bool) -> None:
        """Say whether there is a way back, and whether a proof is there already."""
        self._back.disabled = not possible
        self._prove.disabled = proved

    def _box(self, position: int, switch: Switch) -> Any:
        import ipywidgets

        box = ipywidgets.Checkbox(value=False, description=switch.text, indent=False, tooltip=switch.meaning)
        box.add_class("pfm-switch")
        box.layout.width = "auto"
        box.observe(lambda _: self._run(lambda: self._asks.turn(position)), names="value")
        return box

    def states(self) -> tuple[bool, ...]:
        """Which switches are on."""
        return tuple(bool(box.value) for box in self.boxes)

    # ------------------------------------------------------------------------------------------- other changes
    def set_others(
        self,
        steps: Sequence[tuple[Step, str]],
        plans: Sequence[PlanChoice],
        shown: tuple[Step, ...],
        season: tuple[int, ...],
        example: str,
        *,
        is_open: bool | None = None,
    ) -> None:
        """Say what can be put in (step and meaning), taken, and what season there is; `is_open` opens or shuts it."""
        self._offers = (steps, plans, shown, season, example)
        if is_open is not None:
            self._more.value = is_open
        self._open()

    def _open(self) -> None:
        if not self._more.value:
            self._others.children = ()
            return
        if not self._fields:
            self._fields = self._make_fields()
        steps, plans, shown, season, example = self._offers
        put_in, take, period, span = (self._fields[name] for name in ("put in", "take", "season", "span"))
        told = [(describe(step) if not meaning else f"{describe(step)}: {meaning}", step) for step, meaning in steps]
        choices = [(_choice(text, below), one) for text, below, one in plans[:PLANS]]

        def fill() -> None:
            put_in.options = [(NO_STEP, ""), *told]
            put_in.value = ""
            take.options = [(NO_PLAN, ""), *choices]
            take.value = shown if shown in [one for _, one in choices] else ""
            period.value = ", ".join(map(str, season))
            span.value, span.placeholder = "", example

        self._guard.quietly(fill)
        wanted = [put_in, *([take] if len(choices) > 1 else []), period, span]
        if list(self._others.children) != wanted:
            self._others.children = wanted

    def _make_fields(self) -> dict[str, Any]:
        import ipywidgets

        made = {
            "put in": ipywidgets.Dropdown(options=[(NO_STEP, "")], description="Step", tooltip="A step to put in"),
            "take": ipywidgets.Dropdown(
                options=[(NO_PLAN, "")], description="Plan", tooltip="Plans that were compared, the best first"
            ),
            "season": ipywidgets.Text(
                description="Season", continuous_update=False,
                tooltip="Observations per cycle, several with commas, 1 for none; Enter checks the series anew",
            ),
            "span": ipywidgets.Text(
                description="Leave out", continuous_update=False,
                tooltip="First and last stamp of a span that is treated as missing; Enter checks the series anew",
            ),
        }  # fmt: skip
        asks: dict[str, Callable[[Any], None]] = {
            "put in": self._asks.put_in, "take": self._asks.take, "season": self._asks.season, "span": self._asks.span,
        }  # fmt: skip
        for key, widget in made.items():
            named(widget, f"pfm-{key.replace(' ', '-')}", self._heard(widget, asks[key]))
        for key, most in (("put in", "260px"), ("take", "330px"), ("season", "150px"), ("span", "250px")):
            made[key].layout.max_width = most
        return made

    def _heard(self, widget: Any, ask: Callable[[Any], None]) -> Callable[[], None]:
        def hear() -> None:
            if widget.value != "":
                self._run(lambda: ask(widget.value))

        return hear

    def close(self) -> None:
        """Close every widget, also those that are not shown now."""
        for widget in (self.box, self._back, self._more, self._prove, *self.boxes, *self._fields.values()):
            close(widget)


def _choice(text: str, below: float) -> str:
    told = words.odds(below)
    return f"{text} ({told if told == 'best' else f'{told} against it'})"
