"""Named repairs of the time index: made, written into the code, or switched off and then told with their remedy."""

from __future__ import annotations

import re

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.intake import REPAIRS
from preflight_magic.plan.words import describe

N = 60


def walk(n=N, seed=1):
    return 50.0 + np.cumsum(np.random.default_rng(seed).standard_normal(n))


def on(index, name="berths"):
    return pd.Series(walk(len(index)), index=index, name=name)


def check(given, **options):
    return pf.check(given, cache=False, progress=False, **options)


def dates(freq, n=N, start="2012-01-01", **more):
    """Dates that do not state their frequency."""
    return pd.DatetimeIndex(pd.date_range(start, periods=n, freq=freq, **more).to_numpy(), name="day")


def business_days_without_holidays():
    days = dates("B", 150, "2021-01-04")
    return days[~((days.day == 1) | ((days.month == 5) & (days.day == 17)))]


MONTHS = dates("MS")
PERIODS = pd.period_range("2012-01", periods=N, freq="M")
HOLES = [5, 6, 20]
# Series as given, names of the repairs, calendar that comes of it.
MENDED = {
    "text of days": (on(dates("D").strftime("%Y-%m-%d")), ["read dates"], "daily"),
    "text of months": (on(MONTHS.strftime("%Y-%m")), ["read dates"], "monthly"),
    "text with hours": (on(dates("h").strftime("%Y-%m-%d %H:%M")), ["read dates"], "hourly"),
    "date objects": (on(pd.Index(list(dates("D").date), dtype=object)), ["read dates"], "daily"),
    "timestamps as objects": (on(pd.Index(list(MONTHS), dtype=object)), ["read dates"], "monthly"),
    "categories of text": (on(pd.CategoricalIndex(MONTHS.strftime("%Y-%m-%d"))), ["read dates"], "monthly"),
    "newest first": (on(MONTHS)[::-1], ["sort"], "monthly"),
    "shuffled": (on(PERIODS).sample(frac=1.0, random_state=1), ["sort"], "monthly"),
    "numbers downwards": (on(pd.RangeIndex(N, 0, -1)), ["sort"], "counter"),
    "a row twice": (on(MONTHS).iloc[[0, 0, *range(1, N)]], ["merge duplicates"], "monthly"),
    "periods twice": (on(PERIODS).iloc[[*range(N), 3, 4]], ["sort", "merge duplicates"], "monthly"),
    "month starts with gaps": (on(MONTHS).drop(MONTHS[HOLES]), ["regular calendar", "fill gaps"], "monthly"),
    "month ends with gaps": (on(dates("ME")).drop(dates("ME")[HOLES]), ["regular calendar", "fill gaps"], "monthly"),
    "periods with gaps": (on(PERIODS).drop(PERIODS[HOLES]), ["regular calendar", "fill gaps"], "monthly"),
    "numbers with gaps": (on(pd.RangeIndex(N)).drop(HOLES), ["regular calendar", "fill gaps"], "counter"),
    "holidays missing": (on(business_days_without_holidays()), ["regular calendar", "fill gaps"], "business daily"),
    "fiscal quarters with gaps": (on(dates("QS-FEB")).drop(dates("QS-FEB")[9]), REPAIRS[3:], "quarterly"),
    "a lost week": (on(dates("W-WED")).drop(dates("W-WED")[9]), ["regular calendar", "fill gaps"], "weekly"),
    "all at once": (
        on(MONTHS.strftime("%Y-%m-%d")).drop(MONTHS[HOLES].strftime("%Y-%m-%d"))[::-1].iloc[[0, *range(N - 3)]],
        REPAIRS,
        "monthly",
    ),
}


def season(given):
    return {"season": 12} if pd.api.types.is_integer_dtype(given.index.dtype) else {}


@pytest.mark.parametrize("what", MENDED)
def test_repairs_are_made_named_and_written_into_the_code(what):
    given, names, kind = MENDED[what]
    before = given.copy(deep=True)
    one = check(given, **season(given))["berths"]
    pd.testing.assert_series_equal(given, before)
    assert [" ".join(describe(repair).split()[:2]).removesuffix(" 12") for repair in one.plan.repairs] == [
        name for name in REPAIRS if name in names
    ]
    assert one.findings["time index"].measures["kind"] == kind
    # The plan takes the series as it was given, and so does its code.
    whole = one.plan.apply(given)
    assert whole.index.equals(one.series.index)
    pd.testing.assert_series_equal(whole, one.plan.apply(one.series), check_freq=False, rtol=1e-12)
    space: dict = {}
    exec(one.code(), space)
    pd.testing.assert_series_equal(
        space["prepare"](given), whole, check_freq=False, check_names=False, rtol=1e-9, atol=1e-9
    )
    history = one.series[:-4]
    forecast = one.plan.apply(one.series, history=history)[-4:]
    back, undone = space["restore"](forecast, history), one.plan.back_transform(forecast, history)
    pd.testing.assert_series_equal(back, undone, check_freq=False, check_names=False, rtol=1e-9)


