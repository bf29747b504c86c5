"""Published and simulated constants as data files; the first lines of each file say where it comes from."""

from __future__ import annotations

import csv
from functools import cache
from importlib.resources import files


@cache
def read(name: str) -> tuple[dict[str, str], ...]:
    """Rows of one table.

    Parameters
    ----------
    name : str
        File name without its suffix.

    Returns
    -------
    tuple of dict
        One row each, by column name; lines that start with ``#`` are left out.
    """
    text = files(__name__).joinpath(f"{name}.csv").read_text(encoding="utf-8")
    return tuple(csv.DictReader(line for line in text.splitlines() if not line.startswith("#")))
