"""How long a check will take, told from a few of its series."""

from __future__ import annotations

from collections.abc import Sequence
from concurrent.futures import Executor
from time import perf_counter
from typing import Any

import numpy as np
import pandas as pd

from preflight_magic.batch import checked, opened
from preflight_magic.model import CheckError, TimeSeries
from preflight_magic.pooling import workers_of

SAMPLE = 7
"""Series that are timed: some of each length, and few enough to take a second."""


def time_needed(frame: Any, *, workers: int | None = None, **options: Any) -> pd.Timedelta:
    """Tell how long a check will take, before it is begun.

    Some series, the shortest, the longest and those between, are checked here and timed; the time of the others is
    read off a line through theirs, by length. What the cache holds is not allowed for.

    Parameters
    ----------
    frame : DataFrame, Series, or anything with ``to_pandas``
    workers : int, optional
        Processes at work; by default those of `pool` where it is one of the standard library, and 1 without a pool.
    **options
        As for `check`.

    Returns
    -------
    pandas.Timedelta

    Raises
    ------
    CheckError
        As `check` does, and for a number of workers that is none or is not known.
    """
    every, settings, given = opened("time_needed", frame, options)
    count = _workers(workers, given["pool"])
    usable = [one for one in every if one.problem is None]
    sample = _sample(usable)
    # The first check pays for what is loaded once.
    checked(sample[0], settings)
    seconds = []
    for one in sample:
        start = perf_counter()
        checked(one, settings)
        seconds.append(perf_counter() - start)
    total = _total([len(one.values) for one in sample], seconds, [len(one.values) for one in usable])
    return pd.Timedelta(seconds=round(total / min(count, len(usable)), 3))


def _workers(workers: int | None, pool: Executor | None) -> int:
    if workers is None:
        if pool is None:
            return 1
        if not isinstance(getattr(pool, "_max_workers", None), int):
            raise CheckError(
                f"pool is a {type(pool).__name__}, which does not tell how many workers it has; give workers=."
            )
        return workers_of(pool)
    if isinstance(workers, bool) or not isinstance(workers, int | np.integer) or workers < 1:
        raise CheckError(f"workers is {workers!r}; give a whole number, at least 1.")
    return int(workers)


def _sample(usable: Sequence[TimeSeries]) -> list[TimeSeries]:
    """Series spread evenly from the shortest to the longest."""
    ordered = sorted(usable, key=lambda one: len(one.values))
    places = np.unique(np.linspace(0, len(ordered) - 1, SAMPLE).round().astype(int))
    return [ordered[place] for place in places]


def _total(lengths: Sequence[int], seconds: Sequence[float], every: Sequence[int]) -> float:
    """Sum of the times of all series, each read off a line through those measured that does not fall."""
    x, y = np.asarray(lengths, dtype=float), np.asarray(seconds)
    slope = 0.0 if np.ptp(x) == 0.0 else max(float(np.polyfit(x, y, 1)[0]), 0.0)
    return float(len(every) * y.mean() + slope * (np.sum(every) - len(every) * x.mean()))
