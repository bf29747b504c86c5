"""A cluster of Dask as the pool: several worker processes, through the executor of its client."""

from __future__ import annotations

import os

import pytest

import preflight_magic as pf
from preflight_magic import pooling
from tests.pool_works import Fatal
from tests.test_documents import README, blocks
from tests.test_pooling import assert_same, table

dask = pytest.importorskip("dask")
distributed = pytest.importorskip("distributed")

# A cluster that is closed leaves sockets and processes to the garbage collector.
pytestmark = [pytest.mark.slow, pytest.mark.filterwarnings("ignore::ResourceWarning")]


@pytest.fixture(scope="module")
def serial():
    return pf.check(table(), cache=False, progress=False)


@pytest.fixture(scope="module")
def client():
    # A task that ends its worker is given up at once, not after four workers.
    with (
        dask.config.set({"distributed.scheduler.allowed-failures": 0}),
        distributed.LocalCluster(2, threads_per_worker=1, dashboard_address=None) as cluster,
        distributed.Client(cluster) as found,
    ):
        yield found


@pytest.mark.parametrize("most", [1, 16])
def test_cluster_gives_what_serial_gives(client, serial, monkeypatch, most):
    monkeypatch.setattr(pooling, "MOST_SERIES", most)
    pids = set(client.run(os.getpid).values())
    assert len(pids) == 2
    assert os.getpid() not in pids
    assert_same(pf.check(table(), pool=client.get_executor(), cache=False, progress=False), serial)


def test_stream_of_a_cluster_comes_in_order(client, serial):
    told = []
    found = pf.stream(table(), pool=client.get_executor(), cache=False, progress=lambda *given: told.append(given))
    assert [one.name for one in found] == list(serial.names)
    assert told[-1] == (6, 6)


def test_fatal_series_is_infeasible_by_name(client, serial):
    frame, name = table(), Fatal()
    frame.insert(2, name, frame["line 1"] + 1)
    report = pf.check(frame, pool=client.get_executor(), cache=False, progress=False)
    assert report[name].verdict == "infeasible"
    assert "the process that checked it ended, and a second one too" in report[name].answer
    assert_same(pf.Report(one for one in report if one.name is not name), serial)


def test_lines_of_the_readme(client, serial):
    (source,) = (one for one in blocks(README, "py") if "dask" in one)
    assert '"scheduler:8786"' in source
    names = {"pf": pf, "monthly": table(2)}
    exec(compile(source.replace("scheduler:8786", client.scheduler.address), "README.md", "exec"), names)
    names["client"].close()
    assert names["report"].names == serial.names[:2]


def test_executor_that_is_shut_down(client):
    pool = client.get_executor()
    pool.shutdown()
    with pytest.raises(pf.CheckError, match="already shut down"):
        pf.check(table(2), pool=pool, cache=False, progress=False)
