"""The ladder: its order, how rungs are found, and what a climb keeps when a person changes the plan."""

from __future__ import annotations

import sys
import textwrap
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic import ladder as climbing
from preflight_magic import rungs
from preflight_magic.intake import read
from preflight_magic.ladder import Climb, climb, ladder
from preflight_magic.model import Difference, Finding, Log, RemovePattern, RemoveTrend, TimeSeries
from preflight_magic.plan.plan import Plan
from preflight_magic.policy import Settings
from tests.small_table import small_table

KNOWN = ("time index", "values", "calendar length", "spread", "shift and trend", "season", "unit root")

RUNG_FILE = """
from preflight_magic.model import Difference, Evidence, Judgement
from preflight_magic.rungs.contract import Rung


def examine(series, context):
    size = None if context.transformed is None else float(context.transformed.std())
    return Evidence({{"spread": size, "steps": context.steps}})


def judge(evidence, thresholds):
    return Judgement("clear", "tide seen", "The tide was looked at.", {steps})


RUNG = Rung("{name}", "Is there a tide?", {after}, "By looking.", (), examine, judge)
"""


def _forget():
    for one in vars(climbing).values():
        if hasattr(one, "cache_clear"):
            one.cache_clear()


@pytest.fixture
def put_rung(tmp_path, monkeypatch):
    """Write further rung files, found beside those of the package."""
    monkeypatch.setattr(rungs, "__path__", [*rungs.__path__, str(tmp_path)])
    written = []

    def put(name, after, steps=()):
        file = f"{name}_rung"
        (tmp_path / f"{file}.py").write_text(
            textwrap.dedent(RUNG_FILE).format(name=name, after=tuple(after), steps=steps), encoding="utf-8"
        )
        written.append(file)
        _forget()

    yield put
    for file in written:
        sys.modules.pop(f"preflight_magic.rungs.{file}", None)
        if hasattr(rungs, file):
            delattr(rungs, file)
    monkeypatch.undo()
    _forget()


def wandering(n=40):
    values = np.cumsum(np.random.default_rng(3).standard_normal(n)) + 50
    return pd.Series(values, index=pd.period_range("1980", periods=n, freq="Y"), name="level")


@pytest.fixture(scope="module")
def passengers():
    """Demo passengers, 60 months: log and both differences."""
    return pf.check(pf.demo.ferry_line(months=72)[["passengers"]], progress=False)["passengers"]


# ------------------------------------------------------------------------------------------------------- order
def test_every_rung_comes_after_those_it_names():
    names = [rung.name for rung in ladder()]
    assert len(set(names)) == len(names)
    for rung in ladder():
        assert all(names.index(one) < names.index(rung.name) for one in rung.after)


def test_order_of_the_rungs_that_decide():
    names = [rung.name for rung in ladder()]
    assert [name for name in names if name in KNOWN] == list(KNOWN)


def test_rungs_describe_themselves():
    for rung in ladder():
        assert rung.question.endswith("?")
        assert rung.method.endswith(".")
        assert rung.question[0].isupper()


def test_rungs_after_each_other_are_refused(put_rung):
    put_rung("ebb", ["flood"])
    put_rung("flood", ["ebb"])
    with pytest.raises(ValueError, match=r"\['ebb', 'flood'\] come after each other"):
        ladder()


def test_rung_after_one_that_does_not_exist_is_refused(put_rung):
    put_rung("tide", ["moon"])
    with pytest.raises(ValueError, match="one that does not exist"):
        ladder()


def test_new_rung_is_found_ordered_and_climbed(put_rung):
    put_rung("tide", ["unit root"])
    names = [rung.name for rung in ladder()]
    assert names.index("tide") > names.index("unit root")
    report = pf.check(wandering(), cache=False, progress=False)["level"]
    finding = report.findings["tide"]
    assert list(report.findings) == names
    assert finding.reason == "The tide was looked at."
    assert finding.measures["steps"] == report.plan.steps == (Difference(1),)
    assert finding.measures["spread"] == pytest.approx(float(wandering().diff().std()))
    assert report.methods["tide"] == ("By looking.", ())


