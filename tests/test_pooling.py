"""Pools: the same as without one, whatever is lost on the way."""

from __future__ import annotations

import multiprocessing
import os
import pickle
import signal
from collections import Counter
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic import pooling
from preflight_magic.intake import read
from preflight_magic.policy import Settings
from preflight_magic.pooling import Lost, in_pool, workers_of
from preflight_magic.progress import Tally
from tests.pool_works import Fatal, differences, missing, noted

FORKSERVER = multiprocessing.get_context("forkserver")


def table(k: int = 6, n: int = 26) -> pd.DataFrame:
    rng = np.random.default_rng(17)
    index = pd.period_range("1990", periods=n, freq="Y")
    columns = {f"line {i}": (np.cumsum if i % 2 else np.asarray)(rng.standard_normal(n)) + 30 for i in range(k)}
    return pd.DataFrame(columns, index=index)


def assert_same(report, expected) -> None:
    assert report.names == expected.names
    for one, other in zip(report, expected, strict=True):
        assert (one.plan, one.verdict, one.answer) == (other.plan, other.verdict, other.answer)
        assert differences(one.findings, other.findings) == []
        assert differences(one.alternatives, other.alternatives) == []
        assert differences(one.transformed, other.transformed) == []


@pytest.fixture(scope="module")
def serial():
    return pf.check(table(), cache=False, progress=False)


# ------------------------------------------------------------------------------------------------ equal to serial
@pytest.mark.parametrize(("workers", "most"), [(1, 16), (2, 1), (2, 3)])
def test_processes_give_what_serial_gives(serial, monkeypatch, workers, most):
    monkeypatch.setattr(pooling, "MOST_SERIES", most)
    with ProcessPoolExecutor(workers, mp_context=FORKSERVER) as pool:
        assert_same(pf.check(table(), pool=pool, cache=False, progress=False), serial)


def test_order_of_columns_does_not_matter(serial):
    names = list(serial.names)[::-1]
    with ThreadPoolExecutor(3) as pool:
        found = pf.check(table()[names], pool=pool, cache=False, progress=False)
    assert found.names == tuple(names)
    assert_same([found[name] for name in serial.names] and pf.Report(found[name] for name in serial.names), serial)


def test_a_difference_is_seen(serial):
    spoilt = table()
    spoilt.iloc[3, 2] += 1e-6
    found = pf.check(spoilt, only="line 2", cache=False, progress=False)
    assert differences(found["line 2"].findings, serial["line 2"].findings)


def test_unequal_lengths_and_kinds_of_index():
    days = pd.Series(np.random.default_rng(3).standard_normal(60), pd.date_range("2024-01-01", periods=60), name="a")
    rows = pd.concat([days.iloc[: 30 + 5 * i].rename("value").to_frame().assign(line=f"l{i}") for i in range(5)])
    options = {"series": "line", "value": "value", "season": 1, "cache": False, "progress": False}
    with ThreadPoolExecutor(2) as pool:
        assert_same(pf.check(rows, pool=pool, **options), pf.check(rows, **options))


# ------------------------------------------------------------------------------------------------- lost workers
def series(*names: str):
    rng = np.random.default_rng(5)
    index = pd.period_range("2000", periods=12, freq="Y")
    return read(pd.DataFrame({name: rng.standard_normal(12) for name in names}, index=index))


@pytest.fixture
def notes(tmp_path, monkeypatch):
    """Names of the series that were worked on, and how often."""
    monkeypatch.setenv("PREFLIGHT_NOTES", str(tmp_path))
    return lambda: Counter(Path(path).stem for path in tmp_path.iterdir())


def run(every, work=noted, workers=1):
    tally = Tally()
    # The workers have to see the environment as it is now, so no server that was started earlier makes them.
    with ProcessPoolExecutor(workers, mp_context=multiprocessing.get_context("spawn")) as pool:
        found = list(in_pool(work, every, Settings(), pool, tally))
    assert [position for position, _ in found] == list(range(len(every)))
    return [result for _, result in found], tally


