"""Series of the textbooks and of the demo: the plans they get, and that plans and code can be undone on them."""

from __future__ import annotations

import pickle
import subprocess
import sys
from functools import cache
from pathlib import Path

import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic import Difference, Log, RemovePattern, RemoveShift
from tests.sentences import assert_reads_well

REFERENCES = Path(__file__).parent / "references"
DEMO = ("passengers", "freight", "fuel_price", "crew_overtime", "berth_power")
OPEN = ("air_passengers", "nile", "lake_huron", "sunspots")


@cache
def series(name):
    if name in DEMO:
        return pf.demo.ferry_line()[name]
    # Sources stand in the files.
    table = pd.read_csv(REFERENCES / f"{name}.csv", comment="#", dtype={0: str})
    index = pd.PeriodIndex(table.iloc[:, 0], freq="M" if table.columns[0] == "month" else "Y")
    return pd.Series(table.iloc[:, 1].to_numpy(), index=index, name=name)


@cache
def checked(name):
    return pf.check(series(name), progress=False)


def report(name):
    return checked(name)[name]


def row(name):
    return checked(name).overview.loc[name]


# ------------------------------------------------------------------------------------------------------ decisions
def test_airline_passengers_follow_the_airline_model():
    # Box and Jenkins (1976), Series G: ARIMA (0,1,1)(0,1,1) at 12 in the logarithms.
    assert report("air_passengers").plan.steps == (Log(), Difference(12), Difference(1))
    assert row("air_passengers")[["D", "d", "period"]].tolist() == [1, 1, 12]


def test_nile_has_one_shift_and_no_unit_root():
    # Cobb (1978): one change of level at about 1898, the year after which the flow is lower.
    plan = report("nile").plan
    (step,) = plan.steps
    assert isinstance(step, RemoveShift)
    assert step.at in (pd.Period("1898", "Y"), pd.Period("1899", "Y"))
    assert row("nile")[["D", "d"]].tolist() == [0, 0]
    assert report("nile").findings["shift and trend"].measures["shift_t"] < -5


def test_lake_huron_and_sunspots_need_no_log_and_no_second_difference():
    for name in ("lake_huron", "sunspots"):
        assert not row(name)["log"]
        assert row(name)["season"] == "none"
        assert row(name)["d"] <= 1


@pytest.mark.parametrize(
    ("name", "steps"),
    [
        ("passengers", (Log(), Difference(12), Difference(1))),
        ("freight", (RemoveShift(pd.Period(pf.demo.NEW_BERTH, "M")),)),
        ("fuel_price", (Difference(1),)),
        ("crew_overtime", ()),
        ("berth_power", (RemovePattern(12),)),
    ],
)
def test_demo_gets_the_plans_it_was_made_for(name, steps):
    # As the docstring of the demo describes how each column is made.
    assert report(name).plan.steps == steps


# ---------------------------------------------------------------------------------------------------------- laws
@pytest.mark.parametrize("name", [*DEMO, *OPEN])
@pytest.mark.parametrize("h", [1, 7, 13])
def test_back_transform_undoes_apply(name, h):
    y, plan = series(name), report(name).plan
    history = y.iloc[:-h]
    if any(isinstance(step, RemoveShift) for step in plan.steps):
        assert next(step.at for step in plan.steps if isinstance(step, RemoveShift)) in history.index
    back = plan.back_transform(plan.apply(y, history=history).iloc[-h:], history)
    expected = y.iloc[-h:].astype(float)
    pd.testing.assert_series_equal(back, expected, rtol=1e-9, atol=1e-9 * float(y.abs().max()))


@pytest.mark.parametrize("name", [*DEMO, *OPEN])
def test_sentences_read_well(name):
    one = report(name)
    assert_reads_well(one.answer)
    for finding in one.findings.values():
        assert_reads_well(finding.reason)
        assert_reads_well(finding.headline, whole=False)


FRESH = """
import pickle, sys
import numpy as np
import pandas as pd
with open(sys.argv[1], "rb") as file:
    tasks = pickle.load(file)
found = {}
for name, (source, y, horizon) in tasks.items():
    namespace = {}
    exec(source, namespace)
    prepare, restore = namespace["prepare"], namespace["restore"]
    past = y.iloc[:-horizon]
    forecast = prepare(y, past).iloc[-horizon:]
    found[name] = (prepare(y), restore(forecast, past), restore(forecast, past, 0.01))
assert "preflight_magic" not in sys.modules
assert "scipy" not in sys.modules and "statsmodels" not in sys.modules
with open(sys.argv[2], "wb") as file:
    pickle.dump(found, file)
"""


def test_code_does_what_the_plans_do_in_a_fresh_interpreter(tmp_path):
    h = 6
    tasks = {name: (report(name).code(), series(name), h) for name in (*DEMO, *OPEN)}
    (tmp_path / "tasks").write_bytes(pickle.dumps(tasks))
    command = [sys.executable, "-I", "-c", FRESH, str(tmp_path / "tasks"), str(tmp_path / "found")]
    subprocess.run(command, check=True, capture_output=True, text=True, cwd=tmp_path)
    found = pickle.loads((tmp_path / "found").read_bytes())
    assert found.keys() == tasks.keys()
    for name, (prepared, restored, mean) in found.items():
        y, plan = series(name), report(name).plan
        past = y.iloc[:-h]
        forecast = plan.apply(y, history=past).iloc[-h:]
        near = {"rtol": 1e-9, "atol": 1e-9 * float(y.abs().max()), "check_names": False, "check_dtype": False}
        pd.testing.assert_series_equal(prepared, plan.apply(y), **near)
        pd.testing.assert_series_equal(restored, y.iloc[-h:].astype(float), **near)
        pd.testing.assert_series_equal(mean, plan.back_transform(forecast, past, 0.01), **near)


def test_code_of_all_series_at_once():
    frame = pd.DataFrame({name: series(name) for name in DEMO})
    source = pf.check(frame, progress=False).code()
    namespace = {}
    exec(source, namespace)
    assert namespace["PLANS"].keys() == set(DEMO)
    for name, (prepare, _) in namespace["PLANS"].items():
        expected = report(name).plan.apply(series(name))
        pd.testing.assert_series_equal(prepare(series(name)), expected, check_names=False, rtol=1e-9)
