"""Generated code: it does what the plan does, needs numpy and pandas alone, and reads well."""

import ast
import subprocess
import sys

import numpy as np
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
from preflight_magic.plan.emit import emit
from preflight_magic.plan.plan import Plan

AIRLINE = Plan((), (Log(), Difference(12), Difference(1)))


def run(source):
    namespace = {}
    exec(compile(source, "<generated>", "exec"), namespace)
    return namespace


def assert_same(one, two, scale):
    pd.testing.assert_series_equal(one, two, rtol=1e-9, atol=1e-9 * scale, check_names=False, check_freq=False)


def assert_code_equals_plan(plan, y, h, indexes=None):
    source = emit({y.name: (plan, {})}, indexes)
    assert max(len(line) for line in source.splitlines()) <= 100
    namespace = run(source)
    prepare, restore = namespace["prepare"], namespace["restore"]
    past, future = y.iloc[:-h], y.iloc[-h:]
    point = Plan(plan.repairs, tuple(s for s in plan.steps if isinstance(s, PerDay | Log | Power | Logit)))
    scale = point.apply(y).abs().max()
    assert_same(prepare(y), plan.apply(y), scale)
    assert_same(prepare(y, history=past), plan.apply(y, history=past), scale)
    assert_same(prepare(future, history=past), plan.apply(future, history=past), scale)
    forecast = plan.apply(y, history=past).iloc[-h:]
    assert_same(restore(forecast, past), y.iloc[-h:].astype("float64"), 0.0)
    for variance in (0.02, np.linspace(0.01, 0.1, h), pd.Series(0.05, index=forecast.index)):
        assert_same(restore(forecast, past, variance), plan.back_transform(forecast, past, variance), 0.0)
    # A table's column may end before its last row.
    assert_same(restore(forecast, past.reindex(y.index)), y.iloc[-h:].astype("float64"), 0.0)


def test_code_equals_plan_on_every_index(series, rich_steps_for):
    assert_code_equals_plan(Plan((), rich_steps_for(series.index)), series, 3)


def test_code_equals_every_plan(typical, steps_for):
    assert_code_equals_plan(Plan((), steps_for(typical.index)), typical, 14)


@pytest.mark.parametrize("period", [1, 7, 12])
def test_code_equals_plan_with_gaps(gappy, steps_for, period):
    assert_code_equals_plan(Plan((FillGaps(period),), steps_for(gappy.index)), gappy, 14)


@pytest.mark.parametrize("told", [True, False])
def test_code_equals_plan_per_day(totals, day_plans, told):
    for plan in day_plans:
        assert_code_equals_plan(plan, totals, 2, {totals.name: totals.index} if told else None)


@pytest.mark.parametrize("dtype", ["int64", "Int64", "float32"])
def test_code_takes_any_numeric_dtype(monthly, dtype):
    y = monthly.round().astype(dtype)
    for plan in (AIRLINE, Plan((FillGaps(12),), (Log(), RemoveTrend(), RemovePattern(12)))):
        assert_code_equals_plan(plan, y, 5)


def test_code_of_a_power_with_a_negative_exponent(monthly):
    for step in (Power(-0.3), Power(-1.0, 5.0), Power(-0.001), Power(0.004, -3.0), Power(1 / 3, 2.0), Power(1.0)):
        assert_code_equals_plan(Plan((), (PerDay(), step)), monthly, 3)
        assert_code_equals_plan(Plan((), (step, Difference(1))), monthly, 3)


def test_code_of_a_shift_at_the_same_instant_in_another_kind_of_stamp():
    index = pd.date_range("2021-03-27 05:00", periods=60, freq="h", tz="Europe/Oslo")
    y = pd.Series(np.r_[np.ones(30), 3 * np.ones(30)] + np.sin(np.arange(60.0)), index=index, name="berth power")
    assert_code_equals_plan(Plan((), (RemoveShift(index[30]),)), y, 5)
    weekly = y.set_axis(pd.period_range("2020-01-06", periods=60, freq="W"))
    assert_code_equals_plan(Plan((), (RemoveShift(weekly.index[30]),)), weekly, 5)


def test_a_short_plan_is_a_short_program():
    source = emit({"passengers": (AIRLINE, {Log(): "the spread grows with the level."})})
    for word in ("lstsq", "fill_gaps", "fixed_part", "mean_of", "days", "preflight_magic", "isinstance", "PLANS"):
        assert word not in source
    assert len(source.splitlines()) < 45
    assert "    # Log: the spread grows with the level.\n    x = np.log(x)\n" in source
    assert "    # Difference 12.\n    x = x.diff(12)\n" in source


def test_only_what_is_used_is_imported():
    assert "import" not in emit({"a": (Plan(), {})})
    assert "import pandas" not in emit({"a": (Plan((), (Log(),)), {})})


