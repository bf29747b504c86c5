"""Numbers, p-values, dates and names in words."""

import math

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Difference, FillGaps, HypothesisTest, Log, PerDay, Power, RemoveShift, Root
from preflight_magic.present import words
from preflight_magic.present.measures import root_text


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0, "0"),
        (1, "1"),
        (-2.5, "−2.5"),
        (0.0123456, "0.0123"),
        (0.05, "0.05"),
        (-3.49999, "−3.50"),
        (1234.5678, "1,235"),
        (1_234_567.0, "1,234,567"),
        (312.4, "312"),
        (99.96, "100"),
        (0.00001234, "1.23e−5"),
        (2.5e12, "2.5e12"),
        (math.inf, "∞"),
        (-math.inf, "−∞"),
        (math.nan, "–"),
    ],
)
def test_number(value: float, text: str) -> None:
    assert words.number(value) == text


@pytest.mark.parametrize(
    ("value", "bound", "text"),
    [
        (0.032, "exact", "0.032"),
        (0.5, "exact", "0.500"),
        (0.0009, "exact", "< 0.001"),
        (0.0, "exact", "< 0.001"),
        (0.001, "exact", "0.001"),
        (0.9999, "exact", "> 0.999"),
        (0.01, "at most", "at most 0.010"),
        (0.0001, "at most", "< 0.001"),
        (0.1, "at least", "at least 0.100"),
        (0.0001, "at least", "at least 0.0001"),
        (math.nan, "exact", "–"),
    ],
)
def test_p_value(value: float, bound: str, text: str) -> None:
    assert words.p_value(value, bound) == text


@pytest.mark.parametrize(
    ("label", "noun", "text"),
    [
        (pd.Period("2021-03", "M"), "month", "2021-03"),
        (pd.Period("2021Q1", "Q"), "quarter", "2021 Q1"),
        (pd.Period("2021", "Y"), "year", "2021"),
        (pd.Period("2021-03-04", "D"), "day", "2021-03-04"),
        (pd.Period("2021-03-01", "W"), "week", "week of 2021-03-01"),
        (pd.Timestamp("2021-03-01"), "month", "2021-03"),
        (pd.Timestamp("2021-03-31"), "quarter", "2021 Q1"),
        (pd.Timestamp("2021-12-31"), "year", "2021"),
        (pd.Timestamp("2021-03-04"), "business day", "2021-03-04"),
        (pd.Timestamp("2021-03-04 13:00"), "hour", "2021-03-04 13:00"),
        (pd.Timestamp("2021-03-04 00:00"), "hour", "2021-03-04 00:00"),
        (17, "step", "17"),
        (np.int64(-3), "step", "−3"),
    ],
)
def test_stamp(label: object, noun: str, text: str) -> None:
    assert words.stamp(label, noun) == text


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("passengers", "passengers"),
        (("north", 3), "north / 3"),
        ("two\nlines\tand\r more", "two lines and more"),
        ("hidden\u202eturn\x00", "hidden turn"),
        ("\ud800", "(no name)"),
        ("", "(no name)"),
        ("👩\u200d✈️", "👩\u200d✈️"),
        (7, "7"),
    ],
)
def test_name(name: object, text: str) -> None:
    assert words.name_text(name) == text


def test_long_name_is_cut() -> None:
    assert words.name_text("x" * 200, 40) == "x" * 39 + "…"


@pytest.mark.parametrize(
    ("log_odds", "text"), [(0.0, "best"), (0.1, "1.1 to 1"), (3.0, "20 to 1"), (9.0, "over 1,000 to 1")]
)
def test_odds(log_odds: float, text: str) -> None:
    assert words.odds(log_odds) == text


def test_verdicts_differ_in_shape() -> None:
    assert len(set(words.SHAPES.values())) == 4
    assert words.verdict_text("inconclusive") == "◐ inconclusive"


def test_meaning_of_steps() -> None:
    assert words.meaning(Difference(12), "month") == "change against the value 12 months before"
    assert words.meaning(Difference(1), "month") == "change against the value 1 month before"
    assert words.meaning(RemoveShift(pd.Period("2021-03", "M")), "month") == "the change of level at 2021-03 subtracted"
    assert words.meaning(Power(0.5, 2.0)) == "Box-Cox power 0.5 of the value plus 2"
    assert words.meaning(PerDay("workdays")) == "each total divided by its number of working days"
    assert "12 months" in words.meaning(FillGaps(12), "month")
    assert words.meaning(Log()) == "natural logarithm"


def test_details_of_a_test() -> None:
    options = {"series": "log", "kernel": "Bartlett"}
    test = HypothesisTest("KPSS", "level stationary", 1.9, 0.01, "at most", 1180, 4, "ct", {"5%": 0.146}, options)
    assert words.test_details(test) == (
        "bandwidth 4; constant and trend; 1,180 observations; critical values 5% 0.146; kernel Bartlett"
    )


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (None, "–"),
        (pd.NA, "–"),
        (True, "yes"),
        (np.bool_(False), "no"),
        (1200, "1,200"),
        (0.25, "0.25"),
        ("as\ngiven", "as given"),
        (pd.Period("2021-03", "M"), "2021-03"),
        ((1, 2.5, None), "1, 2.5, –"),
        ({"lower_bound": -1.0, "upper": 2}, "lower bound: −1, upper: 2"),
        (np.arange(10), "0, 1, 2, 3, 4, 5, 6, 7 and 2 more"),
        ((), "–"),
    ],
)
def test_value(value: object, text: str) -> None:
    assert words.value_text(value) == text


def test_sentences_begin_with_a_capital_but_symbols_do_not() -> None:
    assert words.sentence("a wandering season") == "A wandering season"
    assert words.sentence("over 99 %") == "Over 99\u00a0%"
    assert words.sentence("d = 1") == "d = 1"
    assert words.sentence("KPSS rejects") == "KPSS rejects"
    assert words.sentence("") == ""


def test_root() -> None:
    assert root_text(Root("AR", 0.62, math.inf, 0.11), "month") == "AR 0.62 ± 0.22, no cycle"
    assert root_text(Root("MA", 0.8, 5.3, math.nan), "month") == "MA 0.8, a cycle of 5.3 months"


def test_width_counts_columns_of_a_terminal() -> None:
    assert words.width_of("a\u0301b") == 2
    assert words.width_of("漢字") == 4
    assert words.fit("漢字漢字", 5) == "漢字…"
    assert words.fit("ab", 4) == "ab  "
