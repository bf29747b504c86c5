"""A series examined again as a person wants it: other steps, another season, without a span."""

from __future__ import annotations

import pandas as pd
import pytest

import preflight_magic as pf
from tests.sentences import assert_reads_well


@pytest.fixture(scope="module")
def passengers():
    return pf.check(pf.demo.ferry_line()["passengers"], progress=False)["passengers"]


def test_with_plan_takes_the_steps_in_canonical_order_and_keeps_the_recommendation(passengers):
    one = passengers.with_plan([pf.RemoveTrend(), pf.Log(), pf.RemovePattern(12)])
    assert one.plan.steps == (pf.Log(), pf.RemoveTrend(), pf.RemovePattern(12))
    assert one.recommended == passengers.recommended
    assert one.findings["unit root"] == passengers.findings["unit root"]
    assert one.findings["roots"] != passengers.findings["roots"]
    expected = one.plan.apply(passengers.series).dropna()
    pd.testing.assert_series_equal(one.transformed, expected)


def test_with_plan_agrees_with_switching_one_step(passengers):
    left = passengers.leave_out(pf.Difference(12))
    assert passengers.with_plan([pf.Log(), pf.Difference(1)]).findings["residuals"] == left.findings["residuals"]


def test_with_season_checks_anew(passengers):
    expected = pf.check(pf.demo.ferry_line()["passengers"], season=1, progress=False)["passengers"]
    one = passengers.with_season(1)
    assert one.season == (1,)
    assert one.plan == one.recommended == expected.plan
    assert one.findings["time index"].measures["season_asked"]
    assert one.findings["season"].measures.get("season_shares") == expected.findings["season"].measures.get(
        "season_shares"
    )
    assert passengers.with_season((12, 4)).season == (4, 12)


def test_without_span_treats_it_as_missing(passengers):
    given = pf.demo.ferry_line()["passengers"]
    expected = pf.check(given, exclude=[("2020-03", "2020-05")], progress=False)["passengers"]
    one = passengers.without_span("2020-03", "2020-05")
    pd.testing.assert_series_equal(one.series, expected.series)
    assert one.plan == expected.plan
    assert one.without_span("2015-01", "2015-01").series.isna().sum() == 4
    assert passengers.series.isna().sum() == 0


def test_repairs_of_the_index_stay_in_the_plan():
    given = pf.demo.ferry_line()["passengers"]
    shuffled = given.iloc[[*range(1, len(given)), 0]]
    one = pf.check(shuffled, progress=False)["passengers"]
    assert one.plan.repairs
    assert one.with_season(1).plan.repairs == one.plan.repairs
    assert one.without_span("2020-03", "2020-05").plan.repairs[:-1] == one.plan.repairs


@pytest.mark.parametrize(
    "change",
    [
        lambda one: one.with_season(12.5),
        lambda one: one.with_season(0),
        lambda one: one.with_season(500),
        lambda one: one.without_span("2031-01", "2031-04"),
        lambda one: one.without_span("once", "later"),
        lambda one: one.without_span("2013-01", "2024-10"),
        lambda one: one.with_plan([pf.Log(), pf.Power(0.5)]),
        lambda one: one.with_plan(["log"]),
    ],
    ids=["fraction", "zero", "too long", "outside", "no dates", "too much", "two powers", "no step"],
)
def test_what_cannot_be_done_is_told_in_a_sentence(passengers, change):
    with pytest.raises(pf.CheckError) as error:
        change(passengers)
    told = str(error.value)
    assert_reads_well(told, whole=False)
    assert told.endswith(".")


def test_a_series_that_cannot_be_checked_says_why_again():
    frame = pf.demo.ferry_line()[["passengers"]].assign(closed=1.0)
    closed = pf.check(frame, progress=False)["closed"]
    for change in (lambda: closed.with_season(4), lambda: closed.without_span("2014-01", "2014-02")):
        with pytest.raises(pf.CheckError, match="one value only"):
            change()
