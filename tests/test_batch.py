"""Many series: order, cache, pools, progress, and the caller's data left alone."""

from __future__ import annotations

import multiprocessing
import threading
from collections import OrderedDict
from concurrent.futures import ProcessPoolExecutor, ThreadPoolExecutor

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic import batch
from tests.small_table import BAD, NAMES, small_table


@pytest.fixture
def climbs(monkeypatch):
    """An empty cache, and the names of the series that were climbed."""
    monkeypatch.setattr(batch, "_cache", OrderedDict())
    seen = []
    original = batch.climb

    def counted(series, settings):
        seen.append(series.name)
        return original(series, settings)

    monkeypatch.setattr(batch, "climb", counted)
    return seen


def same(one, other):
    assert one.names == other.names
    pd.testing.assert_frame_equal(one.overview, other.overview)
    for first, second in zip(one, other, strict=True):
        assert first.plan == second.plan
        assert first.answer == second.answer
        assert list(first.findings) == list(second.findings)
        for a, b in zip(first.findings.values(), second.findings.values(), strict=True):
            assert (a.headline, a.reason, a.verdict, a.steps) == (b.headline, b.reason, b.verdict, b.steps)
        pd.testing.assert_series_equal(first.transformed, second.transformed)


# -------------------------------------------------------------------------------------------------------- cache
def test_identical_series_and_options_are_climbed_once(climbs):
    one = pf.check(small_table(), progress=False)
    again = pf.check(small_table(), progress=False)
    assert climbs == list(NAMES)
    same(one, again)


@pytest.mark.parametrize(
    "change",
    [
        {"season": 4},
        {"season": (4, 7)},
        {"horizon": 3},
        {"significance": 0.1},
        {"exclude": [("2001", "2002")]},
        {"repair": False},
    ],
    ids=str,
)
def test_other_options_are_climbed_again(climbs, change):
    frame = small_table()[["cargo"]]
    pf.check(frame, progress=False)
    pf.check(frame, progress=False, **change)
    expected = 1 if change == {"repair": False} else 2
    # Without a gap there is nothing to repair, so the series is the same with and without.
    assert climbs.count("cargo") == expected


@pytest.mark.parametrize("how", ["value", "name", "start", "freq", "gap"])
def test_other_series_are_climbed_again(climbs, how):
    y = small_table()["cargo"]
    pf.check(y, season=1, progress=False)
    match how:
        case "value":
            y = y.mask(y.index == y.index[9], y.iloc[9] + 1e-9)
        case "name":
            y = y.rename("load")
        case "start":
            y = y.set_axis(pd.period_range("1991", periods=30, freq="Y"))
        case "freq":
            y = y.set_axis(pd.period_range("1990-01", periods=30, freq="M"))
        case "gap":
            y = y.mask(y.index == y.index[9])
    pf.check(y, season=1, progress=False)
    assert len(climbs) == 2


def test_names_that_print_alike_are_told_apart(climbs):
    y = small_table()["cargo"]
    pf.check(y.rename("1"), progress=False)
    found = pf.check(y.rename(1), progress=False)
    assert len(climbs) == 2
    assert found.names == (1,)


def test_only_new_columns_are_climbed(climbs):
    frame = small_table()
    pf.check(frame, only=["fares"], progress=False)
    report = pf.check(frame, progress=False)
    assert climbs == ["fares", "cargo", "crew"]
    assert report.names == NAMES


def test_cache_can_be_turned_off(climbs):
    for _ in range(2):
        pf.check(small_table()[["cargo"]], cache=False, progress=False)
    assert climbs == ["cargo", "cargo"]
    assert not batch._cache
    pf.check(small_table()[["cargo"]], progress=False)
    assert len(batch._cache) == 1


def test_cache_is_bounded_and_drops_the_oldest(climbs, monkeypatch):
    monkeypatch.setattr(batch, "CACHE_SIZE", 2)
    frame = small_table()
    pf.check(frame, progress=False)
    assert len(batch._cache) == 2
    pf.check(frame[["crew"]], progress=False)
    pf.check(frame[["fares"]], progress=False)
    assert climbs == list(NAMES)
    # The least recently used one is dropped: now "crew".
    pf.check(frame[["cargo"]], progress=False)
    pf.check(frame[["fares"]], progress=False)
    assert climbs == [*NAMES, "cargo"]


def test_table_larger_than_the_cache(climbs, monkeypatch):
    monkeypatch.setattr(batch, "CACHE_SIZE", 1)
    frame = small_table()
    first = pf.check(frame[["cargo"]], progress=False)
    report = pf.check(frame[["fares", "crew", "cargo"]], progress=False)
    assert report.names == ("fares", "crew", "cargo")
    assert report["cargo"].plan == first["cargo"].plan


def test_cached_findings_cannot_be_spoilt(climbs):
    report = pf.check(small_table()[["cargo"]], progress=False)
    report["cargo"].findings.clear()
    mine = report["cargo"].transformed
    mine.iloc[:] = 0.0
    again = pf.check(small_table()[["cargo"]], progress=False)["cargo"]
    assert again.findings
    assert (again.transformed != 0).any()
    assert climbs == ["cargo"]


# -------------------------------------------------------------------------------------------------------- pools
def test_threads_give_the_same_report():
    frame = small_table(bad=True)
    with ThreadPoolExecutor(2) as pool:
        found = pf.check(frame, pool=pool, cache=False, progress=False)
    same(found, pf.check(frame, progress=False))


