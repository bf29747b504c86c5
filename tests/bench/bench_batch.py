"""Many series: pace, two processes, rerun, memory, sizes, overheads and first looks; prints and never fails.

Run ``OPENBLAS_NUM_THREADS=1 python -m tests.bench.bench_batch [series]`` from the root of the project. The last lines
tell from these measurements what a million series cost on 64 workers. What happens in one process is measured in time
of the processor, so that a busy machine counts less; what happens in pools on the clock.
"""

from __future__ import annotations

import pickle
import resource
import subprocess
import sys
import tracemalloc
from collections.abc import Callable, Sequence
from concurrent.futures import Executor, ProcessPoolExecutor
from multiprocessing import get_context
from time import perf_counter, process_time

import numpy as np
import pandas as pd
from scipy.signal import lfilter

import preflight_magic as pf
from preflight_magic import batch, pooling
from preflight_magic.intake import read
from preflight_magic.model import TimeSeries
from preflight_magic.overview import row_of
from preflight_magic.policy import Settings
from preflight_magic.progress import Tally

LENGTH, PERIOD = 120, 12
MILLION, WORKERS = 1_000_000, 64
LOAD = """
import pandas, IPython
from time import process_time
from IPython.core.interactiveshell import InteractiveShell
shell = InteractiveShell.instance()
start = process_time()
shell.run_line_magic("load_ext", "preflight_magic")
print(process_time() - start)
"""


