"""The plan of a series as a scorer of known processes wants it."""

from __future__ import annotations

import pandas as pd

import preflight_magic as pf

_WORDS = {
    "over-differenced": "over-differenced",
    "near-unit root": "near-unit-root",
    "too even to call": "undecidable",
    "too short": "too-short",
}
"""Words of a note, and the flags that a scorer knows."""


def flags_of(note: str) -> tuple[str, ...]:
    """Flags that a note of the overview raises."""
    return tuple(flag for words, flag in _WORDS.items() if words in note)


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
        Keys `log`, `trend`, `d`, `season` and `shift`, as in the overview, and `flags`: what its note warns of.

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
        "flags": flags_of(str(row["note"])),
    }
