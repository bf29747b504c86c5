"""Calendars: every kind is recognised without a stated frequency, and every refusal names its stamp and its cure."""

import re

import numpy as np
import pandas as pd
import pytest

from preflight_magic.intake.calendar import calendar_of, recognise
from preflight_magic.model import CheckError


def bare(freq, n=60, start="2019-01-01", tz=None):
    """Dates that do not state their frequency, as they come from a file."""
    return pd.DatetimeIndex(pd.date_range(start, periods=n, freq=freq, tz=tz), freq=None)


KINDS = [
    ("YS-JAN", "yearly", ()),
    ("YE-MAR", "yearly", ()),
    ("QS-JAN", "quarterly", (4,)),
    ("QS-FEB", "quarterly", (4,)),
    ("QE-DEC", "quarterly", (4,)),
    ("QE-OCT", "quarterly", (4,)),
    ("MS", "monthly", (12,)),
    ("ME", "monthly", (12,)),
    ("BMS", "monthly", (12,)),
    ("BME", "monthly", (12,)),
    *((f"W-{day}", "weekly", (52,)) for day in ("MON", "TUE", "WED", "THU", "FRI", "SAT", "SUN")),
    ("D", "daily", (7,)),
    ("B", "business daily", (5,)),
    ("h", "hourly", (24, 168)),
    ("6h", "hourly", (4, 28)),
    ("15min", "minutely", (96, 672)),
]


@pytest.mark.parametrize("tz", [None, "Europe/Berlin"])
@pytest.mark.parametrize(("freq", "kind", "seasons"), KINDS)
def test_dates_without_a_stated_frequency_are_recognised(freq, kind, seasons, tz):
    index = bare(freq, tz=tz)
    calendar, regular = recognise(index)
    assert (calendar.kind, calendar.freq, calendar.seasons) == (kind, freq, seasons)
    assert regular.freqstr == freq
    assert regular.equals(index)
    assert index.freq is None


@pytest.mark.parametrize(
    ("freq", "kind"),
    [
        ("Y-DEC", "yearly"),
        ("Q-DEC", "quarterly"),
        ("Q-MAR", "quarterly"),
        ("M", "monthly"),
        ("W-SUN", "weekly"),
        ("W-WED", "weekly"),
        ("D", "daily"),
        ("h", "hourly"),
        ("15min", "minutely"),
    ],
)
def test_periods_are_recognised(freq, kind):
    index = pd.period_range("2019-01-01", periods=40, freq=freq)
    calendar, regular = recognise(index)
    assert (calendar.kind, calendar.freq) == (kind, freq)
    assert regular is index


def test_a_stated_frequency_is_taken_at_its_word():
    calendar, _ = recognise(pd.date_range("2019-01-01", periods=9, freq="WOM-3FRI"))
    assert (calendar.kind, calendar.freq) == ("monthly", "WOM-3FRI")


def test_hours_are_steps_of_absolute_time_and_days_are_local():
    """The clocks of Berlin change on 2019-03-31 and 2019-10-27."""
    assert recognise(bare("h", 24 * 300, tz="Europe/Berlin"))[0].kind == "hourly"
    assert recognise(bare("D", 300, tz="Europe/Berlin"))[0].kind == "daily"
    with pytest.raises(CheckError, match=r"after 2019-03-31 comes 2019-04-01 01:00 where 2019-04-01 is expected"):
        recognise(bare("24h", 120, tz="Europe/Berlin"))


@pytest.mark.parametrize("unit", ["s", "ms", "us", "ns"])
def test_the_resolution_of_the_stamps_does_not_matter(unit):
    index = bare("MS").as_unit(unit)
    calendar, regular = recognise(index)
    assert calendar.freq == "MS"
    assert regular.dtype == index.dtype


def test_integers_count_by_one():
    calendar, regular = recognise(pd.Index(range(1990, 2020)))
    assert (calendar.kind, calendar.freq, calendar.seasons) == ("counter", None, ())
    assert list(regular[:2]) == [1990, 1991]


MISSING = [
    (bare("MS"), [40, 41], "after 2022-04 comes 2022-07 where 2022-05 is expected"),
    (bare("ME", tz="Europe/Berlin"), [3], "after 2019-03 comes 2019-05 where 2019-04 is expected"),
    (bare("QE-DEC"), [8], "after 2020-12 comes 2021-06 where 2021-03 is expected"),
    (bare("YS-JAN"), [5], "after 2023 comes 2025 where 2024 is expected"),
    (bare("W-THU"), [2], "after 2019-01-10 comes 2019-01-24 where 2019-01-17 is expected"),
    (bare("D"), [30], "after 2019-01-30 comes 2019-02-01 where 2019-01-31 is expected"),
    (bare("B"), [4], "after 2019-01-04 comes 2019-01-08 where 2019-01-07 is expected"),
    (bare("h"), [25], "after 2019-01-02 00:00 comes 2019-01-02 02:00 where 2019-01-02 01:00 is expected"),
    (pd.period_range("2019-01", periods=60, freq="M"), [3], "after 2019-03 comes 2019-05 where 2019-04 is expected"),
    (pd.period_range("2019", periods=60, freq="Q"), [3], "after 2019Q3 comes 2020Q1 where 2019Q4 is expected"),
    (
        pd.period_range("2019", periods=60, freq="W"),
        [1],
        "after 2018-12-31 comes 2019-01-14 where 2019-01-07 is expected",
    ),
    (pd.RangeIndex(60), [5], "after 4 comes 6, 5 is expected"),
    (pd.RangeIndex(0, 120, 2), [], "after 0 comes 2, 1 is expected"),
]