def test_work_lost_with_a_worker_is_done_once_more(notes, monkeypatch):
    monkeypatch.setattr(pooling, "MOST_SERIES", 2)
    names = ["a", "b", "c", "d", "first", "e", "f", "g", "h"]
    every = series(*names)
    results, tally = run(every)
    assert results == [(one.name, float(one.values.sum())) for one in every]
    assert tally.finished == len(names)
    calls = notes()
    # What was finished before the loss is not done again.
    assert (calls["a"], calls["b"], calls["first"]) == (1, 1, 2)
    assert max(calls.values()) == 2


def test_series_that_kills_again_is_lost_alone(notes, monkeypatch):
    monkeypatch.setattr(pooling, "MOST_SERIES", 4)
    names = ["a", "b", "c", "fatal 1", "d", "e", "fatal 2", "f"]
    results, _ = run(series(*names))
    assert [name for name, result in zip(names, results, strict=True) if isinstance(result, Lost)] == [
        "fatal 1",
        "fatal 2",
    ]
    assert [result[0] for result in results if not isinstance(result, Lost)] == ["a", "b", "c", "d", "e", "f"]
    assert notes()["a"] == 1


def test_fatal_series_is_infeasible_by_name(serial):
    frame = table()
    name = Fatal()
    frame.insert(4, name, frame["line 1"] + 1)
    with ProcessPoolExecutor(2, mp_context=FORKSERVER) as pool:
        report = pf.check(frame, pool=pool, cache=False, progress=False)
    assert report[name].verdict == "infeasible"
    assert report[name].answer.startswith("column 'tides': the process that checked it ended, and a second one too")
    assert report[name].answer.endswith(".")
    assert_same(pf.Report(one for one in report if one.name is not name), serial)


def test_worker_killed_from_outside_costs_nothing(serial):
    with ProcessPoolExecutor(2, mp_context=FORKSERVER) as pool:

        def kill(done: int, total: int) -> None:
            if done == 2:
                os.kill(next(iter(pool._processes)), signal.SIGKILL)

        report = pf.check(table(), pool=pool, cache=False, progress=kill)
    assert_same(report, serial)


def test_unguarded_script_is_told_what_to_do(notes, monkeypatch):
    class Broken:
        def __init__(self, *args, **options):
            pass

        def submit(self, *args):
            future = Future()
            future.set_exception(pooling.BrokenExecutor("no process"))
            return future

        def shutdown(self, **options):
            pass

    monkeypatch.setattr(pooling, "ProcessPoolExecutor", Broken)
    results = [result for _, result in in_pool(noted, series("a", "b"), Settings(), Broken(), Tally())]
    assert all("if __name__ == '__main__':" in result.reason for result in results)


def test_names_that_cannot_be_pickled_are_checked_here(serial):
    class Local:
        def __repr__(self):
            return "'line 3'"

    name = Local()
    frame = table().rename(columns={"line 3": name})
    with pytest.raises((AttributeError, pickle.PicklingError)):
        pickle.dumps(name)
    with ProcessPoolExecutor(1, mp_context=FORKSERVER) as pool:
        found = pf.check(frame, pool=pool, cache=False, progress=False)
    assert found.names[3] is name
    assert found[name].plan == serial["line 3"].plan
    assert differences(found[name].findings, serial["line 3"].findings) == []
    assert found["line 4"].plan == serial["line 4"].plan


# ---------------------------------------------------------------------------------------- pools that take no work
class Deferred(Executor):
    """Does nothing before it is asked for a result; counts what was sent, and may be interrupted."""

    def __init__(self, interrupt: int | None = None) -> None:
        self.waiting, self.most, self.sent, self.interrupt = 0, 0, [], interrupt

    def submit(self, fn, /, *args, **kwargs):
        pool, number = self, len(self.sent)

        class Late(Future):
            def result(self, timeout=None):
                if number == pool.interrupt:
                    raise KeyboardInterrupt
                if not self.done():
                    self.set_result(fn(*args, **kwargs))
                    pool.waiting -= 1
                return super().result(timeout)

        future = Late()
        self.sent.append(future)
        self.waiting += 1
        self.most = max(self.most, self.waiting)
        return future


def plain(one, settings):
    return one.name


def test_few_chunks_are_in_flight(monkeypatch):
    monkeypatch.setattr(pooling, "MOST_FLYING", 5)
    monkeypatch.setattr(pooling, "MOST_SERIES", 2)
    monkeypatch.setattr(pooling, "UNKNOWN_WORKERS", 1)
    every = series(*map(str, range(40)))
    pool, tally = Deferred(), Tally()
    assert [name for _, name in in_pool(plain, every, Settings(), pool, tally)] == [one.name for one in every]
    assert pool.most == 5
    assert len(pool.sent) < 40
    assert tally.finished == 40


