"""Cases that failed once."""

from __future__ import annotations

import pytest

from tests.fuzz.cases import Case, Column
from tests.fuzz.hold import hold

FOUND = {
    "subnormal numbers in a card": Case(
        n=36, index="period W-SAT", columns=(Column(kind="constant", scale=1e-60, odd="tiny", seed=3679),), seed=10020
    ),
    "an index of two levels": Case(n=38, index="levels", form="series"),
    "bounds far beyond the values": Case(
        n=100,
        index="numbers",
        mess=("rows gone",),
        columns=(Column(kind="pattern", seed=1299, scale=1e-12),),
        options=(("only", "a"),),
        seed=70234,
    ),
    "one value of 1e74 among small ones": Case(n=60, columns=(Column(kind="walk", seed=1, scale=1.0, odd="large"),)),
    "hours where midnight does not exist": Case(n=100, index="America/Sao_Paulo h"),
    "nothing changes after the plan": Case(
        n=37, index="period D", columns=(Column(kind="parabola", seed=786, scale=-1.0, offset=1e15),), seed=2580
    ),
    "a stamp lost from text": Case(n=40, index="text days", mess=("rows gone", "twice")),
}


@pytest.mark.parametrize("what", FOUND)
def test_what_failed_once_holds(what):
    hold(FOUND[what])