@pytest.mark.parametrize(("index", "gone", "told"), MISSING)
def test_missing_stamps_are_named_and_the_proposed_code_mends_them(index, gone, told):
    frame = pd.DataFrame({"freight": np.arange(60.0)}, index=index).drop(index[gone])
    with pytest.raises(CheckError, match=re.escape(told)) as caught:
        recognise(frame.index)
    (code,) = re.findall(r"`(.*?)`", str(caught.value))
    mended = eval(code, {"frame": frame, "pd": pd})
    calendar, regular = recognise(mended.index)
    assert len(regular) == 60
    assert calendar.kind in str(caught.value) or calendar.kind == "counter"


ONE_A_PERIOD = [
    (bare("MS") + pd.Timedelta(days=14), "M"),
    (bare("D") + pd.to_timedelta(np.arange(60) % 7 * 11, unit="min"), "D"),
    (bare("WOM-3FRI"), "M"),
    (bare("24h", 120, tz="Europe/Berlin")[50:110], "D"),
    (bare("QS-JAN") + pd.to_timedelta(np.arange(60) % 3, unit="D"), "Q"),
]


@pytest.mark.parametrize(("index", "freq"), ONE_A_PERIOD)
def test_one_stamp_a_period_is_to_become_periods(index, freq):
    frame = pd.DataFrame({"freight": np.arange(60.0)}, index=index)
    with pytest.raises(CheckError, match="so use periods with") as caught:
        recognise(index)
    (code,) = re.findall(r"`(.*?)`", str(caught.value))
    calendar, _ = recognise(eval(code, {"frame": frame}).index)
    assert calendar.freq.split("-")[0] == freq


def test_unsorted_repeated_and_missing_stamps_are_named():
    index = bare("MS", 12)
    with pytest.raises(CheckError, match=r"not sorted: 2019-11-01 in row 2 follows 2019-12-01; .*frame.sort_index\(\)"):
        recognise(index[::-1])
    with pytest.raises(CheckError, match=r"repeats 2019-03-01 in row 4; .*~frame.index.duplicated\(\)"):
        recognise(index[:3].append(index[2:]))
    with pytest.raises(CheckError, match=r"lacks 1 stamp, the first in row 2; .*frame.index.notna\(\)"):
        recognise(index[:1].append(pd.DatetimeIndex([pd.NaT])).append(index[1:]))


@pytest.mark.parametrize(
    ("index", "told"),
    [
        (bare("2MS"), "stamps every 2 months"),
        (bare("2W-SUN"), "stamps every 14 days"),
        (bare("30s"), "stamps every 30 seconds"),
        (pd.period_range("2019-01", periods=20, freq="2M"), "periods of '2M'"),
    ],
)
def test_regular_steps_without_a_calendar_are_to_be_numbered(index, told):
    with pytest.raises(CheckError, match=told) as caught:
        recognise(index)
    assert "`frame.reset_index(drop=True)` and give the season" in str(caught.value)


def test_stamps_that_follow_nothing():
    index = pd.DatetimeIndex(["2019-01-01", "2019-01-02", "2019-01-09", "2019-01-10", "2019-03-05", "2019-03-06"])
    with pytest.raises(CheckError, match=r"the usual step is 1 day, but after 2019-01-02 comes 2019-01-09"):
        recognise(index)


def test_an_index_that_holds_no_dates():
    with pytest.raises(CheckError, match=r"text, beginning with '2019-01', .* = pd.to_datetime\(frame.index, "):
        recognise(pd.Index(["2019-01", "2019-02"]))
    with pytest.raises(CheckError, match=r"with decimals, beginning with 1990.0, .*frame.index.astype\(int\)"):
        recognise(pd.Index([1990.0, 1991.0]))
    with pytest.raises(CheckError, match="2 levels"):
        recognise(pd.MultiIndex.from_product([["a"], [1, 2]]))


@pytest.mark.parametrize("freq", ["2MS", "5D", "7h", "s", "100min", "-1D", "cbh"])
def test_frequencies_without_a_calendar(freq):
    assert calendar_of(freq) is None
