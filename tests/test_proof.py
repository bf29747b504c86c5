"""The proof: forecasts from past origins without a look ahead."""

from __future__ import annotations

import dataclasses

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter

import preflight_magic as pf
from preflight_magic.proof import Scored, origins, prove_plan
from preflight_magic.proof_words import rows_and_sentences

COLUMNS = ["MASE", "RMSSE", "coverage", "ratio", "p_value", "origins"]


def quarters(n: int = 60, seed: int = 2) -> pd.Series:
    rng = np.random.default_rng(seed)
    pattern = np.resize([8.0, -3.0, -9.0, 4.0], n)
    noise = lfilter([1.0], [1.0, -0.4], rng.normal(size=n))
    return pd.Series(100 + pattern + noise, index=pd.period_range("2008Q1", periods=n, freq="Q"), name="berths")


@pytest.fixture(scope="module")
def checked() -> pf.SeriesReport:
    return pf.check(quarters(), horizon=4, progress=False)["berths"]


def test_rows_and_columns(checked: pf.SeriesReport) -> None:
    found = checked.proof
    assert str(checked.plan) == "remove pattern 4"
    assert list(found.table.columns) == COLUMNS
    assert list(found.table.index)[:2] == ["the plan", "without remove pattern 4"]
    assert list(found.table.index)[-2:] == ["naive", "seasonal naive"]
    assert found.problem is None
    assert found is checked.proof
    assert len(found.origins) == 12
    assert found.origins[-1] == quarters().index[-5]
    assert found.table.loc["the plan", "ratio"] == 1.0
    assert found.table.loc["without remove pattern 4", "ratio"] > 1.05
    assert found.table.loc["naive", "p_value"] < 0.05
    assert 0.7 <= found.table.loc["the plan", "coverage"] <= 1.0
    assert "\n" not in repr(found)
    assert "12 origins, 4 steps ahead" in repr(found)


def test_errors_by_origin_add_up(checked: pf.SeriesReport) -> None:
    found = checked.proof
    assert found.errors.shape == (12, len(found.rows))
    np.testing.assert_allclose(found.errors.mean(), found.table["MASE"])


def test_seasonal_naive_by_hand(checked: pf.SeriesReport) -> None:
    y, h = quarters(), 4
    absolute, squared, inside = [], [], []
    for last in checked.proof.origins:
        past = y[:last].to_numpy()
        future = y[last:].to_numpy()[1 : h + 1]
        changes = past[4:] - past[:-4]
        errors = future - past[-4:]
        absolute.append(np.abs(errors).mean() / np.abs(changes).mean())
        squared.append(errors**2 / (changes**2).mean())
        inside.append(np.abs(errors) <= 1.6448536 * np.sqrt((changes**2).mean()))
    row = checked.proof.table.loc["seasonal naive"]
    assert row["MASE"] == pytest.approx(np.mean(absolute))
    assert row["RMSSE"] == pytest.approx(np.sqrt(np.mean(squared)))
    assert row["coverage"] == pytest.approx(np.mean(inside))


def test_nothing_leaks_from_the_future(checked: pf.SeriesReport) -> None:
    y = quarters()
    later = checked.proof.origins[3]
    other = y.copy()
    other[other.index > later] = other[other.index > later] * 1.5 + 7
    # the same plan is asked of both, so that what was decided on the whole series is the same
    source = dataclasses.replace(checked._source, values=other.astype(float))
    changed = prove_plan(pf.SeriesReport(source, checked._settings, checked._found))
    before = [i for i, last in enumerate(checked.proof.origins) if last + 4 <= later]
    assert len(before) >= 2
    pd.testing.assert_frame_equal(checked.proof.errors.iloc[before], changed.errors.iloc[before])
    assert not np.allclose(checked.proof.errors.iloc[-1], changed.errors.iloc[-1])


def test_missing_values_are_left_out() -> None:
    y = quarters()
    y.iloc[[33, 47]] = np.nan
    one = pf.check(y, horizon=4, progress=False)["berths"]
    found = one.proof
    assert found.problem is None
    assert np.isfinite(found.table.loc["the plan", "MASE"])
    assert all(y[last] == y[last] for last in found.origins)


