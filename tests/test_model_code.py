"""The plan handed to statsmodels, run as a person would, against the reference forecast; and columns for learners."""

from __future__ import annotations

import ast
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter

import preflight_magic as pf
from preflight_magic.generated import model_code

DEMO = pf.demo.ferry_line()


def one_of(name: str) -> pf.SeriesReport:
    return pf.check(DEMO[[name]], progress=False)[name]


def run(source: str) -> dict:
    names: dict = {}
    exec(compile(source, "<generated>", "exec"), names)
    return names


def changed(name: str, *, leave: tuple = (), put: tuple = ()) -> pf.SeriesReport:
    report = one_of(name)
    for step in leave:
        report = report.leave_out(step)
    for step in put:
        report = report.put_in(step)
    return report


PLANS = {
    "log, both differences": ("passengers", {}),
    "log, drift and pattern": ("passengers", {"leave": (pf.Difference(12),), "put": (pf.RemovePattern(12),)}),
    "log, seasonal difference and drift": ("passengers", {"leave": (pf.Difference(1),)}),
    "shift": ("freight", {}),
    "shift and trend": ("freight", {"put": (pf.RemoveTrend(),)}),
    "shift, differenced": ("freight", {"put": (pf.Difference(1),)}),
    "random walk with drift": ("fuel_price", {}),
    "workdays and drift": ("fuel_price", {"put": (pf.PerDay("workdays"),)}),
    "mean": ("crew_overtime", {}),
    "power": ("crew_overtime", {"put": (pf.Power(0.5),)}),
    "pattern": ("berth_power", {}),
    "trend that a difference turns into drift": ("fuel_price", {"put": (pf.RemoveTrend(),)}),
}


@pytest.mark.parametrize("plan", PLANS)
def test_the_model_gives_the_reference_forecast(plan: str) -> None:
    name, change = PLANS[plan]
    report = changed(name, **change)
    found = run(report.code(form="model"))["forecast"](report.series, 8)
    expected = report.reference_forecast(8, average=False)
    assert found.index.equals(expected.index)
    np.testing.assert_allclose(found["median"], expected["median"], rtol=0.01)
    np.testing.assert_allclose(found["mean"], expected["mean"], rtol=0.01)
    # Its variance is the maximum likelihood one, without what few values add.
    width, wider = found["upper"] - found["lower"], expected["upper"] - expected["lower"]
    assert ((0.93 * wider < width) & (width < 1.005 * wider)).all()


def call_of(source: str) -> dict[str, object]:
    """Arguments of the SARIMAX call that are literals."""
    calls = [node for node in ast.walk(ast.parse(source)) if isinstance(node, ast.Call)]
    [call] = [node for node in calls if isinstance(node.func, ast.Name) and node.func.id == "SARIMAX"]
    return {
        str(word.arg): ast.literal_eval(word.value)
        for word in call.keywords
        if isinstance(word.value, ast.Constant | ast.Tuple)
    }


def test_what_the_model_does_is_not_done_before() -> None:
    source = one_of("passengers").code(form="model")
    assert call_of(source)["order"] == (0, 1, 1)
    assert call_of(source)["seasonal_order"] == (0, 1, 1, 12)
    assert call_of(source)["trend"] == "n"
    assert ".diff(" not in source
    assert "do not difference y beforehand" in source
    y = DEMO["passengers"].astype(float)
    pd.testing.assert_series_equal(run(source)["prepare"](y), np.log(y))


def test_one_difference_keeps_its_drift() -> None:
    source = one_of("fuel_price").code(form="model")
    assert call_of(source) == {"order": (0, 1, 0), "trend": "c", "use_exact_diffuse": True}


def test_the_pattern_is_a_regressor_and_no_season_is_taken_out_before() -> None:
    report = one_of("berth_power")
    source = report.code(form="model")
    assert call_of(source)["trend"] == "n"
    X = run(source)["regressors"](report.series.index)
    assert X.shape == (144, 12)
    assert np.linalg.matrix_rank(X) == 12
    assert "take trend, shift or season out of y" in " ".join(source.split()).replace("# ", "")


def test_a_long_pattern_is_smooth() -> None:
    hours = pd.date_range("2023-01-02", periods=24 * 7 * 4, freq="h")
    t = np.arange(len(hours))
    noise = np.random.default_rng(3).normal(size=len(t))
    y = pd.Series(40 + 5 * np.sin(2 * np.pi * t / 168) + 0.5 * noise, index=hours, name="berth load")
    report = pf.check(y, season=168, progress=False)["berth load"]
    for step in report.plan.steps:
        report = report.leave_out(step)
    report = report.put_in(pf.RemovePattern(168))
    names = run(report.code(form="model"))
    assert list(names["regressors"](hours).columns[:3]) == ["level", "sin_168_1", "cos_168_1"]
    found = names["forecast"](y, 24)["median"]
    assert found.index.equals(pd.date_range("2023-01-30", periods=24, freq="h"))
    np.testing.assert_allclose(found, 40 + 5 * np.sin(2 * np.pi * np.arange(24) / 168), atol=0.5)


