"""The switches of a card: the steps that a person can turn on and off."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from preflight_magic.model import Step
from preflight_magic.plan.order import canonical
from preflight_magic.plan.words import describe
from preflight_magic.present import words

if TYPE_CHECKING:
    from preflight_magic.present.contract import SeriesView

CLOSE = 3.0
"""Log odds up to which a plan's steps are offered: evidence is "strong" from there on (Kass and Raftery 1995)."""


@dataclass(frozen=True)
class Switch:
    """One step that can be on or off; `recommended` tells which it is in the recommendation."""

    step: Step
    text: str
    meaning: str
    recommended: bool


def switches(view: SeriesView, more: Iterable[Step] = ()) -> tuple[Switch, ...]:
    """Steps of the recommendation, of the plan shown, of the plans that are nearly as good, and of those asked for.

    In canonical order, which is the order in which they are applied.
    """
    recommended = Counter(view.recommended.steps)
    offered = recommended | Counter(view.plan.steps) | Counter(more)
    for _, below, steps in view.alternatives:
        if below <= CLOSE:
            offered |= Counter(steps)
    made: list[Switch] = []
    for step in canonical(offered.elements()):
        used = sum(one.step == step for one in made)
        made.append(Switch(step, describe(step), words.meaning(step, view.noun), used < recommended[step]))
    return tuple(made)


def states(steps: Iterable[Step], offered: Sequence[Switch]) -> tuple[bool, ...]:
    """Which of the switches are on when these are the steps of the plan."""
    left = Counter(steps)
    on = []
    for switch in offered:
        on.append(left[switch.step] > 0)
        left[switch.step] -= 1
    return tuple(on)