def table(k: int, seed: int) -> pd.DataFrame:
    """Monthly series in turn by the airline model on logarithms, about a line with a pattern, and a random walk."""
    rng = np.random.default_rng(seed)
    pattern = np.tile(np.sin(np.arange(PERIOD)), LENGTH // PERIOD)
    columns = {}
    for i in range(k):
        noise = rng.standard_normal(LENGTH + PERIOD + 1)
        moving = 0.04 * lfilter(np.convolve([1.0, -0.4], [1.0, *[0.0] * 11, -0.6]), [1.0], noise)
        airline = np.exp(6.0 + lfilter([1.0], np.convolve([1.0, -1.0], [1.0, *[0.0] * 11, -1.0]), moving)[-LENGTH:])
        line = 50.0 + 0.1 * np.arange(LENGTH) + 3.0 * pattern + noise[:LENGTH]
        columns[f"line {i}"] = (airline, line, 50.0 + noise[:LENGTH].cumsum())[i % 3]
    return pd.DataFrame(columns, index=pd.period_range("2010-01", periods=LENGTH, freq="M"))


def ragged(k: int) -> pd.DataFrame:
    """A long table of months, each series with a span of its own."""
    rng = np.random.default_rng(3)
    months = pd.period_range("2000-01", periods=2 * LENGTH, freq="M")
    lengths = rng.integers(LENGTH // 2, 3 * LENGTH // 2, k)
    starts = rng.integers(0, 2 * LENGTH - lengths + 1)
    place = np.concatenate([np.arange(a, a + n) for a, n in zip(starts, lengths, strict=True)])
    names = pd.Series([f"line {i}" for i in range(k)]).take(np.repeat(np.arange(k), lengths)).to_numpy()
    return pd.DataFrame({"month": months.take(place), "book": names, "amount": rng.standard_normal(len(place))})


def seconds(action: Callable[[], object], clock: Callable[[], float] = process_time) -> float:
    start = clock()
    action()
    return clock() - start


def nothing(one: TimeSeries, settings: Settings) -> None:
    """Work that takes no time, so that what is left is the way there and back."""


def overhead(every: Sequence[TimeSeries], pool: Executor) -> float:
    """Seconds a chunk of the largest size costs beside the work in it."""
    chunks = len(every) / pooling.MOST_SERIES

    def there_and_back() -> None:
        list(pooling.in_pool(nothing, every, Settings(), pool, Tally()))

    return seconds(there_and_back, perf_counter) / chunks


def pace(k: int) -> tuple[float, float]:
    """Series a second on one process and on two, taken in turns."""
    batch._cache.clear()
    context = get_context("forkserver")
    with ProcessPoolExecutor(1, mp_context=context) as one, ProcessPoolExecutor(2, mp_context=context) as two:
        taken = {1: 0.0, 2: 0.0}
        for pool in (one, two):
            pf.check(table(8, 1), pool=pool, cache=False, progress=False)
        for seed in range(4):
            frame = table(k // 4, 10 + seed)
            for workers, pool in ((1, one), (2, two)):
                taken[workers] += seconds(lambda: pf.check(frame, pool=pool, cache=False, progress=False), perf_counter)  # noqa: B023
    return 4 * (k // 4) / taken[1], 4 * (k // 4) / taken[2]


def main(k: int) -> None:
    """Print one line per measure."""
    frame = table(k, 7)
    pf.check(frame.iloc[:, :6], cache=False, progress=False)
    tracemalloc.start()
    before = tracemalloc.get_traced_memory()[0]
    some = pf.check(frame.iloc[:, : min(k, 60)], cache=False, progress=False)
    held = (tracemalloc.get_traced_memory()[0] - before) / len(some)
    tracemalloc.stop()
    print(f"memory       {held / 1e3:.0f} kB a report, so {held * 1e-3:.0f} MB above the data for 1,000 (bar 300)")
    first = seconds(lambda: pf.check(frame, progress=False))
    report = pf.check(frame, progress=False)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e3
    print(
        f"first run    {k} series in {first:.1f} s, {k / first:.1f} a second on one process; peak {peak:.0f} MB in all"
    )
    changed = frame.assign(**{"line 3": frame["line 3"] + np.arange(LENGTH) % 5})
    again = seconds(lambda: pf.check(changed, progress=False))
    rest = seconds(lambda: pf.check(changed, progress=False))
    print(f"rerun        {again / first:.1%} of the first run after one of {k} changed, {rest / first:.1%} after none")
    print(f"             so {rest / first + 0.001:.2%} after one of 1,000 (bar 3 %)")
    sizes = [len(pickle.dumps(one)) for one in report]
    print(f"pickled      median {np.median(sizes) / 1e3:.1f} kB, largest {max(sizes) / 1e3:.1f} kB (bar 20)")
    blobs = [pickle.dumps(one._found) for one in report]
    back = seconds(lambda: [pickle.loads(blob) for blob in blobs]) / k
    rows = [pickle.dumps(row_of(one)) for one in report]
    row_back = seconds(lambda: [pickle.loads(row) for row in rows]) / k
    print(
        f"back         {1e3 * back:.2f} ms to read findings, {1e6 * row_back:.0f} us to read a row of {len(rows[0])} B"
    )
    every = read(frame, season=PERIOD)
    with ProcessPoolExecutor(2) as pool:
        list(pooling.in_pool(nothing, every, Settings(), pool, Tally()))
        task = overhead(every * (1 + 3000 // k), pool)
    print(f"overhead     {1e3 * task:.2f} ms a chunk of {pooling.MOST_SERIES} beside its work, packing included")
    one, two = pace(min(k, 120))
    print(f"two          {one:.1f} series a second by one worker, {two:.1f} by two, ratio {two / one:.2f} (bar 1.85)")
    long = ragged(10_000)
    intake = seconds(lambda: read(long, time="month", series="book", value="amount", season=PERIOD))
    print(f"intake       {intake:.2f} s for a long table of 10,000 series and {len(long)} rows")
    load = [subprocess.run([sys.executable, "-c", LOAD], capture_output=True, text=True, check=True) for _ in range(5)]
    print(f"%load_ext    {1e3 * min(float(run.stdout) for run in load):.0f} ms in a kernel that has pandas (bar 80)")
    first_card()
    million(k / first, task, back, row_back, intake / 10_000)


def first_card() -> None:
    """Time from the report to its first card, in a fresh process: what is loaded once counts."""
    code = (
        "import time, IPython, preflight_magic as pf; from tests.bench.bench_batch import table\n"
        "report = pf.check(table(3, 1), progress=False); start = time.process_time()\n"
        "report._ipython_display_(); print('\\n%.4f' % (time.process_time() - start))\n"
    )
    runs = [subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True) for _ in range(3)]
    shown = min(float(run.stdout.splitlines()[-1]) for run in runs)
    print(f"first card   {1e3 * shown:.0f} ms after the check, in a fresh process (bar 300)")


def million(rate: float, task: float, back: float, row_back: float, intake: float) -> None:
    """What the measurements say of a million series on 64 workers."""
    work = MILLION / rate / WORKERS
    chunk = task / pooling.MOST_SERIES
    print(f"{MILLION:,} series on {WORKERS} workers, from the above:")
    print(f"  work       {work / 3600:.2f} h ({MILLION / rate / 3600:.0f} h of processor time)")
    print(f"  parent     {MILLION * intake:.0f} s to read, {MILLION * chunk:.0f} s to send and collect chunks;")
    print(f"             then {MILLION * back:.0f} s to read findings, or {MILLION * row_back:.0f} s to read rows")
    with_findings, with_rows = (1.0 / (chunk + one) / rate for one in (back, row_back))
    print(f"             so it is full at {with_findings:.0f} workers with findings, {with_rows:.0f} with rows")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 200)
