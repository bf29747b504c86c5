"""The plan as a value: text, order, equality, copies with a step more or less."""

import pickle

import pandas as pd
import pytest

from preflight_magic.model import (
    CheckError,
    Difference,
    FillGaps,
    Log,
    Logit,
    PerDay,
    Power,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
)
from preflight_magic.plan.plan import Plan, canonical, describe


@pytest.mark.parametrize(
    ("steps", "text"),
    [
        ((), "as given"),
        ((Log(), Difference(12), Difference(1)), "log, difference 12, difference 1"),
        ((PerDay(),), "per day"),
        ((PerDay("workdays"),), "per workday"),
        ((Power(0.5),), "power 0.5"),
        ((Power(0.25, 1.0),), "power 0.25 offset 1"),
        ((Logit(),), "logit 0 to 1"),
        ((RemoveTrend(),), "remove trend"),
        ((RemoveShift(pd.Period("1899", freq="Y")),), "remove shift from 1899"),
        ((RemoveShift(pd.Period("2021-03", freq="M")),), "remove shift from 2021-03"),
        ((RemoveShift(pd.Timestamp("2021-03-01")),), "remove shift from 2021-03-01"),
        ((RemoveShift(pd.Timestamp("2021-03-01", tz="Europe/Oslo")),), "remove shift from 2021-03-01"),
        ((RemoveShift(pd.Timestamp("2021-03-01 06:00")),), "remove shift from 2021-03-01 06:00"),
        ((RemoveShift(17),), "remove shift from 17"),
        ((RemovePattern(12),), "remove pattern 12"),
    ],
)
def test_text(steps, text):
    assert str(Plan((), steps)) == text


def test_repr_is_one_line_and_names_the_repairs():
    plan = Plan((FillGaps(12),), (Log(), RemoveShift(pd.Timestamp("2021-03-01"))))
    assert repr(plan) == "<Plan: fill gaps 12; log, remove shift from 2021-03-01>"
    assert repr(Plan()) == "<Plan: as given>"


def test_truth_is_having_steps():
    assert not Plan()
    assert not Plan((FillGaps(),))
    assert Plan((), (Log(),))


def test_canonical_order():
    shuffled = (
        RemovePattern(12),
        Difference(1),
        RemoveShift(3),
        Difference(12),
        Log(),
        RemoveTrend(),
        Difference(1),
        PerDay(),
    )
    ordered = (
        PerDay(),
        Log(),
        Difference(12),
        Difference(1),
        Difference(1),
        RemoveTrend(),
        RemoveShift(3),
        RemovePattern(12),
    )
    assert canonical(shuffled) == ordered
    assert Plan((), shuffled).steps == ordered
    assert Plan((), list(shuffled)) == Plan((), ordered)


def test_equality_hash_and_pickle():
    one = Plan((FillGaps(12),), (Log(), RemoveShift(pd.Period("2021-03", freq="M"))))
    two = Plan((FillGaps(12),), (RemoveShift(pd.Period("2021-03", freq="M")), Log()))
    assert one == two
    assert hash(one) == hash(two)
    assert one != Plan((), one.steps)
    assert pickle.loads(pickle.dumps(one)) == one


def test_without_and_with_step():
    plan = Plan((FillGaps(),), (Log(), Difference(12), Difference(1), Difference(1)))
    assert plan.without(Log()).steps == (Difference(12), Difference(1), Difference(1))
    assert plan.without(1).steps == (Log(), Difference(1), Difference(1))
    assert plan.without(-1) == plan.without(Difference(1))
    assert plan.without(0).repairs == (FillGaps(),)
    assert plan.without(Log()).with_step(Log()) == plan
    assert Plan().with_step(RemoveTrend()).with_step(Difference(4)).steps == (Difference(4), RemoveTrend())


@pytest.mark.parametrize(("step", "words"), [(RemoveTrend(), "no step 'remove trend'"), (4, "at position 4")])
def test_leaving_out_what_is_not_there(step, words):
    with pytest.raises(CheckError, match=words):
        Plan((), (Log(),)).without(step)


@pytest.mark.parametrize(
    ("repairs", "steps", "words"),
    [
        ((), (Log(), Power(0.5)), "one of Log, Power and Logit"),
        ((), (Log(), Logit()), "one of Log, Power and Logit"),
        ((), (Difference(0),), "lag of at least 1, not 0"),
        ((), (Difference(-3),), "lag of at least 1, not -3"),
        ((), (Difference(1.5),), "whole lag"),
        ((), (RemovePattern(1),), "period of at least 2"),
        ((), (RemoveTrend(), RemoveTrend()), "'remove trend' stands twice"),
        ((), (RemovePattern(12), RemovePattern(12)), "'remove pattern 12' stands twice"),
        ((), (RemoveShift(4), RemoveShift(4)), "'remove shift from 4' stands twice"),
        ((), (RemoveShift("2021-03"),), "a period, a timestamp or an integer"),
        ((), (PerDay(), PerDay("workdays")), "by days or by workdays"),
        ((), (PerDay("weeks"),), "'days' or 'workdays'"),
        ((), (Power(float("nan")),), "finite exponent"),
        ((), (Logit(1.0, 1.0),), "lower bound below"),
        ((), ("log",), "is not a step"),
        ((FillGaps(0),), (), "period of at least 1"),
        ((FillGaps(1), FillGaps(12)), (), "each repair once"),
        ((Log(),), (), "is not a repair"),
    ],
)
def test_what_cannot_stand_together(repairs, steps, words):
    with pytest.raises(CheckError, match=words) as caught:
        Plan(repairs, steps)
    assert str(caught.value).endswith(".")
    assert "\n" not in str(caught.value)


def test_every_step_has_a_text():
    texts = {describe(step) for step in (PerDay(), Log(), Power(0.5), Logit(), Difference(), RemoveTrend(), FillGaps())}
    assert len(texts) == 7
