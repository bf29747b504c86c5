"""Work on many series in somebody's executor: in chunks, in order, and through the loss of workers."""

from __future__ import annotations

import pickle
import signal
from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import BrokenExecutor, CancelledError, Executor, Future, ProcessPoolExecutor
from dataclasses import dataclass
from itertools import islice
from multiprocessing import get_context
from typing import Any, TypeVar

from preflight_magic.model import CheckError, TimeSeries
from preflight_magic.packing import pack, unpack
from preflight_magic.policy import Settings
from preflight_magic.progress import Tally

T = TypeVar("T")
Work = Callable[[TimeSeries, Settings], T]
"""What is done with each series; found by its name in the worker."""

MOST_SERIES = 16
"""Series of a chunk: a second of work or so, beside which what a task costs the engine is small."""
MOST_VALUES = 20_000
"""Values of a chunk beyond which no series joins it: long series take long, and chunks should be alike."""
MOST_FLYING = 256
"""Chunks sent and not yet handed on, more where there are more workers: enough to keep all of them busy, and few enough
that a million series do not pile up in the queues of the engine."""
UNKNOWN_WORKERS = 64
"""Workers assumed of an executor that does not say how many it has: the chunks become smaller, no more."""


class Lost:
    """In place of a result: why there is none. `reason` is the middle of a sentence."""

    def __init__(self, reason: str) -> None:
        self.reason = reason


def in_pool(
    work: Work[T], every: Sequence[TimeSeries], settings: Settings, pool: Executor, tally: Tally
) -> Iterator[tuple[int, T | Lost]]:
    """Do the same with every series in a pool.

    Parameters
    ----------
    work : callable
        A function at the top of a module that the workers can import.
    every : sequence of TimeSeries
    settings : Settings
    pool : concurrent.futures.Executor
    tally : Tally
        `finished` goes up with every chunk that comes back.

    Yields
    ------
    position : int
        In the order of the series. After an interrupt, what else is done comes before the interrupt is raised again.
    result : object or Lost
        `Lost` for a series that ended the process that checked it, twice.

    Raises
    ------
    CheckError
        For a pool that takes no work, or whose workers lack this package.
    """
    first, rescue = _First(pool), _Rescue()
    flying: deque[_Sent] = deque()
    chunks = _chunks(every, settings, workers_of(pool))
    most = max(MOST_FLYING, 4 * workers_of(pool))
    try:
        while True:
            for chunk in islice(chunks, most - len(flying)):
                flying.append(_Sent(chunk, first.send(work, chunk, tally)))
            if not flying:
                return
            results = flying[0].results()
            if results is None:
                results = _again(work, flying[0].chunk, every, settings, rescue)
                tally.finished += len(results)
            yield from zip(flying.popleft().chunk.positions, results, strict=True)
    except KeyboardInterrupt:
        for sent in flying:
            yield from sent.done_anyway()
        raise
    finally:
        for sent in flying:
            sent.cancel()
        rescue.close()


def workers_of(pool: Executor) -> int:
    """How many workers an executor has, as those of the standard library tell; `UNKNOWN_WORKERS` of others."""
    known = getattr(pool, "_max_workers", None)
    return known if isinstance(known, int) and known > 0 else UNKNOWN_WORKERS


# -------------------------------------------------------------------------------------------------------- chunks
@dataclass(frozen=True)
class _Chunk:
    """Positions of some series, and the series with the settings as bytes; None where they cannot be pickled."""

    positions: range
    blob: bytes | None