def test_new_rung_between_the_others_adds_its_step_to_the_plan(put_rung):
    put_rung("early tide", ["spread"], steps="(Difference(3),)")
    names = [rung.name for rung in ladder()]
    assert names.index("spread") < names.index("early tide")
    report = pf.check(wandering(), season=1, cache=False, progress=False)["level"]
    assert report.findings["early tide"].measures["spread"] is None
    assert report.findings["early tide"].measures["steps"] == ()
    assert Difference(3) in report.plan.steps


# ------------------------------------------------------------------------------------ a person changes the plan
def deciding(report):
    return {name: report.findings[name] for name in KNOWN}


def test_leaving_a_step_out_keeps_what_decided_and_examines_the_rest_again(passengers):
    assert passengers.plan.steps == (Log(), Difference(12), Difference(1))
    without = passengers.leave_out(Difference(1))
    assert without.plan.steps == (Log(), Difference(12))
    assert without.recommended == passengers.plan
    assert all(
        one is other for one, other in zip(deciding(without).values(), deciding(passengers).values(), strict=True)
    )
    assert without.alternatives == passengers.alternatives
    expected = without.plan.apply(passengers.series).dropna()
    pd.testing.assert_series_equal(without.transformed, expected)
    assert len(without.transformed) == len(passengers.transformed) + 1
    assert without.answer == (
        "Your plan is 'log, difference 12'; the recommendation is 'log, difference 12, difference 1'."
    )


def test_later_rungs_see_the_plan_of_the_person(put_rung):
    put_rung("tide", ["unit root"])
    report = pf.check(wandering(), cache=False, progress=False)["level"]
    without = report.leave_out(0)
    assert without.findings["tide"].measures["steps"] == ()
    assert without.findings["tide"].measures["spread"] == pytest.approx(float(wandering().std()))
    assert without.findings["tide"] != report.findings["tide"]
    assert not without.plan
    assert without.put_in(Difference(1)).findings["tide"].measures == report.findings["tide"].measures


def test_leave_out_takes_a_step_or_its_position(passengers):
    assert passengers.leave_out(0).plan == passengers.leave_out(Log()).plan
    assert passengers.leave_out(-1).plan == passengers.leave_out(Difference(1)).plan


def test_put_in_finds_the_place_and_undoes_leave_out(passengers):
    assert passengers.leave_out(Log()).put_in(Log()).plan == passengers.plan
    more = passengers.leave_out(Difference(12)).put_in(RemovePattern(12))
    assert more.plan.steps == (Log(), Difference(1), RemovePattern(12))
    assert more.verdict in ("transform", "inconclusive")


@pytest.mark.parametrize("step", [RemoveTrend(), 3, -4])
def test_step_that_is_not_there_cannot_be_left_out(passengers, step):
    with pytest.raises(pf.CheckError, match="no step"):
        passengers.leave_out(step)


def test_plan_that_cannot_be_applied_is_refused():
    report = pf.check(pf.demo.ferry_line(months=60)[["fuel_price"]] - 5, progress=False)["fuel_price"]
    with pytest.raises(pf.CheckError):
        report.put_in(Log())


def test_series_that_cannot_be_checked_has_no_plan_to_change():
    frame = pf.demo.ferry_line(months=30)[["freight"]].assign(still=1.0)
    report = pf.check(frame, progress=False)["still"]
    for change in (lambda: report.leave_out(0), lambda: report.put_in(Log()), report.code):
        with pytest.raises(pf.CheckError, match="'still': one value only"):
            change()


def test_transformed_is_there_whatever_the_rungs(passengers):
    pd.testing.assert_series_equal(passengers.transformed, passengers.plan.apply(passengers.series).dropna())


def test_missing_values_are_filled_for_later_rungs():
    y = pf.demo.ferry_line(months=60)["crew_overtime"].copy()
    y.iloc[[7, 20, 21]] = np.nan
    report = pf.check(y, progress=False)["crew_overtime"]
    assert len(report.transformed) == 60 - len(report.plan.steps)
    assert report.series.isna().sum() == 3


# ------------------------------------------------------------------------------------------------------ verdict
def finding(rung, verdict):
    return Finding(rung, "?", verdict, "", "")


STEPS = Plan((), (Difference(1),))