@pytest.mark.parametrize("what", MENDED)
def test_repairs_that_are_switched_off_are_told_with_a_remedy(what):
    given, names, _ = MENDED[what]
    for name in names:
        allowed = [one for one in REPAIRS if one != name]
        with pytest.raises(pf.CheckError) as caught:
            check(given, repair=allowed, **season(given))
        assert "\n" not in str(caught.value)
    with pytest.raises(pf.CheckError):
        check(given, repair=False, **season(given))


@pytest.mark.parametrize("what", MENDED)
def test_the_proposed_code_mends_what_is_refused(what):
    """One remedy after the other, as a person would follow them, leads to a report without any repair of the index."""
    given, _, _ = MENDED[what]
    frame = given.to_frame()
    for _ in range(5):
        try:
            report = check(frame, repair="fill gaps", **season(frame))
        except pf.CheckError as error:
            frame = run(str(error), frame)
        else:
            assert all(describe(repair).startswith("fill gaps") for repair in report["berths"].plan.repairs)
            return
    raise AssertionError("five remedies were not enough")


def run(message, frame):
    """The frame after the code that a message proposes."""
    (code,) = re.findall(r"`(.*?)`", message)
    space = {"frame": frame, "pd": pd}
    if re.match(r"frame(\.index|\[[^=]*\])? = ", code):
        exec(code, space)
        return space["frame"]
    return eval(code, space)


REMEDIED = {
    "day first": dates("D").strftime("%d/%m/%Y"),
    "month first": dates("D").strftime("%m/%d/%Y"),
    "short years": dates("D").strftime("%d.%m.%y"),
    "text quarters": pd.Index([f"{year}Q{quarter}" for year in range(2000, 2015) for quarter in (1, 2, 3, 4)]),
    "mixed offsets": pd.Index(
        [
            one.isoformat()
            for one in dates("h", 200, "2023-10-27").tz_localize(
                "Europe/Oslo", ambiguous=np.ones(200, bool), nonexistent="shift_forward"
            )
        ]
    ),
    "year and month": pd.Index([year * 100 + month for year in range(2010, 2015) for month in range(1, 13)]),
    "year, month and day": pd.Index([int(day.strftime("%Y%m%d")) for day in dates("D")]),
    "whole floats": pd.Index(np.arange(N, dtype=float)),
    "words": pd.Index([f"row {i}" for i in range(N)]),
    "true or false": pd.Index([True, False] * 30),
    "whole text": pd.Index([str(i) for i in range(N)]),
    "every second number": pd.RangeIndex(0, 2 * N, 2),
    "4, 4 and 5 weeks": pd.DatetimeIndex(
        pd.Timestamp("2015-01-31") + pd.to_timedelta(np.r_[0, np.cumsum(np.tile([4, 4, 5], 20)[:-1])] * 7, "D")
    ),
    "every second month": dates("2MS"),
    "the fifteenth": MONTHS + pd.Timedelta(days=14),
    "leap days": pd.DatetimeIndex([pd.Timestamp(1904 + 4 * i, 2, 29) for i in range(24)]),
    "days where midnight is skipped": pd.date_range("2017-09-01", periods=N, freq="D").tz_localize(
        "America/Sao_Paulo", nonexistent="shift_forward"
    ),
    "numbers near the largest": pd.Index(np.arange(N) + (2**63 - 1 - N)),
}


@pytest.mark.parametrize("what", REMEDIED)
def test_what_no_repair_mends_is_refused_with_code_that_does(what):
    frame = on(REMEDIED[what]).to_frame()
    options = {"season": 12}
    for _ in range(3):
        try:
            report = check(frame, **options)
        except pf.CheckError as error:
            frame = run(str(error), frame)
        else:
            assert report["berths"].problem is None
            return
    raise AssertionError("three remedies were not enough")


def test_the_week_more_at_the_end_of_some_years_is_no_irregularity():
    weeks = np.tile([4, 4, 5], 20)
    weeks[23] = 6
    index = pd.DatetimeIndex(pd.Timestamp("2015-01-31") + pd.to_timedelta(np.cumsum(weeks) * 7, "D"))
    with pytest.raises(pf.CheckError, match="calendar of 4, 4 and 5 weeks"):
        check(on(index))
    weeks[[2, 9, 14, 30]] = 6
    with pytest.raises(pf.CheckError, match="the usual step is 28 days"):
        check(on(pd.DatetimeIndex(pd.Timestamp("2015-01-31") + pd.to_timedelta(np.cumsum(weeks) * 7, "D"))))


# --------------------------------------------------------------------------------------------------- clocks that change
def clock(start, hours=24 * 14):
    return pd.date_range(start, periods=hours, freq="h", tz="Europe/Oslo")


