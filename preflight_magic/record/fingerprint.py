"""What a record keeps of the data in their place: the span, and a fingerprint by which the same data are known."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import pandas as pd

from preflight_magic.model import RemoveShift, Stamp, Step


@dataclass(frozen=True)
class Span:
    """First and last observed stamp (None where there is no value), steps from one to the other, missing values."""

    first: Stamp | None
    last: Stamp | None
    n: int
    missing: int


def span_of(values: pd.Series) -> Span:
    """Span of a series that runs from its first to its last observed value.

    Parameters
    ----------
    values : Series, shape (n,)
    """
    if not len(values):
        return Span(None, None, 0, 0)
    first, last = (stamp_of(values.index[i]) for i in (0, -1))
    return Span(first, last, len(values), int(np.isnan(values.to_numpy(dtype=np.float64)).sum()))


def stamp_of(label: object) -> Stamp:
    """Label of a time index as a plain stamp; numbers of numpy become whole numbers of Python."""
    return label if isinstance(label, pd.Period | pd.Timestamp) else int(label)  # type: ignore[call-overload]


def fingerprint(values: pd.Series) -> str:
    """Digest of the numbers in their order, the same on every machine; a missing value counts as one.

    Parameters
    ----------
    values : Series, shape (n,)
        float64.

    Returns
    -------
    str
        SHA-256 (FIPS 180-4) in hexadecimal.
    """
    numbers = np.array(values.to_numpy(dtype="float64", na_value=np.nan), dtype="<f8")
    numbers[np.isnan(numbers)] = np.nan
    # zero has two signs, and a missing value many bit patterns
    return hashlib.sha256((numbers + 0.0).tobytes()).hexdigest()


def position_of(stamp: Stamp, index: pd.Index) -> int | None:
    """Where a stamp stands in a regular index; None where it does not.

    Months that a record knows as periods are found among dates as well, and dates among periods.
    """
    if not len(index):
        return None
    try:
        if isinstance(index, pd.PeriodIndex) and isinstance(stamp, pd.Timestamp):
            stamp = pd.Period(stamp.tz_localize(None), freq=index.freqstr)
        elif isinstance(index, pd.DatetimeIndex) and isinstance(stamp, pd.Period):
            index = index.tz_localize(None).to_period(stamp.freqstr)
        found = int(index.get_indexer(pd.Index([stamp]))[0])
    except (TypeError, ValueError):
        return None
    return found if found >= 0 else None


def steps_on(steps: Iterable[Step], index: pd.Index) -> tuple[Step, ...]:
    """Steps with their stamps written as an index has them, where it has them."""

    def moved(step: Step) -> Step:
        at = position_of(step.at, index) if isinstance(step, RemoveShift) else None
        return step if at is None else RemoveShift(stamp_of(index[at]))

    return tuple(moved(step) for step in steps)