def _chunks(every: Sequence[TimeSeries], settings: Settings, workers: int) -> Iterator[_Chunk]:
    """Cut series into chunks: small ones first, so that the pace shows early, and last, so that all end together."""
    start, number = 0, 0
    while start < len(every):
        most = min(MOST_SERIES, 1 + number // workers, max(1, (len(every) - start) // (2 * workers)))
        stop, values = start + 1, len(every[start].values)
        while stop < min(start + most, len(every)) and values + len(every[stop].values) <= MOST_VALUES:
            values += len(every[stop].values)
            stop += 1
        positions = range(start, stop)
        yield _Chunk(positions, _blob([every[at] for at in positions], settings))
        start, number = stop, number + 1


def _blob(some: Sequence[TimeSeries], settings: Settings) -> bytes | None:
    try:
        return pickle.dumps(([pack(one) for one in some], settings), pickle.HIGHEST_PROTOCOL)
    except Exception:
        # A name of a class that is defined inside a function, say: such series are checked in this process.
        return None


def run_chunk(work: Work[Any], blob: bytes) -> bytes:
    """Do the work of a chunk; called in the worker."""
    some, settings = pickle.loads(blob)
    return pickle.dumps([work(unpack(one), settings) for one in some], pickle.HIGHEST_PROTOCOL)


# ------------------------------------------------------------------------------------------------------- sending
class _First:
    """The caller's pool, until it takes no more."""

    def __init__(self, pool: Executor) -> None:
        self._pool, self._used, self._lost = pool, False, False

    def send(self, work: Work[Any], chunk: _Chunk, tally: Tally) -> Future[bytes] | None:
        if chunk.blob is None or self._lost:
            return None
        try:
            future = self._pool.submit(run_chunk, work, chunk.blob)
        except Exception as error:
            if not self._used:
                raise CheckError(_refusal(self._pool, error)) from error
            self._lost = True
            return None
        self._used = True

        def count(done: Future[bytes]) -> None:
            if not done.cancelled() and done.exception() is None:
                tally.finished += len(chunk.positions)

        future.add_done_callback(count)
        return future


def _refusal(pool: object, error: Exception) -> str:
    kind = type(pool).__name__
    if isinstance(error, BrokenExecutor):
        return f"pool is a {kind} that has lost a worker and takes no more work; make a new one."
    if isinstance(error, RuntimeError) and "shutdown" in str(error):
        return f"pool is a {kind} that is already shut down; make a new one, and check before it is closed."
    said = " ".join(str(error).split())
    return f"pool is a {kind} that takes no work ({type(error).__name__}: {said}); make a new one, or leave pool out."


@dataclass(frozen=True)
class _Sent:
    """A chunk and what will become of it; no future where the pool never got it."""

    chunk: _Chunk
    future: Future[bytes] | None

    def results(self) -> list[Any] | None:
        """Wait for the results; None where they are lost."""
        if self.future is None:
            return None
        try:
            found: list[Any] = pickle.loads(self.future.result())
            return found
        except ImportError as error:
            raise CheckError(
                f"the workers of the pool cannot import {error.name or 'what they need'}; install preflight_magic in "
                "their environment, in the same version."
            ) from error
        except (Exception, CancelledError):
            # Broken by the loss of a worker, cancelled from elsewhere, or given up by a distributed engine.
            return None

    def done_anyway(self) -> Iterator[tuple[int, Any]]:
        """Results that are there already."""
        future = self.future
        if future is not None and not future.cancel() and future.done() and future.exception() is None:
            yield from zip(self.chunk.positions, pickle.loads(future.result()), strict=True)

    def cancel(self) -> None:
        if self.future is not None:
            self.future.cancel()


# ------------------------------------------------------------------------------------------------------ rescuing
def _again(
    work: Work[T], chunk: _Chunk, every: Sequence[TimeSeries], settings: Settings, rescue: _Rescue
) -> list[T | Lost]:
    """Do the work of a lost chunk once more: together, and where that fails series by series."""
    if chunk.blob is None:
        return [work(every[at], settings) for at in chunk.positions]
    try:
        together = rescue.run(work, chunk.blob)
    except Exception:
        # Nothing was killed: the work cannot be sent, or its result not sent back.
        return [work(every[at], settings) for at in chunk.positions]
    if not isinstance(together, Lost):
        return together
    if len(chunk.positions) == 1:
        return [together]
    found: list[T | Lost] = []
    for at in chunk.positions:
        alone = rescue.run(work, pickle.dumps(([pack(every[at])], settings)))
        found += [alone] if isinstance(alone, Lost) else alone
    return found


class _Rescue:
    """A pool of one worker of ours, made when first needed and again after each loss.

    The worker is spawned: a fork of a process with the threads of another pool may hang, and a fork server is not to
    be had on Windows.
    """

    def __init__(self) -> None:
        self._pool: ProcessPoolExecutor | None = None

    def run(self, work: Work[Any], blob: bytes) -> list[Any] | Lost:
        """Results of a chunk, or why there are none."""
        if self._pool is None:
            self._pool = ProcessPoolExecutor(1, mp_context=get_context("spawn"), initializer=_ignore_interrupts)
            try:
                self._pool.submit(int).result()
            except BrokenExecutor:
                self.close()
                return Lost(
                    "it was lost with the worker that checked it, and no new process could be started; in a script "
                    "call the check under `if __name__ == '__main__':`"
                )
        try:
            found: list[Any] = pickle.loads(self._pool.submit(run_chunk, work, blob).result())
            return found
        except BrokenExecutor:
            self.close()
            return Lost(
                "the process that checked it ended, and a second one too, as when memory runs out; check it alone in "
                "a process with more memory, or drop it"
            )

    def close(self) -> None:
        """End the worker after what it does now; nothing where there is none."""
        if self._pool is not None:
            self._pool.shutdown(wait=False, cancel_futures=True)
            self._pool = None


def _ignore_interrupts() -> None:
    """An interrupt from the keyboard reaches the whole group of processes; the parent decides what it means."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
