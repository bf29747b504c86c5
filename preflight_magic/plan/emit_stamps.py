"""The line of generated code that continues a time index."""

from __future__ import annotations

import pandas as pd


def stamps_after(index: pd.Index, of: str) -> str:
    """Source of the ``steps`` stamps that follow those of ``of``, for the kind of an index."""
    if isinstance(index, pd.PeriodIndex):
        return f"pd.period_range({of}[-1] + 1, periods=steps, freq={of}.freq)"
    if isinstance(index, pd.DatetimeIndex):
        freq = index.freqstr or pd.infer_freq(index)
        return f'pd.date_range({of}[-1], periods=steps + 1, freq="{freq}")[1:]'
    return f"pd.RangeIndex({of}[-1] + 1, {of}[-1] + 1 + steps)"