@pytest.mark.parametrize(
    ("verdicts", "plan", "expected"),
    [
        ({}, Plan(), "clear"),
        ({}, STEPS, "transform"),
        ({"time index": "infeasible"}, STEPS, "infeasible"),
        ({"values": "infeasible", "spread": "inconclusive"}, Plan(), "infeasible"),
        ({"calendar length": "inconclusive"}, Plan(), "inconclusive"),
        ({"spread": "inconclusive"}, STEPS, "inconclusive"),
        ({"shift and trend": "inconclusive"}, STEPS, "inconclusive"),
        ({"season": "inconclusive"}, Plan(), "inconclusive"),
        ({"unit root": "inconclusive"}, STEPS, "inconclusive"),
        # Rungs after those that decide only add notes.
        ({"roots": "inconclusive", "halves": "inconclusive", "residuals": "inconclusive"}, STEPS, "transform"),
        ({"roots": "inconclusive", "residuals": "infeasible"}, Plan(), "clear"),
        # A step that a person left out leaves nothing to do.
        ({"unit root": "transform"}, Plan(), "clear"),
    ],
)
def test_verdict_of_the_series(verdicts, plan, expected):
    every = dict.fromkeys([*KNOWN, "roots", "halves", "residuals"], "clear") | verdicts
    findings = {name: finding(name, verdict) for name, verdict in every.items()}
    assert Climb(findings, None, plan, plan, None).verdict == expected


def test_climb_of_a_series_with_a_problem_stops_after_reading_it():
    series = TimeSeries("x", pd.Series([], dtype=float), None, problem="column 'x': nothing there.")
    found = climb(series, Settings())
    assert list(found.findings) == ["time index", "values"]
    assert found.verdict == "infeasible"
    assert found.transformed is None
    assert found.comparison is None


def test_horizon_and_significance_never_change_the_plan():
    (series,) = read(pf.demo.ferry_line(months=48)[["fuel_price"]])
    plain = climb(series, Settings())
    from preflight_magic.policy import Thresholds

    other = climb(series, Settings(horizon=9, thresholds=Thresholds(significance=0.4)))
    assert plain.plan == other.plan
    assert plain.verdict == other.verdict
    assert {k: v.verdict for k, v in plain.findings.items() if k in KNOWN} == {
        k: v.verdict for k, v in other.findings.items() if k in KNOWN
    }


def test_hours_of_the_week_take_the_place_of_hours_of_the_day():
    rng = np.random.default_rng(5)
    t = np.arange(24 * 7 * 6)
    weekend = (t // 24) % 7 >= 5
    values = 40.0 + 6.0 * np.sin(2 * np.pi * t / 24) - 3.0 * weekend + rng.standard_normal(len(t))
    power = pd.Series(values, pd.date_range("2025-01-06", periods=len(t), freq="h"), name="berth_power")
    found = pf.check(power)["berth_power"]
    assert found.season == (24, 168)
    assert found.plan.steps == (pf.RemovePattern(168),)
    assert "longer season of 168" in found.findings["season"].reason
    alike = pf.check(power + 3.0 * weekend)["berth_power"]
    assert alike.plan.steps == (pf.RemovePattern(24),)


# ------------------------------------------------------------------------------------------ numbers that cannot be had
@pytest.mark.parametrize("rung", [one.name for one in ladder() if one.name not in climbing.READING])
@pytest.mark.parametrize("error", [np.linalg.LinAlgError("Singular matrix"), ZeroDivisionError("division by zero")])
def test_a_rung_that_fails_says_why_and_stops_no_other(monkeypatch, rung, error):
    def fails(series, context):
        raise error

    rungs = tuple(replace(one, examine=fails) if one.name == rung else one for one in ladder())
    monkeypatch.setattr(climbing, "ladder", lambda: rungs)
    report = pf.check(small_table()[["cargo"]], cache=False, progress=False)["cargo"]
    finding = report.findings[rung]
    assert str(error) in finding.reason
    assert finding.steps == ()
    assert report.problem is None
    assert report.verdict != "infeasible"
    assert list(report.findings) == [one.name for one in rungs]
    assert "def prepare" in report.code()


def test_a_comparison_that_fails_leaves_the_decision_to_a_person(monkeypatch):
    def fails(*arguments):
        raise np.linalg.LinAlgError("Singular matrix")

    monkeypatch.setattr(climbing, "compare", fails)
    report = pf.check(small_table()[["cargo"]], cache=False, progress=False)["cargo"]
    assert report.verdict == "inconclusive"
    assert not report.plan