def test_gaps_are_skipped_as_the_reference_skips_them() -> None:
    y = DEMO["fuel_price"].astype(float).copy()
    y.iloc[[20, 21, 90]] = np.nan
    report = pf.check(y, progress=False)["fuel_price"]
    source = report.code(form="model")
    assert "skips missing values: do not" in source or "fill its gaps" in source
    found = run(source)["forecast"](report.series, 5)
    np.testing.assert_allclose(found["median"], report.reference_forecast(5, average=False)["median"], rtol=0.01)


@pytest.mark.parametrize(
    "index",
    [
        pd.date_range("2019-01-31", periods=60, freq="ME"),
        pd.date_range("2020-01-06", periods=60, freq="B"),
        pd.RangeIndex(10, 70),
    ],
    ids=["month ends", "workdays", "numbers"],
)
@pytest.mark.parametrize("form", ["model", "features"])
def test_every_kind_of_index_is_continued(index: pd.Index, form: str) -> None:
    values = 30 + lfilter([1.0], [1.0, -0.5], np.random.default_rng(5).normal(size=60))
    report = pf.check(pd.Series(values, index=index, name="x"), season=1, progress=False)["x"]
    names = run(report.code(form=form))
    if form == "model":
        ahead = names["forecast"](report.series, 3).index
    else:
        ahead = names["features"](report.series, 3)[0].index[-3:]
    assert list(ahead) == list(report.reference_forecast(3).index)


@pytest.mark.parametrize("name", ["a 'quoted' \"name\"", "line\nbreak", "x" * 90, 7, ("two", "parts")])
@pytest.mark.parametrize("form", ["model", "features"])
def test_any_name_makes_code_that_compiles(name: object, form: str) -> None:
    y = DEMO["crew_overtime"].rename(None).to_frame()
    y.columns = pd.Index([name], tupleize_cols=False)
    report = next(iter(pf.check(y, progress=False)))
    assert "def prepare" in report.code(form=form)
    run(report.code(form=form))


def test_two_seasonal_lags_do_not_go_into_one_model() -> None:
    report = changed("passengers", put=(pf.Difference(6),))
    with pytest.raises(pf.CheckError, match="one seasonal lag"):
        report.code(form="model")


def test_bad_input() -> None:
    with pytest.raises(pf.CheckError, match="'pandas', 'model' or 'features'"):
        one_of("freight").code(form="polars")
    frame = DEMO[["fuel_price"]].assign(tide="high")
    report = pf.check(frame, progress=False)["tide"]
    for form in ("model", "features"):
        with pytest.raises(pf.CheckError, match="tide"):
            report.code(form=form)


def test_nothing_left_has_no_model() -> None:
    index = pd.period_range("2015-01", periods=48, freq="M")
    report = pf.check(pd.Series(3.0 + 2.0 * np.arange(48), index=index, name="line"), season=1, progress=False)["line"]
    finding = report.findings["roots"]
    if finding.measures.get("fit") is not None:
        findings = dict(report.findings) | {"roots": replace(finding, measures={})}
        report._found = replace(report._found, findings=findings)
    with pytest.raises(pf.CheckError, match="no ARMA model"):
        model_code(report)


# --------------------------------------------------------------------------------------------------- for learners
@pytest.mark.parametrize("plan", PLANS)
def test_features_know_nothing_of_what_came_later(plan: str) -> None:
    name, change = PLANS[plan]
    report = changed(name, **change)
    features = run(report.code(form="features"))["features"]
    y = report.series
    X, _, base = features(y, 4)
    other = y.copy()
    other.iloc[100:] = other.iloc[100:] * 1.7 + 1.0
    X2, _, base2 = features(other, 4)
    # Row 103 is forecast from row 99, the last that is the same.
    pd.testing.assert_frame_equal(X.iloc[:104], X2.iloc[:104])
    pd.testing.assert_series_equal(base.iloc[:104], base2.iloc[:104])
    assert not X.iloc[104].equals(X2.iloc[104])


@pytest.mark.parametrize("plan", PLANS)
def test_the_true_target_gives_the_series_back(plan: str) -> None:
    name, change = PLANS[plan]
    report = changed(name, **change)
    names = run(report.code(form="features"))
    y = report.series
    _, target, base = names["features"](y, 6)
    last = y.index[-6:]
    back = names["values"](target[last], base[last], y.iloc[:-6])
    np.testing.assert_allclose(back, y.iloc[-6:], rtol=1e-9)


def test_a_learner_on_the_columns_beats_the_last_value() -> None:
    report = one_of("passengers")
    names = run(report.code(form="features"))
    y = report.series
    X, target, base = names["features"](y.iloc[:-12], 12)
    known = X.notna().all(axis=1) & target.notna()
    A = np.column_stack([np.ones(known.sum()), X[known].drop(columns="season")])
    effects = np.linalg.lstsq(A, target[known], rcond=None)[0]
    ahead = X.iloc[-12:]
    guess = np.column_stack([np.ones(12), ahead.drop(columns="season")]) @ effects
    found = names["values"](guess, base.iloc[-12:], y.iloc[:-12])
    errors = (found - y.iloc[-12:]).abs().mean()
    assert errors < (y.iloc[-13] - y.iloc[-12:]).abs().mean()