@pytest.mark.parametrize("start", ["2023-03-20", "2023-10-23"])
def test_hours_with_a_zone_are_regular_across_a_change_of_the_clocks(start):
    one = check(on(clock(start)))["berths"]
    assert one.plan.repairs == ()
    assert one.findings["time index"].measures["kind"] == "hourly"


def test_the_hour_that_local_clocks_skip_is_put_in():
    given = on(clock("2023-03-20").tz_localize(None))
    one = check(given)["berths"]
    assert one.plan.repairs[0] == pf.RegularCalendar("h")
    assert one.series.isna().sum() == 1


def test_the_hour_that_local_clocks_repeat_asks_for_the_zone():
    given = on(clock("2023-10-23").tz_localize(None))
    with pytest.raises(pf.CheckError, match=r"differ, at 2023-10-29 02:00 .* where clocks are set back") as caught:
        check(given.to_frame())
    frame = run(str(caught.value), given.to_frame())
    assert check(frame)["berths"].plan.repairs == ()
    # Where both hours have the same value nothing is lost.
    given[given.index == "2023-10-29 02:00"] = 7.0
    assert pf.MergeDuplicates() in check(given)["berths"].plan.repairs


def test_an_hour_is_an_hour_where_midnight_does_not_exist():
    index = pd.date_range("2017-10-12", periods=120, freq="h", tz="America/Sao_Paulo")
    assert check(on(index))["berths"].problem is None


# --------------------------------------------------------------------------------------------- rows that do not agree
def test_rows_with_the_same_stamp_have_to_agree_in_each_column():
    index = MONTHS[[0, 1, 1, *range(2, N - 1)]]
    frame = pd.DataFrame({"cargo": walk(), "fares": walk(seed=2)}, index=index)
    frame["fares"] = frame["fares"].groupby(level=0).transform("first")
    report = check(frame)
    assert report["fares"].problem is None
    assert "column 'cargo': rows with the same stamp differ, at 2012-02-01 for example" in report["cargo"].problem
    with pytest.raises(pf.CheckError, match=r"differ, .* at 2012-02-01; merge them with"):
        report["fares"].plan.apply(frame["cargo"])


def test_a_missing_value_gives_way_to_the_one_of_the_same_stamp():
    index = MONTHS[[0, 1, 1, *range(2, N - 1)]]
    values = pd.Series(walk(), index=index, name="berths")
    values.iloc[1] = np.nan
    one = check(values)["berths"]
    assert one.series.notna().all()
    assert one.series.iloc[1] == values.iloc[2]


def test_a_long_table_is_mended_series_by_series():
    parts = [on(MONTHS, "a")[::-1], on(MONTHS, "b").drop(MONTHS[4])]
    table = pd.concat([one.rename("v").rename_axis("day").reset_index().assign(line=one.name) for one in parts])
    table["day"] = table["day"].astype(str)
    report = check(table, time="day", series="line", value="v")
    names = {one.name: [describe(repair) for repair in one.plan.repairs] for one in report}
    assert names == {"a": ["read dates", "sort"], "b": ["read dates", "regular calendar", "fill gaps 12"]}


def test_less_than_half_of_a_calendar_is_none():
    with pytest.raises(pf.CheckError):
        check(on(dates("D", 300)[::7][:3].append(dates("D", 40, "2016-01-01"))))


def far(*stamps):
    return pd.DatetimeIndex(np.array(stamps, dtype="datetime64[ns]"))


@pytest.mark.parametrize(
    ("index", "told"),
    [
        (far(*["2020-01-01"] * N), r"holds one stamp only, 2020-01-01; .* with series=."),
        (far("1678-01-01", *MONTHS[2:].to_numpy(), "2262-04-01T05"), "the usual step is 31 days"),
        (far(*dates("min")[:-1].to_numpy(), "2262-04-11"), "after 2012-01-01 00:58 comes 2262-04-11"),
    ],
)
def test_stamps_at_the_ends_of_time_are_refused_at_once(index, told):
    with pytest.raises(pf.CheckError, match=told) as caught:
        check(on(index).groupby(level=0).transform("first"))
    assert len(str(caught.value)) < 500


@pytest.mark.parametrize("what", MENDED)
def test_repairs_go_through_a_record(what, tmp_path):
    given, _, _ = MENDED[what]
    report = check(given, **season(given))
    report.save(tmp_path / "report.json")
    loaded = pf.load(tmp_path / "report.json")
    assert loaded["berths"].plan == report["berths"].plan
    assert loaded.attach(given.to_frame())["berths"].plan == report["berths"].plan


@pytest.mark.parametrize("freq", ["nonsense", "MS\n", 'MS"); boom(); ("', "", 5, None, "MS" * 20])
@pytest.mark.parametrize("kind", ["dates", "periods"])
def test_a_calendar_needs_a_frequency_that_can_be_written_into_code(freq, kind):
    with pytest.raises(pf.CheckError, match="RegularCalendar needs"):
        pf.Plan((pf.RegularCalendar(freq, kind),))