def test_processes_give_the_same_report():
    frame = small_table(bad=True)
    with ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn")) as pool:
        found = pf.check(frame, pool=pool, cache=False, progress=False)
    same(found, pf.check(frame, progress=False))


def test_pool_fills_and_reads_the_cache(monkeypatch):
    monkeypatch.setattr(batch, "_cache", OrderedDict())
    threads = set()
    original = batch.climb

    def seen(series, settings):
        threads.add((series.name, threading.current_thread() is threading.main_thread()))
        return original(series, settings)

    monkeypatch.setattr(batch, "climb", seen)
    frame = small_table()
    pf.check(frame[["fares"]], progress=False)
    with ThreadPoolExecutor(1) as pool:
        report = pf.check(frame, pool=pool, progress=False)
    assert threads == {("fares", True), ("cargo", False), ("crew", False)}
    assert report.names == NAMES


# ----------------------------------------------------------------------------------------------------- streaming
def test_stream_yields_reports_as_they_come(climbs):
    reports = pf.stream(small_table(bad=True), progress=False)
    assert climbs == []
    first = next(reports)
    assert first.name == "cargo"
    assert climbs == ["cargo"]
    second = next(reports)
    assert (second.name, second.verdict) == (BAD, "infeasible")
    assert [one.name for one in reports] == ["fares", "crew"]


def test_stream_can_be_left(climbs):
    for one in pf.stream(small_table(), progress=True):
        assert one.name == "cargo"
        break
    assert climbs == ["cargo"]


def test_stream_and_check_agree():
    frame = small_table()
    same(pf.Report(pf.stream(frame, season=1, progress=False)), pf.check(frame, season=1, progress=False))


def test_stream_refuses_at_once():
    # Not only when the first report is asked for.
    with pytest.raises(pf.CheckError):
        pf.stream(small_table().iloc[:0])
    with pytest.raises(TypeError, match="no option seasons"):
        pf.stream(small_table(), seasons=12)


# ------------------------------------------------------------------------------------------------------ progress
def test_progress_is_told_to_a_function(climbs):
    told = []
    pf.check(small_table(bad=True), progress=lambda done, total: told.append((done, total)))
    assert told == [(1, 4), (2, 4), (3, 4), (4, 4)]


def test_progress_counts_cached_series_too(climbs):
    pf.check(small_table(), progress=False)
    told = []
    pf.check(small_table(), progress=lambda *given: told.append(given))
    assert told[-1] == (3, 3)


def test_short_work_is_silent(capsys):
    pf.check(small_table()[["cargo"]])
    assert capsys.readouterr() == ("", "")


# ----------------------------------------------------------------------------------------------------- the data
@pytest.mark.parametrize("kind", ["wide", "long", "series"])
def test_frame_of_the_caller_is_left_as_it_was(kind):
    frame = small_table(bad=True)
    options = {}
    if kind == "long":
        frame = small_table().rename_axis("year").reset_index().melt("year", var_name="line", value_name="count")
        options = {"time": "year", "series": "line", "value": "count"}
    if kind == "series":
        frame = frame["fares"]
    before, index = frame.copy(deep=True), frame.index
    pf.check(frame, exclude=[("1999", "2000")], progress=False, **options).code()
    equal = pd.testing.assert_series_equal if kind == "series" else pd.testing.assert_frame_equal
    equal(frame, before)
    assert frame.index is index


def test_long_and_wide_tables_agree():
    wide = small_table().rename_axis("year")
    long = wide.reset_index().melt("year", var_name="line", value_name="count")
    found = pf.check(long, time="year", series="line", value="count", progress=False)
    same(found, pf.check(wide, progress=False))


def test_one_bad_column_among_good_ones_is_reported():
    report = pf.check(small_table(bad=True), progress=False)
    assert [one.verdict == "infeasible" for one in report] == [False, True, False, False]
    assert "text" in report[BAD].answer


def test_excluded_spans_are_left_out_of_every_decision():
    frame = small_table()[["cargo"]]
    spoilt = frame.copy()
    spoilt.iloc[11:13] = 1e4
    one, other = (pf.check(f, exclude=[("2001", "2002")], progress=False)["cargo"] for f in (frame, spoilt))
    assert one.plan == other.plan
    assert one.series.isna().sum() == 2
    assert {k: f.reason for k, f in one.findings.items()} == {k: f.reason for k, f in other.findings.items()}


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"significance": 0}, "significance is 0"),
        ({"significance": 1.0}, "significance is 1.0"),
        ({"significance": "five"}, "'five'"),
        ({"significance": None}, "None"),
        ({"significance": float("nan")}, "nan"),
        ({"horizon": 0}, "horizon is 0"),
        ({"horizon": -2}, "horizon is -2"),
        ({"horizon": 2.5}, "horizon is 2.5"),
        ({"season": 0}, "season=0"),
        ({"season": 2.5}, "season=2.5"),
        ({"only": "tides"}, "tides"),
        ({"repair": "polish"}, "polish"),
    ],
    ids=str,
)
def test_bad_options_are_refused_in_one_sentence(options, said):
    with pytest.raises(pf.CheckError, match=said) as caught:
        pf.check(small_table(), **options)
    assert "\n" not in str(caught.value)


def test_whole_numbers_of_numpy_are_numbers():
    report = pf.check(small_table()[["cargo"]], season=np.int64(5), horizon=np.int32(4), progress=False)
    assert report["cargo"].season == (5,)
    assert report["cargo"].horizon == 4


def test_check_takes_options_by_name_only():
    with pytest.raises(TypeError):
        pf.check(small_table(), 12)
