"""Input that is wrong, and series at the edge of what can be told: one clear sentence, or finite numbers."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from tests.sentences import assert_reads_well

N = 60
T = np.arange(N)


def months(n):
    return pd.period_range("2010-01", periods=n, freq="M")


def frame(**columns):
    n = len(next(iter(columns.values())))
    return pd.DataFrame(columns, index=months(n))


def noise(n=N, seed=5):
    return np.random.default_rng(seed).standard_normal(n)


def check(given, **options):
    return pf.check(given, cache=False, progress=False, **options)


# --------------------------------------------------------------------------------------------- what is refused
REFUSED = {
    "empty frame": (pd.DataFrame(), "no rows"),
    "no rows": (frame(a=noise()).iloc[:0], "no rows"),
    "no columns": (frame(a=noise())[[]], "no columns"),
    "no numeric column": (frame(a=["calm"] * N, b=["rough"] * N), "'a'"),
    "text column": (frame(a=["calm"] * N)["a"], "'a'"),
    "duplicated, not alike": (frame(a=noise()).set_axis(months(N)[[0, 0, *range(1, N - 1)]]), "groupby(level=0).sum()"),
    "too few rows": (frame(a=noise(5)), "at least"),
    "too few values": (frame(a=np.where(T < 5, noise(), np.nan)), "'a'"),
    "constant": (frame(a=np.full(N, 3.0)), "'a': one value only"),
    "all constant": (frame(a=np.full(N, 3.0), b=np.zeros(N)), "none of the 2 series"),
    "all missing": (frame(a=np.full(N, np.nan)), "'a'"),
    "infinite": (frame(a=np.where(T == 7, np.inf, noise())), "1 infinite value"),
    "minus infinite": (frame(a=np.where(T > 57, -np.inf, noise())), "2 infinite values"),
    "not a table": ([1.0, 2.0, 3.0], "'list'"),
    "None": (None, "'NoneType'"),
}


@pytest.mark.parametrize("what", REFUSED)
def test_what_cannot_be_checked_is_refused_in_one_sentence(what):
    given, said = REFUSED[what]
    with pytest.raises(pf.CheckError) as caught:
        check(given)
    message = str(caught.value)
    assert said in message
    assert "\n" not in message
    assert message.endswith((".", "?", "`"))
    assert "nan" not in message.replace("(NaN)", "")


@pytest.mark.parametrize("season", [61, 500])
def test_season_longer_than_the_series_is_refused(season):
    with pytest.raises(pf.CheckError, match=f"do not hold one cycle of season={season}"):
        check(frame(a=noise()), season=season)


@pytest.mark.parametrize(
    "bad",
    [
        ["calm"] * N,
        np.full(N, np.nan),
        np.full(N, 2.0),
        np.where(T == 3, np.inf, noise()),
        np.where(T < 4, noise(), np.nan),
        pd.Categorical(["calm"] * N),
        pd.date_range("2020-01-01", periods=N),
        [None] * N,
        1j * noise(),
    ],
    ids=["text", "missing", "constant", "infinite", "few", "categories", "dates", "none", "complex"],
)
def test_bad_column_beside_a_good_one_is_a_row(bad):
    report = check(frame(good=noise(), bad=bad))
    assert report.overview["verdict"].tolist()[1] == "infeasible"
    assert report["good"].problem is None
    assert "'bad'" in report["bad"].answer
    assert report["bad"].answer.endswith(".")
    assert "bad" not in report.code()


# ------------------------------------------------------------------------------------------ what is hard to tell
def spread_out(values, share, seed=1):
    """Some values missing, never the first and the last."""
    values = np.array(values, dtype=float)
    inside = np.random.default_rng(seed).permutation(np.arange(1, len(values) - 1))
    values[inside[: int(share * len(values))]] = np.nan
    return values


def with_values(base, changes):
    values = np.full(N, float(base))
    for at, value in changes.items():
        values[at] = value
    return values


RARE = {3: 6.0, 20: 7.0, 31: 4.0, 40: 8.0, 41: 9.0, 55: 3.0}
EDGE = {
    "line": 3.0 + 2.0 * T,
    "falling line": 500.0 - 3.0 * T,
    "nearly a line": 3.0 + 2.0 * T + 1e-9 * noise(),
    "line with little noise": 3.0 + 2.0 * T + 1e-4 * noise(),
    "parabola": T**2.0,
    "exact growth": np.exp(0.05 * T),
    "doubling": 2.0**T,
    "one change": np.where(T < 30, 1.0, 2.0),
    "one change at the end": np.where(T < N - 1, 1.0, 2.0),
    "one change at the start": np.where(T < 1, 1.0, 2.0),
    "one change among missing values": spread_out(np.where(T < 30, 1.0, 2.0), 0.3),
    "white noise, n = 12": noise(12),
    "white noise, n = 8": noise(8),
    "counted up, n = 8": np.arange(8.0),
    "seven alike, n = 8": np.array([1.0] * 7 + [2.0]),
    "40 % missing, walk": spread_out(100 + np.cumsum(noise()), 0.4),
    "40 % missing, season": spread_out(100 + 10 * np.sin(2 * np.pi * T / 12) + noise(), 0.4),
    "one value in seven": np.where(T % 7 == 0, noise(), np.nan)[:57],
    "long gap": np.where((T > 9) & (T < 45), np.nan, noise()),
    "tiny": 1e-12 * (5 + noise()),
    "tiny around zero": 1e-12 * noise(),
    "huge": 1e12 * (5 + noise()),
    "small changes on a huge level": 1e12 + noise(),
    "one outlier of 1e9": np.where(T == 20, 1e9, 10 + noise()),
    "one outlier of -1e15": np.where(T == 20, -1e15, 10 + noise()),
    "sine of 12": np.sin(2 * np.pi * T / 12),
    "sine of 7, positive": 5 + np.sin(2 * np.pi * T / 7),
    "exact pattern": np.tile(noise(12), 5),
    "exact positive pattern": np.tile(9 + noise(12) ** 2, 5),
    "exact pattern and line": np.tile(noise(12), 5) + 0.5 * T,
    "one value repeated, 90 %": with_values(5, RARE),
    "zeros, 90 %": with_values(0, RARE),
    "zeros and ones": np.random.default_rng(2).integers(0, 2, N).astype(float),
    "alternating": (-1.0) ** T,
    "two values in turn and a rest": T % 2 + (T > 40) * 1e-8,
}


@pytest.mark.parametrize("what", EDGE)
def test_edge_gives_finite_numbers_and_sentences(what):
    values = EDGE[what]
    report = check(frame(x=values))
    one = report["x"]
    assert one.verdict in ("clear", "transform", "inconclusive")
    assert_reads_well(one.answer)
    for finding in one.findings.values():
        assert_reads_well(finding.reason)
        assert_reads_well(finding.headline, whole=False)
        for test in finding.tests:
            assert np.isfinite(test.statistic)
            assert 0.0 <= test.p_value <= 1.0
            assert np.isfinite(list(test.critical_values.values())).all()
        for name, measure in finding.measures.items():
            if name.endswith("_shares"):
                assert sum(measure.values()) == pytest.approx(1.0)
    assert np.isfinite(one.transformed).all()
    assert np.isfinite([below for _, below, _ in one.alternatives]).all()
    assert report.overview.notna().all(axis=None)
    # What is recommended can be applied and written, whatever it is.
    assert "def prepare" in one.code()


@pytest.mark.parametrize("what", ["line", "white noise, n = 12", "exact pattern", "sine of 12", "40 % missing, season"])
def test_edge_without_a_season(what):
    one = check(frame(x=EDGE[what]), season=1)["x"]
    assert one.findings["season"].steps == ()
    assert_reads_well(one.answer)
    assert np.isfinite(one.transformed).all()


@pytest.mark.parametrize("what", ["white noise, n = 12", "tiny", "40 % missing, walk"])
@pytest.mark.parametrize("factor", [1e-12, 1e12])
def test_unit_changes_no_decision(what, factor):
    one, other = (check(frame(x=c * EDGE[what]))["x"] for c in (1.0, factor))
    assert one.plan == other.plan
    assert one.verdict == other.verdict


def test_exact_shift_is_removed():
    one = check(frame(x=EDGE["one change"]))["x"]
    assert one.plan.steps == (pf.RemoveShift(months(N)[30]),)
    assert "(t > 1000)" in one.findings["shift and trend"].reason


def test_white_noise_of_a_dozen_values_needs_nothing_or_a_person():
    for seed in range(4):
        one = check(frame(x=noise(12, seed)), season=1)["x"]
        assert not one.plan or one.verdict == "inconclusive"


@pytest.mark.parametrize("dtype", ["int64", "float32", "Int64", "Float64", "bool"])
def test_numbers_of_any_type(dtype):
    values = pd.Series(np.random.default_rng(2).integers(0, 2, N), index=months(N), name="x").astype(dtype)
    assert check(values)["x"].series.dtype == "float64"
