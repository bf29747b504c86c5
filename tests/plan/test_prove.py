"""The proof of generated code finds what is wrong and lets pass what is right."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import (
    CheckError,
    Difference,
    FillGaps,
    Log,
    PerDay,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
)
from preflight_magic.plan.emit import emit
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.prove import EmitError, prove


def test_right_code_passes(typical, steps_for):
    plan = Plan((FillGaps(12),), steps_for(typical.index))
    prove(plan, emit({typical.name: (plan, {})}), typical, 12)


def test_right_code_passes_with_gaps_anywhere(gappy, rich_steps_for):
    plan = Plan((FillGaps(12),), rich_steps_for(gappy.index))
    source = emit({gappy.name: (plan, {})})
    for lost in ([-13], [-1, -2], [0, 1, 2], [-12]):
        y = gappy.copy()
        y.iloc[lost] = np.nan
        prove(plan, source, y, 12)


@pytest.mark.parametrize(
    ("right", "wrong"),
    [
        ("np.log(x)", "np.log10(x)"),
        (".diff(12)", ".diff(11)"),
        ("variance / 2", "variance / 3"),
        ("undo_difference(x, past, 12)", "undo_difference(x, past, 11)"),
        ("t / len(t)", "t * t"),
        ("season[:, :-1] - season[:, -1:]", "season[:, 1:-1]"),
        ("return x.loc[y.index]", "return x.loc[y.index] + 1e-7"),
        ("return x.loc[y.index]", "return x"),
        ("return x.loc[y.index]", "return y.missing"),
        ("def restore", "def restor"),
        ("    x = np.log(x)", "    x = np.log(x"),
    ],
)
def test_wrong_code_is_found(monthly, right, wrong):
    airline = Plan((), (Log(), Difference(12), Difference(1)))
    fixed = Plan((), (Log(), RemoveTrend(), RemovePattern(12)))
    found = 0
    for plan in (airline, fixed):
        source = emit({"passengers": (plan, {})})
        if right in source:
            found += 1
            with pytest.raises(EmitError, match="a fault of preflight_magic"):
                prove(plan, source.replace(right, wrong), monthly.iloc[:-2], 6)
    assert found


def test_one_among_several_is_found_by_its_name(monthly):
    one, two = Plan((), (Log(),)), Plan((), (PerDay(),))
    source = emit({"passengers": (one, {}), ("port", 2): (two, {})})
    prove(one, source, monthly, 6)
    prove(two, source, monthly.rename(("port", 2)), 6)
    with pytest.raises(EmitError):
        prove(two, source, monthly, 6)
    with pytest.raises(EmitError, match="KeyError"):
        prove(one, source, monthly.rename("freight"), 6)


def test_a_plan_that_does_not_fit_the_series_is_no_fault_of_the_code(monthly):
    plan = Plan((), (Log(),))
    with pytest.raises(CheckError, match="above zero"):
        prove(plan, emit({"passengers": (plan, {})}), -monthly, 6)


def test_scale_of_the_series_does_not_matter(monthly):
    plan = Plan((), (Difference(1), RemoveShift(monthly.index[40])))
    source = emit({"passengers": (plan, {})})
    for factor in (1e-12, 1e12):
        prove(plan, source, monthly * factor, 6)
        with pytest.raises(EmitError):
            prove(plan, source.replace(".diff()", ".diff() * 1.000001"), monthly * factor, 6)


def test_the_series_is_not_changed(monthly):
    plan = Plan((FillGaps(12),), (Log(), Difference(12)))
    before = monthly.copy(deep=True)
    prove(plan, emit({"passengers": (plan, {})}), monthly, 6)
    pd.testing.assert_series_equal(monthly, before)