def test_every_function_has_a_docstring_of_one_line():
    plans = {
        "a": (Plan((FillGaps(4),), (PerDay(), Power(0.3), RemoveTrend(), RemoveShift(3), RemovePattern(4))), {}),
        "b": (Plan((FillGaps(1),), (PerDay("workdays"), Logit(), Difference(4), RemovePattern(5))), {}),
    }
    source = emit(plans)
    functions = [node for node in ast.walk(ast.parse(source)) if isinstance(node, ast.FunctionDef)]
    outer = [node for node in functions if node.name != "level"]
    assert len(outer) == 12
    assert all("\n" not in ast.get_docstring(node) for node in outer)
    assert len({node.name for node in outer}) == len(outer)


def test_every_function_is_called():
    plan = Plan((FillGaps(4),), (PerDay(), Power(0.3), Difference(4), RemoveShift(3), RemovePattern(5)))
    tree = ast.parse(emit({"a": (plan, {})}))
    defined = {node.name for node in ast.walk(tree) if isinstance(node, ast.FunctionDef)}
    used = {node.id for node in ast.walk(tree) if isinstance(node, ast.Name)}
    assert defined - used == {"prepare", "restore"}


def test_series_that_share_a_plan_share_the_functions(monthly):
    other = Plan((FillGaps(12),), (RemoveTrend(), RemovePattern(12)))
    plans = {
        "passengers": (AIRLINE, {Log(): "lambda 0.1"}),
        "freight": (other, {}),
        "fuel price": (AIRLINE, {Log(): "lambda 0.2"}),
    }
    source = emit(plans)
    namespace = run(source)
    assert list(namespace["PLANS"]) == ["passengers", "fuel price", "freight"]
    assert namespace["PLANS"]["passengers"] is not namespace["PLANS"]["freight"]
    assert namespace["PLANS"]["passengers"] == (namespace["prepare_1"], namespace["restore_1"])
    assert namespace["PLANS"]["fuel price"] == namespace["PLANS"]["passengers"]
    assert "prepare_3" not in source
    assert "    # 'passengers': lambda 0.1\n    # 'fuel price': lambda 0.2\n" in source
    for name, (plan, _) in plans.items():
        prepare, _ = namespace["PLANS"][name]
        assert_same(prepare(monthly), plan.apply(monthly), 7.0)


def test_many_series_with_reasons_of_their_own():
    source = emit({f"line {i}": (AIRLINE, {Log(): f"lambda 0.{i}"}) for i in range(1, 7)})
    assert "# 'line 3': lambda 0.3\n    # and 3 more series.\n" in source
    assert "lambda 0.4" not in source
    assert "def prepare(" in source
    assert len(run(source)["PLANS"]) == 6


def test_usage_is_shown_and_is_right(monthly):
    source = emit({"passengers": (AIRLINE, {}), "freight": (Plan(), {})})
    frame = pd.DataFrame({"passengers": monthly, "freight": 2 * monthly})
    namespace = run(source) | {"frame": frame}
    usage = [line.removeprefix("# ") for line in source.splitlines()[-2:]]
    exec(usage[0], namespace)
    namespace["forecast"] = {name: x.iloc[-3:] for name, x in namespace["x"].items()}
    namespace["frame"] = frame.iloc[:-3]
    exec(usage[1], namespace)
    assert_same(namespace["y"]["passengers"], monthly.iloc[-3:], 0.0)


def test_no_plans():
    with pytest.raises(CheckError, match="no plan"):
        emit({})


def test_fresh_interpreter_with_pandas_and_numpy_alone(tmp_path, gappy):
    plan = Plan((FillGaps(12),), (PerDay(), Log(), Difference(1), RemoveShift(gappy.index[30]), RemovePattern(12)))
    gappy.to_frame().to_pickle(tmp_path / "y.pickle")
    script = emit({"passengers": (plan, {})}) + (
        "\nimport sys\n"
        "y = pd.read_pickle('y.pickle')['passengers']\n"
        "x = prepare(y, history=y.iloc[:-6])\n"
        "x.to_pickle('x.pickle')\n"
        "restore(x.iloc[-6:], y.iloc[:-6], 0.02).to_pickle('back.pickle')\n"
        "assert not {'preflight_magic', 'scipy', 'statsmodels', 'matplotlib'} & set(sys.modules)\n"
    )
    (tmp_path / "program.py").write_text(script, encoding="utf-8")
    # -I leaves out the current directory and the environment, so the package is found only if it is asked for.
    done = subprocess.run(
        [sys.executable, "-I", "-W", "error", "program.py"], cwd=tmp_path, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    history = gappy.iloc[:-6]
    assert_same(pd.read_pickle(tmp_path / "x.pickle"), plan.apply(gappy, history=history), 6.0)
    forecast = plan.apply(gappy, history=history).iloc[-6:]
    assert_same(pd.read_pickle(tmp_path / "back.pickle"), plan.back_transform(forecast, history, 0.02), 0.0)