def test_interrupt_keeps_what_is_done_and_cancels_the_rest(monkeypatch):
    monkeypatch.setattr(pooling, "MOST_SERIES", 1)
    pool, seen = Deferred(interrupt=2), []
    every = series("a", "b", "c", "d", "e")
    found = in_pool(plain, every, Settings(), pool, Tally())
    seen.append(next(found))
    # The last but one is done out of turn.
    assert pool.sent[3].result()
    with pytest.raises(KeyboardInterrupt):
        seen.extend(found)
    assert [position for position, _ in seen] == [0, 1, 3]
    assert [future.cancelled() for future in pool.sent] == [False, False, True, False, True]


def test_leaving_a_stream_cancels_what_is_pending():
    pool = Deferred()
    for one in pf.stream(table(), pool=pool, cache=False, progress=False):
        assert one.name == "line 0"
        break
    del one
    assert sum(future.cancelled() for future in pool.sent) == len(pool.sent) - 1


def test_interrupted_check_hands_back_what_is_done(serial):
    def stop(done: int, total: int) -> None:
        if done == 4:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt, match="stopped after 3 of 6 series") as caught:
        pf.check(table(), cache=False, progress=stop)
    assert caught.value.total == 6
    assert caught.value.report.names == serial.names[:3]


@pytest.mark.parametrize("kind", [ThreadPoolExecutor, ProcessPoolExecutor])
def test_pool_that_is_shut_down(kind):
    pool = kind(1)
    pool.shutdown()
    with pytest.raises(pf.CheckError, match=f"pool is a {kind.__name__} that is already shut down; make a new one"):
        pf.check(table(2), pool=pool, cache=False, progress=False)


def test_pool_that_has_lost_a_worker():
    with ProcessPoolExecutor(1, mp_context=FORKSERVER) as pool:
        with pytest.raises(pooling.BrokenExecutor):
            pool.submit(os._exit, 1).result()
        with pytest.raises(pf.CheckError, match="has lost a worker and takes no more work; make a new one"):
            pf.check(table(2), pool=pool, cache=False, progress=False)


def test_pool_that_is_none():
    with pytest.raises(pf.CheckError, match="pool is 4, not an executor"):
        pf.check(table(2), pool=4, cache=False, progress=False)


def test_workers_that_lack_the_package(monkeypatch):
    def unpickled(work, blob):
        return missing(None, None)

    monkeypatch.setattr(pooling, "run_chunk", unpickled)
    with ThreadPoolExecutor(1) as pool, pytest.raises(pf.CheckError, match="cannot import preflight_magic; install"):
        pf.check(table(2), pool=pool, cache=False, progress=False)


def test_number_of_workers():
    with ThreadPoolExecutor(3) as pool:
        assert workers_of(pool) == 3
    assert workers_of(Deferred()) == pooling.UNKNOWN_WORKERS


# ------------------------------------------------------------------------------------------------- what is pickled
def test_report_of_a_series_comes_back_from_pickle(serial):
    for one in serial:
        back = pickle.loads(pickle.dumps(one))
        assert_same(pf.Report([back]), pf.Report([one]))
        assert differences(back.series, one.series) == []
        assert back.series.index.dtype == one.series.index.dtype
        assert back.code() == one.code()


@pytest.mark.parametrize("freq", ["M", "15min", "W-WED", "Q-JAN", "h", "D"])
def test_periods_come_back_from_pickle(freq):
    y = pd.Series(np.arange(30.0) % 7, pd.period_range("2001-01-31", periods=30, freq=freq, name="when"), name=("a", 1))
    one = pf.check(y, season=1, progress=False)[("a", 1)]
    pd.testing.assert_series_equal(pickle.loads(pickle.dumps(one)).series, one.series)


def test_monthly_series_is_small_when_pickled():
    monthly = pf.demo.ferry_line().iloc[-120:]
    report = pf.check(monthly, only=list(monthly.columns[:3]), progress=False)
    for one in report:
        _ = one.transformed
        assert len(pickle.dumps(one)) < 20_000
