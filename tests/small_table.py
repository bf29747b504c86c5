"""A short table, quick to check: three series of yearly values and one that cannot be checked."""

from __future__ import annotations

import numpy as np
import pandas as pd

NAMES = ("cargo", "fares", "crew")
BAD = "remarks"


def small_table(*, bad: bool = False, n: int = 30) -> pd.DataFrame:
    rng = np.random.default_rng(8)
    index = pd.period_range("1990", periods=n, freq="Y")
    walk = 50 + np.cumsum(rng.standard_normal(n))
    frame = pd.DataFrame({"cargo": walk, "fares": 9 + rng.standard_normal(n), "crew": -walk[::-1]}, index=index)
    frame.loc[index[4], "fares"] = np.nan
    if bad:
        frame.insert(1, BAD, "calm sea")
    return frame
