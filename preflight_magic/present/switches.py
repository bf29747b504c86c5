"""Which plan a person wants: the switches of a card as plain state, without widgets."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from preflight_magic.model import Log, Logit, Power, Step
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


def switches(view: SeriesView) -> tuple[Switch, ...]:
    """Steps of the recommendation, of the plan shown, and of the plans that are nearly as good."""
    recommended = Counter(view.recommended.steps)
    offered = recommended | Counter(view.plan.steps)
    for _, below, steps in view.alternatives:
        if below <= CLOSE:
            offered |= Counter(steps)
    made: list[Switch] = []
    for step in [*recommended.elements(), *(offered - recommended).elements()]:
        used = sum(one.step == step for one in made)
        made.append(Switch(step, describe(step), words.meaning(step, view.noun), used < recommended[step]))
    return tuple(made)


def states(view: SeriesView, offered: Sequence[Switch]) -> tuple[bool, ...]:
    """Which of the switches are on in the plan that is shown."""
    left = Counter(view.plan.steps)
    on = []
    for switch in offered:
        on.append(left[switch.step] > 0)
        left[switch.step] -= 1
    return tuple(on)


def walk(view: SeriesView, offered: Sequence[Switch], wanted: Sequence[bool]) -> SeriesView:
    """The series examined with the wanted steps: first what is left out, then what is put in."""
    have = states(view, offered)
    for switch, is_on, should in zip(offered, have, wanted, strict=True):
        if is_on and not should:
            view = view.leave_out(switch.step)
    for switch, is_on, should in zip(offered, have, wanted, strict=True):
        if should and not is_on:
            view = view.put_in(switch.step)
    return view


def settle(offered: Sequence[Switch], wanted: Sequence[bool], turned: int) -> tuple[bool, ...]:
    """Wanted states with at most one of log, power and logit on: the one turned on last wins."""
    bends = Log | Power | Logit
    if not (wanted[turned] and isinstance(offered[turned].step, bends)):
        return tuple(wanted)
    return tuple(
        on and (i == turned or not isinstance(switch.step, bends))
        for i, (switch, on) in enumerate(zip(offered, wanted, strict=True))
    )
