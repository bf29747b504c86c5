"""Intervals of roots on demand."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter

import preflight_magic as pf
from preflight_magic import root_intervals as module
from preflight_magic.kernels import root_bootstrap as kernel
from preflight_magic.series_report import SeriesReport

COLUMNS = ["of", "part", "seasonal", "period", "modulus", "lower", "upper"]
LIVES = ["half_life", "half_life_lower", "half_life_upper"]


def checked(values: np.ndarray) -> SeriesReport:
    index = pd.period_range("1990", periods=len(values), freq="Y", name="year")
    return pf.check(pd.DataFrame({"crew_overtime": values}, index=index), progress=False)["crew_overtime"]


def autoregression(coefficient: float, n: int = 90) -> np.ndarray:
    noise = np.random.default_rng(2).standard_normal(n + 100)
    return 50.0 + np.asarray(lfilter([1.0], [1.0, -coefficient], noise)[100:])


def test_rows_and_columns() -> None:
    one = checked(autoregression(0.7))
    found = one.root_intervals(replications=99)
    assert list(found.columns) == [*COLUMNS, *LIVES]
    assert found["of"].tolist() == ["before differences"] + ["after the plan"] * (len(found) - 1)
    assert len(found) > 1
    roots = [root for root in one.findings["roots"].measures["roots"] if root.modulus >= 0.5]
    assert found["modulus"].tolist()[1:] == pytest.approx([root.modulus for root in roots])
    assert (found["lower"] <= found["modulus"]).all()
    assert (found["modulus"] <= found["upper"]).all()
    assert found["part"].tolist() == ["AR sum", *(root.part for root in roots)]
    assert (found[LIVES].notna().all(axis=1) == (found["part"] != "MA")).all()
    assert 0.0 < found["lower"][0] < found["upper"][0] < 1.0


def test_the_interval_of_a_walk_reaches_one_and_that_of_noise_does_not() -> None:
    walk = checked(np.random.default_rng(5).standard_normal(120).cumsum()).root_intervals(replications=99).iloc[0]
    assert walk["upper"] >= 1.0
    assert walk["half_life_upper"] == np.inf
    noise = checked(np.random.default_rng(5).standard_normal(120)).root_intervals(replications=99).iloc[0]
    assert noise["upper"] < 0.6


def test_the_seed_decides() -> None:
    one = checked(autoregression(0.8))
    first, again, other = (one.root_intervals(replications=99, seed=seed) for seed in (3, 3, 4))
    pd.testing.assert_frame_equal(first, again)
    assert not first.equals(other)


def test_small_roots_are_left_out_and_a_wider_coverage_is_wider() -> None:
    one = checked(autoregression(0.7))
    assert len(one.root_intervals(replications=99, from_modulus=1.0)) == 1
    narrow, wide = (one.root_intervals(level, replications=199, from_modulus=1.0).iloc[0] for level in (0.5, 0.95))
    assert wide["lower"] < narrow["lower"] < narrow["upper"] < wide["upper"]


def test_missing_values_are_skipped_as_in_the_likelihood() -> None:
    values = autoregression(0.7)
    values[[20, 41]] = np.nan
    found = checked(values).root_intervals(replications=99)
    assert len(found) > 1
    assert np.isfinite(found[["modulus", "lower", "upper"]].to_numpy()).all()


def test_the_ordinary_run_has_no_bootstrap(monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise AssertionError("a bootstrap in the ordinary run")

    for place, name in ((module, "root_bootstrap"), (module, "largest_root"), (kernel, "root_bootstrap")):
        monkeypatch.setattr(place, name, refuse)
    one = checked(autoregression(0.6, 60))
    assert one.problem is None
    with pytest.raises(AssertionError, match="bootstrap"):
        one.root_intervals()


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"coverage": 1.0}, "coverage is 1.0; give a probability between 0 and 1"),
        ({"coverage": -0.1}, "coverage is -0.1"),
        ({"replications": 20}, "replications is 20; give a whole number of at least 99"),
        ({"replications": 150.5}, "replications is 150.5"),
        ({"seed": -1}, "seed is -1; give a whole number that is not negative"),
        ({"seed": None}, "seed is None"),
        ({"from_modulus": 1.5}, "from_modulus is 1.5; give a modulus from 0 to 1"),
    ],
)
def test_options_out_of_range(options: dict[str, object], said: str) -> None:
    with pytest.raises(pf.CheckError, match=said):
        checked(autoregression(0.5, 40)).root_intervals(**options)  # type: ignore[arg-type]


def test_a_series_that_could_not_be_checked() -> None:
    with pytest.raises(pf.CheckError):
        checked(np.full(40, 3.0)).root_intervals()


def test_a_series_without_a_model_keeps_what_there_is() -> None:
    # An exact line: nothing is left for a model, nor for an autoregression.
    assert checked(3.0 + 2.0 * np.arange(60)).root_intervals().empty
