"""How long a check will take."""

from __future__ import annotations

from concurrent.futures import Executor, ThreadPoolExecutor

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic import estimate as module
from tests.small_table import small_table


@pytest.fixture
def clock(monkeypatch):
    """A check takes 0.1 s and 2 ms a value, by a clock that nothing else moves."""

    class Clock:
        now = 0.0
        seen: list[object] = []  # noqa: RUF012

    def check(one, settings):
        Clock.now += 0.1 + 0.002 * len(one.values)
        Clock.seen.append(one.name)

    monkeypatch.setattr(module, "checked", check)
    monkeypatch.setattr(module, "perf_counter", lambda: Clock.now)
    Clock.seen = []
    return Clock


def seconds(frame, **options):
    return pf.time_needed(frame, **options).total_seconds()


def ragged(k: int = 100) -> pd.DataFrame:
    index = pd.period_range("1990-01", periods=200, freq="M")
    frame = pd.DataFrame(np.random.default_rng(1).standard_normal((200, k)), index=index)
    return frame.mask(np.arange(200)[:, None] < np.arange(k))


def test_time_of_all_is_told_from_a_few(clock):
    expected = sum(0.1 + 0.002 * (200 - missing) for missing in range(100))
    assert seconds(ragged()) == pytest.approx(expected, abs=1e-3)
    assert len(clock.seen) == module.SAMPLE + 1


def test_workers_share_the_work(clock):
    whole = seconds(ragged())
    assert seconds(ragged(), workers=4) == pytest.approx(whole / 4, abs=1e-3)
    with ThreadPoolExecutor(5) as pool:
        assert seconds(ragged(), pool=pool) == pytest.approx(whole / 5, abs=1e-3)
        assert seconds(ragged(), pool=pool, workers=2) == pytest.approx(whole / 2, abs=1e-3)
    # More workers than series are of no use.
    assert seconds(small_table(), workers=64) == pytest.approx(0.16, abs=1e-3)


def test_series_that_cannot_be_checked_take_no_time(clock):
    assert seconds(small_table(bad=True)) == pytest.approx(3 * 0.16, abs=1e-3)


def test_it_is_a_time_on_a_real_clock():
    found = pf.time_needed(small_table())
    assert isinstance(found, pd.Timedelta)
    assert 0.003 < found.total_seconds() < 60.0


@pytest.mark.parametrize("workers", [0, -1, 2.5, True, "two"])
def test_number_of_workers_that_is_none(clock, workers):
    with pytest.raises(pf.CheckError, match="workers is"):
        pf.time_needed(small_table(), workers=workers)


def test_pool_that_does_not_tell_its_workers(clock):
    with pytest.raises(pf.CheckError, match="does not tell how many workers it has; give workers="):
        pf.time_needed(small_table(), pool=Executor())
    with pytest.raises(TypeError, match="has no option seasons"):
        pf.time_needed(small_table(), seasons=12)
