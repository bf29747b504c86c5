"""The card of a series with its controls: each wish examines the series again and draws the card anew."""

from __future__ import annotations

from collections import Counter, OrderedDict
from collections.abc import Hashable
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

from preflight_magic.model import Step
from preflight_magic.plan.order import canonical
from preflight_magic.present import html, make_cards, text, words
from preflight_magic.present.card_controls import CardControls
from preflight_magic.present.cards import Card
from preflight_magic.present.live import Bundle, Guard, show_bundle, show_controls
from preflight_magic.present.make_proof import hold_out, proof_card
from preflight_magic.present.markup import join
from preflight_magic.present.switches import Switch, states, switches
from preflight_magic.present.wishes import (
    Wish,
    could_put_in,
    examine,
    read_anew,
    read_season,
    read_span,
    span_example,
    with_turned,
)

if TYPE_CHECKING:
    from preflight_magic.present.contract import SeriesView

KEPT = 40
"""Cards that are kept drawn."""


@dataclass
class _Drawn:
    """A card as it was made, and its lower part once it was drawn."""

    view: SeriesView
    card: Card
    top: Bundle = field(default_factory=dict)
    first: Bundle = field(default_factory=dict)
    rest: Bundle = field(default_factory=dict)

    def show(self, card: Card, key: str, styled: bool) -> None:
        """Make the upper part of a card."""
        self.card = card
        head = join([None if styled else html.style(), html.head(card, key)])
        self.top = {"text/html": head, "text/plain": text.card_text(card)}
        self.first = {"text/html": html.first(card), "text/plain": ""}