@pytest.mark.parametrize(("n", "horizon"), [(14, 6), (24, 12)])
def test_too_short_says_so(n: int, horizon: int) -> None:
    found = pf.check(quarters(n), horizon=horizon, progress=False)["berths"].proof
    assert found.problem is not None
    assert f"{n} values are too few" in found.problem
    assert "shorter horizon" in str(found)
    assert found.table.empty
    assert list(found.table.columns) == COLUMNS
    assert found.errors.empty
    assert "too few" in repr(found)


def test_the_length_it_asks_for_is_enough() -> None:
    found = pf.check(quarters(18), horizon=6, progress=False)["berths"].proof
    assert found.problem is not None
    needed = int(found.problem.split("needs ")[1].split(";")[0])
    assert 18 < needed < 60
    assert pf.check(quarters(needed + 2), horizon=6, progress=False)["berths"].proof.problem is None


def test_a_series_that_could_not_be_checked() -> None:
    frame = quarters().to_frame().assign(tide="high")
    found = pf.check(frame, progress=False)["tide"].proof
    assert found.problem is not None
    assert "tide" in found.problem


def test_origins_are_evenly_spread_and_bounded() -> None:
    assert origins(np.zeros(100), 10, 50) == tuple(range(57, 91, 3))
    assert origins(np.zeros(20), 6, 12) == (12, 13, 14)
    assert origins(np.zeros(20), 6, 15) == ()
    assert len(origins(np.zeros(4000), 12, 2000)) == 3
    gaps = np.zeros(20)
    gaps[12] = np.nan
    assert origins(gaps, 6, 12) == (12, 14)


def made(sizes: dict[str, float], count: int = 10) -> dict[str, list[Scored | None]]:
    wave = 1 + 0.1 * np.sin(np.arange(count))
    return {
        label: [Scored(np.full(3, size * w), np.full(3, size**2), np.ones(3)) for w in wave]
        for label, size in sizes.items()
    }


@pytest.mark.parametrize(
    ("without", "said"),
    [
        (1.5, "50 % larger (10 origins, p < 0.001): the step pays here."),
        (3.0, "is 3.0 times as large"),
        (0.8, "20 % smaller (10 origins, p < 0.001): the step does not pay here. That alone is no reason"),
        (1.01, "the same within 2 %"),
    ],
)
def test_a_sentence_a_step(without: float, said: str) -> None:
    scored = made({"the plan": 1.0, "without log": without, "naive": 2.0})
    _, sentences, _ = rows_and_sentences(scored, range(30, 70, 4), 4, pf.Plan((), (pf.Log(),)))
    assert said in sentences[0]
    assert sentences[0].startswith("Without 'log'")
    assert len(sentences) == 2


def test_few_origins_have_no_p_value() -> None:
    scored = made({"the plan": 1.0, "without log": 1.5, "naive": 0.5}, count=4)
    rows, sentences, _ = rows_and_sentences(scored, range(30, 34), 4, pf.Plan((), (pf.Log(),)))
    assert np.isnan(rows[1].p_value)
    assert "though 4 origins prove little" in sentences[0]
    assert "deserves doubt" in sentences[-1]


def test_a_forecast_that_fails_is_told() -> None:
    scored = made({"the plan": 1.0, "naive": 2.0}) | {"without log": [None] * 10}
    rows, sentences, _ = rows_and_sentences(scored, range(30, 40), 2, pf.Plan((), (pf.Log(),)))
    assert "no forecast could be computed" in sentences[0]
    assert next(row for row in rows if row.forecast == "without log").origins == 0


def test_a_series_that_repeats_itself_has_no_errors_to_scale() -> None:
    y = pd.Series(np.resize([1.0, 5.0, 2.0, 8.0], 48), index=quarters(48).index, name="berths")
    found = pf.check(y, horizon=4, progress=False)["berths"].proof
    assert found.problem is not None
    assert "nothing changes from one season to the next" in found.problem
