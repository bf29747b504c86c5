"""What a person may ask of a series, and what is understood of what they type."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import (
    Difference,
    Log,
    Logit,
    PerDay,
    Power,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Step,
)
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
from tests.present.fakes import FakeSeries


def test_turning_steps_keeps_canonical_order() -> None:
    steps: tuple[Step, ...] = (Log(), Difference(12), Difference(1))
    assert with_turned(steps, Difference(12), False) == (Log(), Difference(1))
    assert with_turned((Difference(1),), Difference(12), True) == (Difference(12), Difference(1))
    assert with_turned((Difference(1),), Difference(1), True) == (Difference(1), Difference(1))


def test_of_log_power_and_logit_the_last_one_stays() -> None:
    assert with_turned((Log(), Difference(1)), Power(0.5), True) == (Power(0.5), Difference(1))
    assert with_turned((Power(0.5),), Log(), True) == (Log(),)


def test_steps_that_make_sense_for_monthly_totals() -> None:
    shift = RemoveShift(pd.Period("2019-04", "M"))
    view = FakeSeries(alternatives=(("shift", 9.0, (shift,)),))
    offered = could_put_in(view, view.plan.steps)
    expected = (PerDay("days"), PerDay("workdays"), Difference(1), RemoveTrend(), shift, RemovePattern(12))
    assert offered == expected
    assert Difference(1) not in could_put_in(view, (Difference(1), Difference(1)))


def test_no_log_of_negative_values_no_days_of_weeks_logit_of_shares() -> None:
    index = pd.period_range("2020-01-06", periods=40, freq="W")
    signed = FakeSeries(series=pd.Series(np.sin(np.arange(40.0)), index), noun="week", alternatives=())
    assert could_put_in(signed, ()) == (Difference(12), Difference(1), RemoveTrend(), RemovePattern(12))
    shares = FakeSeries(series=pd.Series(0.5 + 0.4 * np.sin(np.arange(40.0)), index), noun="week", alternatives=())
    assert could_put_in(shares, ())[:2] == (Log(), Logit())


def test_a_wish_is_fulfilled_in_order() -> None:
    view = FakeSeries()
    wish = Wish((4,), (("2020-03", "2020-06"),), (Log(),))
    base = read_anew(view, wish)
    assert view.calls == [("without_span", ("2020-03", "2020-06")), ("with_season", (4,))]
    assert examine(base, wish).plan.steps == (Log(),)
    assert examine(base, Wish()) is base
    assert read_anew(view, Wish()) is view


@pytest.mark.parametrize(
    ("text", "season"), [("12", (12,)), (" 24, 168 ", (24, 168)), ("168;24", (24, 168)), ("1", (1,))]
)
def test_seasons_as_typed(text: str, season: tuple[int, ...]) -> None:
    assert read_season(text) == season


@pytest.mark.parametrize("text", ["", "twelve", "-12", "12.5", "1e3", "12,,x"])
def test_no_seasons(text: str) -> None:
    with pytest.raises(ValueError, match="no season"):
        read_season(text)


MONTHS = pd.period_range("2019-01", periods=36, freq="M")


@pytest.mark.parametrize(
    "text", ["2020-03..2020-06", " 2020-03 .. 2020-06", "2020-03 to 2020-06", "2020-03\u20262020-06"]
)
def test_spans_as_typed(text: str) -> None:
    assert read_span(text, MONTHS) == ("2020-03", "2020-06")


def test_one_stamp_is_a_span_and_rows_are_numbers() -> None:
    assert read_span("2020-03", MONTHS) == ("2020-03", "2020-03")
    assert read_span("3..5", pd.RangeIndex(40)) == (3, 5)


@pytest.mark.parametrize("text", ["", "..", "2020..2021..2022", "2020-03.."])
def test_no_spans(text: str) -> None:
    with pytest.raises(ValueError, match="no span"):
        read_span(text, MONTHS)
    with pytest.raises(ValueError, match=r"write 20\.\.22"):
        read_span("2020-03..2020-04", pd.RangeIndex(40))


@pytest.mark.parametrize(
    ("index", "example"),
    [
        (MONTHS, "2020-07..2020-09"),
        (pd.period_range("2015Q1", periods=20, freq="Q"), "2017Q3..2018Q1"),
        (pd.period_range("2020-01-06", periods=20, freq="W"), "2020-03-16..2020-03-30"),
        (pd.date_range("2020-01-01", periods=20, freq="D"), "2020-01-11..2020-01-13"),
        (pd.date_range("2020-01-01", periods=40, freq="h"), "2020-01-01 20:00..2020-01-01 22:00"),
        (pd.RangeIndex(40), "20..22"),
    ],
)
def test_example_of_a_span_can_be_typed(index: pd.Index, example: str) -> None:
    assert span_example(index) == example
    start, end = read_span(example, index)
    inside = index.slice_indexer(start, end)
    assert inside.stop - inside.start == 3
