"""What a person holds of a whole table."""

from __future__ import annotations

import pickle

import pandas as pd
import pytest

import preflight_magic as pf
from tests.small_table import BAD, NAMES, small_table

COLUMNS = {
    "verdict": "string",
    "plan": "string",
    "log": "boolean",
    "power": "Float64",
    "trend": "boolean",
    "shift": "boolean",
    "season": "string",
    "D": "Int64",
    "d": "Int64",
    "period": "Int64",
    "n": "Int64",
    "missing": "Int64",
    "note": "string",
}


@pytest.fixture(scope="module")
def report():
    return pf.check(small_table(bad=True), progress=False)


@pytest.fixture(scope="module")
def ferries():
    """Demo, shortened: a log with two differences, a shift, and a fixed pattern."""
    frame = pf.demo.ferry_line()
    return pf.check(frame[["passengers", "freight", "berth_power"]], progress=False)


# ---------------------------------------------------------------------------------------------------- container
def test_names_iteration_and_length(report):
    assert report.names == ("cargo", BAD, "fares", "crew")
    assert len(report) == 4
    assert [one.name for one in report] == list(report.names)
    assert all(isinstance(one, pf.SeriesReport) for one in report)
    assert report["fares"] is list(report)[2]
    assert isinstance(report, pf.Report)


def test_unknown_name_is_told_with_those_there_are(report):
    with pytest.raises(KeyError, match="no series 'tides'; there are 'cargo', 'remarks'"):
        report["tides"]


def test_one_line_repr(report):
    assert repr(report).startswith("<Report of 4 series: ")
    assert "1 infeasible" in repr(report)
    for one in [report, *report]:
        assert "\n" not in repr(one)
    assert repr(report["cargo"]) == f"<SeriesReport 'cargo': {report['cargo'].verdict}, {report['cargo'].plan}>"


def test_names_of_any_kind():
    frame = small_table()[["cargo", "fares"]].set_axis(pd.MultiIndex.from_tuples([("a", 1), ("a", 2)]), axis=1)
    report = pf.check(frame, progress=False)
    assert report.names == (("a", 1), ("a", 2))
    assert report.overview.index.tolist() == [("a", 1), ("a", 2)]
    assert report.code(("a", 1)) == report[("a", 1)].code()


# ----------------------------------------------------------------------------------------------------- overview
def test_overview_columns_and_types(report, ferries):
    for one in (report, ferries):
        assert {name: str(dtype) for name, dtype in one.overview.dtypes.items()} == COLUMNS
        assert list(one.overview.columns) == list(COLUMNS)
        assert one.overview.index.tolist() == list(one.names)


def test_series_that_cannot_be_checked_is_missing_throughout(report):
    row = report.overview.loc[BAD]
    assert row["verdict"] == "infeasible"
    assert row.drop(["verdict", "note"]).isna().all()
    assert "'remarks'" in row["note"]
    assert report.overview.drop(index=BAD).notna().all(axis=None)


def test_overview_tells_the_plans(ferries):
    told = ferries.overview[["plan", "log", "power", "trend", "shift", "season", "D", "d", "period", "n", "missing"]]
    assert told.loc["passengers"].tolist() == [
        "log, difference 12, difference 1", True, 0.0, False, False, "difference", 1, 1, 12, 144, 0,
    ]  # fmt: skip
    assert told.loc["freight"].tolist() == [
        "remove shift from 2019-04", False, 1.0, False, True, "none", 0, 0, 12, 144, 0,
    ]  # fmt: skip
    assert told.loc["berth_power"].tolist() == [
        "remove pattern 12", False, 1.0, False, False, "fixed", 0, 0, 12, 144, 0,
    ]  # fmt: skip


def test_overview_agrees_with_the_series(report):
    for one in report:
        row = report.overview.loc[one.name]
        assert row["verdict"] == one.verdict
        if one.problem is None:
            assert row["plan"] == str(one.plan)
            assert row["n"] == one.series.notna().sum()
            assert row["missing"] == one.series.isna().sum()
    assert report.overview.loc["fares", "missing"] == 1


def test_trend_is_told_as_a_line_or_as_drift():
    t = pd.Series(range(60), index=pd.period_range("1950", periods=60, freq="Y"), dtype=float)
    noise = pd.Series(pf.demo.ferry_line(months=60)["fuel_price"].diff().fillna(0).to_numpy(), index=t.index) / 0.025
    frame = pd.DataFrame({"line": 0.5 * t + noise, "drift": (1.5 + noise).cumsum(), "level": noise})
    overview = pf.check(frame, progress=False).overview
    assert overview["trend"].tolist() == [True, True, False]
    assert overview["d"].tolist() == [0, 1, 0]
    assert overview.loc["line", "plan"] == "remove trend"
    assert overview.loc["drift", "plan"] == "difference 1"


def test_overview_can_be_filtered(report):
    assert report.overview[report.overview["d"] == 1].index.tolist() == [
        one.name for one in report if one.problem is None and str(one.plan) == "difference 1"
    ]


# --------------------------------------------------------------------------------------------------------- code
def test_code_of_all_leaves_out_what_cannot_be_checked(report):
    source = report.code()
    assert BAD not in source
    assert all(repr(name) in source for name in NAMES)
    namespace = {}
    exec(source, namespace)
    prepare, _ = namespace["PLANS"]["cargo"]
    y = report["cargo"].series
    pd.testing.assert_series_equal(prepare(y), report["cargo"].plan.apply(y), check_names=False)


def test_code_of_some(report):
    assert report.code("cargo") == report["cargo"].code() == report.code(["cargo"])
    two = report.code(("cargo", "crew"))
    assert "'fares'" not in two
    assert "'crew'" in two


@pytest.mark.parametrize("names", [BAD, ["cargo", BAD]])
def test_code_of_what_cannot_be_checked(report, names):
    with pytest.raises(pf.CheckError, match="'remarks'"):
        report.code(names)


def test_code_of_unknown_or_no_series(report):
    with pytest.raises(KeyError, match="tides"):
        report.code("tides")
    with pytest.raises(pf.CheckError, match="no plan"):
        report.code([])


def test_code_says_why_in_the_words_of_the_findings(ferries):
    source = ferries["freight"].code()
    reason = ferries["freight"].findings["shift and trend"].reason.split(". ")[0]
    assert reason.split(",")[0] in source
    changed = ferries["freight"].put_in(pf.Difference(1)).code()
    assert "Put in by hand." in changed


# ----------------------------------------------------------------------------------------------------- pickling
def test_reports_travel(report):
    copy = pickle.loads(pickle.dumps(report))
    assert copy.names == report.names
    pd.testing.assert_frame_equal(copy.overview, report.overview)
    assert [one.plan for one in copy] == [one.plan for one in report]


def test_reports_are_small(ferries):
    for one in ferries:
        # Kilobytes, of which the series as given and as transformed take 2 a hundred values.
        assert len(pickle.dumps(one)) < 40_000
    longer = pf.check(pf.demo.ferry_line(months=288)["crew_overtime"], progress=False)["crew_overtime"]
    extra = len(pickle.dumps(longer)) - len(pickle.dumps(ferries["freight"]))
    # 144 further values: 8 bytes each as given, as transformed and as innovations, with their indexes twice that.
    assert extra < 144 * 8 * 8
