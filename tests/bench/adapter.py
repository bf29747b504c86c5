"""The plan of a series as a scorer of known processes wants it."""

from __future__ import annotations

import pandas as pd

import preflight_magic as pf


def decide(series: pd.Series, season: int) -> dict[str, object]:
    """Check one series and say which plan it was given.

    Parameters
    ----------
    series : Series, shape (n,)
    season : int
        Seasonal period in steps; 1 for none.

    Returns
    -------
    dict
        Keys `log`, `trend`, `d`, `season` and `shift`, as in the overview.

    Raises
    ------
    ValueError
        When the series cannot be checked.
    """
    row = pf.check(series, season=season, cache=False, progress=False).overview.iloc[0]
    if row["verdict"] == "infeasible":
        raise ValueError(row["note"])
    return {
        "log": bool(row["log"]),
        "trend": bool(row["trend"]),
        "d": int(row["d"]),
        "season": str(row["season"]),
        "shift": bool(row["shift"]),
    }