class LiveCard:
    """One card on the page, of one series at a time.

    Parameters
    ----------
    origin : SeriesView
        As it was checked, or as a person switched it before it was shown.
    guard : Guard
    key : str
        Tells this card from others on the page.
    styled : bool
        Whether what stands above it has brought the style sheet already.
    """

    def __init__(self, origin: SeriesView, guard: Guard, key: str, styled: bool = False) -> None:
        self._guard, self._key, self._styled = guard, key, styled
        self._made: OrderedDict[tuple[Hashable, Wish], _Drawn] = OrderedDict()
        self._bases: dict[Wish, SeriesView] = {}
        self._handles: tuple[Any, Any, Any] | None = None
        self._rest_of: tuple[Hashable, Wish] | None = None
        self._offered: tuple[Switch, ...] = ()
        self._usable: bool | None = None
        self.controls = CardControls(self, guard)
        self._start(origin)

    def _start(self, origin: SeriesView) -> None:
        self._origin, self._bases = origin, {Wish(): origin}
        self._asked_for: tuple[Step, ...] = ()
        self._wish = Wish(steps=tuple(origin.plan.steps))
        self._recommended = Wish(steps=tuple(origin.recommended.steps))
        self._base = origin
        self._guard.quietly(
            lambda: self._set_controls(is_open=origin.verdict == "inconclusive" and len(origin.series) > 0)
        )

    def open(self, origin: SeriesView) -> None:
        """Show another series."""
        self._start(origin)
        self._draw()

    @property
    def view(self) -> SeriesView:
        """The series that is shown, with the plan that is shown."""
        return self._drawn(self._wish).view

    # -------------------------------------------------------------------------------------------------- asks
    def turn(self, position: int) -> None:
        """Take the steps whose switches are on."""
        # What the boxes say now counts, not what they said when this was called: fast clicks end in the last state.
        on = self.controls.states()
        steps = canonical(switch.step for switch, is_on in zip(self._offered, on, strict=True) if is_on)
        turned = self._offered[position].step
        if on[position]:
            rest = list(steps)
            rest.remove(turned)
            steps = with_turned(rest, turned, True)
        # Boxes that stand against the one turned go off at once, and none is set after that: a click may wait.
        self._guard.quietly(lambda: self.controls.set_boxes(states(steps, self._offered)))
        self._go(replace(self._wish, steps=steps), boxes=False)

    def put_in(self, step: Step) -> None:
        """Add a step."""
        steps = with_turned(self._wish.steps or (), step, True)
        self._go(replace(self._wish, steps=steps))

    def take(self, steps: tuple[Step, ...]) -> None:
        """Take a whole plan."""
        self._go(replace(self._wish, steps=tuple(steps)))

    def season(self, text: str) -> None:
        """Check the series with another season; the plan is then the one recommended for it."""
        wanted = read_season(text)
        if wanted != self._base.season:
            self._go(Wish(None if wanted == self._origin.season else wanted, self._wish.spans))

    def span(self, text: str) -> None:
        """Check the series without one more span; the plan is then the one recommended without it."""
        wanted = read_span(text, self._base.series.index)
        self._go(Wish(self._wish.season, (*self._wish.spans, wanted)))

    def prove(self) -> None:
        """Forecast from past origins, and compare with the recommendation where that is another plan."""
        self._guard.say("Forecasting from past origins \u2026")
        drawn = self._drawn(self._wish)
        proof, changes = proof_card(drawn.view), drawn.card.changes
        if self._wish != self._recommended:
            changes = (*changes, *hold_out(proof_card(self._drawn(self._recommended).view), proof))
        drawn.show(replace(drawn.card, proof=proof, changes=changes), self._key, self._styled)
        self._guard.quietly(lambda: self._set_controls(boxes=False))
        if self._handles is not None:
            self._handles[0].update(drawn.top, raw=True)
            self._handles[1].update(drawn.first, raw=True)
        self._guard.say("")

    def back(self) -> None:
        """Go back to what was recommended."""
        self._asked_for = ()
        self._go(self._recommended)

    def restore(self) -> None:
        """Let the controls tell what is shown."""
        self._set_controls()

    def _go(self, wish: Wish, boxes: bool = True) -> None:
        if (self._origin.name, wish) not in self._made:
            self._guard.say("Examining again \u2026")
        base = self._read(wish)
        if wish.steps is None:
            wish = replace(wish, steps=tuple(base.plan.steps))
        self._drawn(wish)
        self._base, self._wish = base, wish
        self._guard.quietly(lambda: self._set_controls(boxes=boxes))
        self._draw()
        self._guard.say("")

    # ----------------------------------------------------------------------------------------------- controls
    def _set_controls(self, is_open: bool | None = None, boxes: bool = True) -> None:
        steps, base = self._wish.steps or (), self._base
        # A step that was on once can be turned on again.
        self._asked_for = tuple((Counter(self._asked_for) | Counter(steps)).elements())
        # A series from a record has no data by which it could be examined again.
        usable = base.problem is None and len(base.series) > 0
        offered = switches(base, self._asked_for) if usable else ()
        offers = could_put_in(base, [switch.step for switch in offered]) if usable else ()
        if (offered, usable) != (self._offered, self._usable):
            self._offered, self._usable, boxes = offered, usable, True
            self.controls.set_switches(offered, usable)
        if boxes:
            self.controls.set_boxes(states(steps, offered))
        self.controls.set_back(self._wish != self._recommended, self._drawn(self._wish).card.proof is not None)
        self.controls.set_others(
            [(step, words.meaning(step, base.noun)) for step in offers],
            sorted(base.alternatives, key=lambda one: one[1]),
            steps,
            base.season,
            span_example(base.series.index) if usable else "",
            is_open=is_open,
        )

    # ------------------------------------------------------------------------------------------------ display
    def _read(self, wish: Wish) -> SeriesView:
        key = replace(wish, steps=None)
        if key not in self._bases:
            self._bases[key] = read_anew(self._origin, key)
        return self._bases[key]

    def _drawn(self, wish: Wish) -> _Drawn:
        """Series, card and its upper part for a wish; made once."""
        place = (self._origin.name, wish)
        if place not in self._made:
            view = examine(self._read(wish), wish)
            known = None if wish == self._recommended else self._drawn(self._recommended).view
            card = make_cards.card(view, known, _told(wish, self._origin))
            self._made[place] = _Drawn(view, card)
            self._made[place].show(card, self._key, self._styled)
            while len(self._made) > KEPT:
                self._made.popitem(last=False)
        self._made.move_to_end(place)
        return self._made[place]

    def _rest(self, wish: Wish) -> Bundle:
        drawn = self._drawn(wish)
        if not drawn.rest:
            key = f"{self._key}-{words.name_text(self._origin.name, 20)}".replace(" ", "-")
            whole = make_cards.with_code(drawn.card, drawn.view)
            drawn.rest = {"text/html": html.rest(whole, key), "text/plain": ""}
        return drawn.rest

    def _draw(self) -> None:
        """Draw top and first picture, then the rest, unless a click that waits will draw that."""
        if self._handles is None:
            return
        drawn, place = self._drawn(self._wish), (self._origin.name, self._wish)
        top, first, rest = self._handles
        if self._rest_of != place:
            first.update(drawn.first, raw=True)
            top.update(drawn.top, raw=True)
        if self._rest_of != place and self.controls.states() == states(self._wish.steps or (), self._offered):
            rest.update(self._rest(self._wish), raw=True)
            self._rest_of = place

    def show(self) -> None:
        """Display the card with its controls."""
        drawn = self._drawn(self._wish)
        top = show_bundle(drawn.top, True)
        show_controls(self.controls.box)
        self._handles = top, show_bundle(drawn.first, True), show_bundle(self._rest(self._wish), True)
        self._rest_of = (self._origin.name, self._wish)

    def close(self) -> None:
        """Close every widget; the card stays as it is."""
        self.controls.close()


def _told(wish: Wish, origin: SeriesView) -> str:
    """Season and spans of a wish as sentences."""
    told = []
    if wish.season is not None:
        names = [
            " and ".join(map(str, season)) if season != (1,) else "none" for season in (wish.season, origin.season)
        ]
        told.append(f"You chose the season: {names[0]}, where the check took {names[1]}.")
    for start, end in wish.spans:
        told.append(f"You left out {start} to {end}." if start != end else f"You left out {start}.")
    return " ".join(told)
