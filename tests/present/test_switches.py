"""Which steps are offered as switches."""

from preflight_magic.model import Difference, Log, RemovePattern, RemoveTrend, Step
from preflight_magic.plan.plan import Plan
from preflight_magic.present.switches import states, switches
from tests.present.fakes import FakeSeries


def made(view: FakeSeries, *more: Step) -> list[tuple[Step, bool]]:
    return [(switch.step, switch.recommended) for switch in switches(view, more)]


def test_recommended_steps_and_those_of_close_plans_in_the_order_of_the_plan() -> None:
    close = ("remove trend", 1.0, (RemoveTrend(), Log()))
    far = ("remove pattern", 30.0, (RemovePattern(12),))
    view = FakeSeries(alternatives=(close, far))
    expected = [(Log(), True), (Difference(12), True), (Difference(1), True), (RemoveTrend(), False)]
    assert made(view) == expected
    assert made(view, RemovePattern(12), Log()) == [*expected, (RemovePattern(12), False)]


def test_two_equal_steps_have_two_switches() -> None:
    twice = Plan((), (Difference(1), Difference(1)))
    view = FakeSeries(plan=twice, recommended=twice, alternatives=())
    offered = switches(view)
    assert [switch.recommended for switch in offered] == [True, True]
    assert states((Difference(1),), offered) == (True, False)
    assert states(twice.steps, offered) == (True, True)
