"""What the note of the overview warns of, and the bench scripts that read it."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest
from scipy.signal import lfilter

import preflight_magic as pf
from preflight_magic.model import Difference
from tests.bench import note_rates
from tests.bench.adapter import decide, flags_of


def ar1(phi: float, n: int, seed: int) -> np.ndarray:
    noise = np.random.default_rng([seed, n]).standard_normal(n + 300)
    return np.asarray(lfilter([1.0], [1.0, -phi], noise)[300:])


def flags(values: np.ndarray, season: int = 1) -> set[str]:
    series = pd.Series(values + 50.0, index=pd.period_range("1990-01", periods=len(values), freq="M"), name="y")
    found = decide(series, season)["flags"]
    assert isinstance(found, tuple)
    return set(found)


@pytest.mark.parametrize(
    ("note", "expected"),
    [
        ("", ()),
        ("residuals: correlation left; halves: variance differs between the halves", ()),
        ("season: a fixed pattern, too even to call", ("undecidable",)),
        ("unit root: one difference, near-unit root, too even to call", ("near-unit-root", "undecidable")),
        ("values: 20 values, none missing, too short", ("too-short",)),
        ("roots: over-differenced: it may already have been differenced", ("over-differenced",)),
    ],
)
def test_flags_of_a_note(note: str, expected: tuple[str, ...]) -> None:
    assert flags_of(note) == expected


def test_an_input_differenced_once_too_often_is_noted() -> None:
    found = [flags(np.diff(ar1(0.5, 121, seed))) for seed in range(12)]
    assert sum("over-differenced" in one for one in found) >= 7


def test_a_short_series_is_noted() -> None:
    assert all("too-short" in flags(ar1(0.5, 20, seed)) for seed in range(4))
    assert not any("too-short" in flags(ar1(0.5, 24, seed)) for seed in range(4))


def test_a_root_near_one_is_noted_more_often_than_one_far_from_it() -> None:
    near = [flags(ar1(0.97, 120, seed)) for seed in range(16)]
    # A random walk is hardly another thing than a root of 0.97 in 120 values, so no method can flag them all.
    assert sum("near-unit-root" in one for one in near) >= 6
    far = [flags(ar1(0.3, 120, seed)) for seed in range(12)]
    assert sum("near-unit-root" in one for one in far) <= 1
    assert sum(bool(one) for one in far) <= 2


def test_an_even_comparison_is_noted_in_words() -> None:
    rng = np.random.default_rng(3)
    for _ in range(20):
        values = pd.Series(lfilter([1.0], [1.0, -0.93], rng.standard_normal(400))[300:] + 50.0, name="y")
        values.index = pd.period_range("1990-01", periods=100, freq="M")
        report = pf.check(values, season=1, cache=False, progress=False)
        if report["y"].findings["unit root"].verdict == "inconclusive":
            break
    note = report.overview["note"].iloc[0]
    assert "too even to call" in note
    assert "near-unit root" in note
    assert {"undecidable", "near-unit-root"} <= set(flags_of(note))


def test_rates_of_notes_are_counted() -> None:
    right, notes = note_rates.alarms(note_rates.RIGHT["white noise"], 60, 4, [1, 0])
    assert right == 4
    assert set(notes) == set(note_rates.RUNGS)
    assert note_rates.hits(note_rates.FAULTS["variance 4 times as large"], 240, 3, [1, 0]) == 1.0
    assert note_rates.hits(note_rates.FAULTS["noise, one difference put in"], 120, 4, [1, 0]) >= 0.5


def test_plans_are_told_by_value_and_by_kind() -> None:
    steps = (Difference(12), Difference(1))
    assert note_rates.is_plan(steps, steps)
    assert note_rates.is_plan(steps, (Difference, Difference(1)))
    assert not note_rates.is_plan(steps, (Difference(1), Difference(12)))
    assert not note_rates.is_plan(steps, steps[:1])
