"""Which plan the switches ask for."""

from dataclasses import replace

import pytest

from preflight_magic.model import Difference, Log, Power, RemovePattern, RemoveTrend, Step
from preflight_magic.plan.plan import Plan
from preflight_magic.present.switches import settle, states, switches, walk
from tests.present.fakes import FakeSeries


def made(view: FakeSeries) -> list[tuple[Step, bool]]:
    return [(switch.step, switch.recommended) for switch in switches(view)]


def test_recommended_steps_then_those_of_close_plans() -> None:
    close = ("remove trend", 1.0, (RemoveTrend(), Log()))
    far = ("remove pattern", 30.0, (RemovePattern(12),))
    view = FakeSeries(alternatives=(close, far))
    assert made(view) == [(Log(), True), (Difference(12), True), (Difference(1), True), (RemoveTrend(), False)]


def test_two_equal_steps_have_two_switches() -> None:
    twice = Plan((), (Difference(1), Difference(1)))
    view = FakeSeries(plan=twice, recommended=twice, alternatives=())
    offered = switches(view)
    assert [switch.recommended for switch in offered] == [True, True]
    once = view.leave_out(Difference(1))
    assert states(once, offered) == (True, False)


@pytest.mark.parametrize("wanted", [(True, False, True), (False, False, False), (False, True, True)])
def test_walk_ends_in_the_wanted_plan(wanted: tuple[bool, ...]) -> None:
    view = replace(FakeSeries(), alternatives=())
    offered = switches(view)
    there = walk(view, offered, wanted)
    assert there.plan.steps == tuple(s.step for s, on in zip(offered, wanted, strict=True) if on)
    back = walk(there, offered, (True, True, True))
    assert back.plan == view.plan


def test_of_log_and_power_the_last_one_turned_on_wins() -> None:
    both = (("power", 1.0, (Power(0.5),)),)
    offered = switches(FakeSeries(alternatives=both))
    place = next(i for i, s in enumerate(offered) if isinstance(s.step, Power))
    assert settle(offered, (True, True, True, True), place) == (False, True, True, True)
    assert settle(offered, (True, True, True, True), 0) == (True, True, True, False)
    assert settle(offered, (False, True, True, False), 0) == (False, True, True, False)
