"""Series as bare arrays and a few words, small on the way to a worker and back."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import fields
from typing import Any

import numpy as np
import pandas as pd

from preflight_magic.model import TimeSeries

Packed = tuple[Any, ...]
"""What a series becomes: plain values, an array, and an index where it has no shorter name."""


def pack(one: TimeSeries) -> Packed:
    """Take a series apart: the array of its values, and its periods as first, step and count.

    Parameters
    ----------
    one : TimeSeries

    Returns
    -------
    tuple
        For `unpack`. Indexes that are no periods stay as they are; series of one table share them, and `pickle` writes
        what is shared once.
    """
    values = one.values
    words = {field.name: getattr(one, field.name) for field in fields(one) if field.name != "values"}
    return words, values.to_numpy(), values.name, _short(values.index)


def unpack(packed: Packed) -> TimeSeries:
    """Put a series together again.

    Parameters
    ----------
    packed : tuple
        From `pack`.

    Returns
    -------
    TimeSeries
        Equal to the one that was packed.
    """
    words, numbers, name, index = packed
    return TimeSeries(values=pd.Series(numbers, index=_long(index), name=name, copy=False), **words)


def _short(index: pd.Index) -> pd.Index | tuple[str, Hashable, int, int, int]:
    if not isinstance(index, pd.PeriodIndex) or len(index) < 2:
        return index
    ordinals = index.asi8
    first, step, count = int(ordinals[0]), int(ordinals[1] - ordinals[0]), len(ordinals)
    if not np.array_equal(ordinals, np.arange(first, first + step * count, step) if step else ordinals[:0]):
        return index
    return index.freqstr, index.name, first, step, count


def _long(index: pd.Index | Sequence[Any]) -> pd.Index:
    if isinstance(index, pd.Index):
        return index
    freq, name, first, step, count = index
    ordinals = first + step * np.arange(count)
    found: pd.PeriodIndex = pd.PeriodIndex.from_ordinals(ordinals, freq=freq, name=name)  # type: ignore[attr-defined]
    return found
