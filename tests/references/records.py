"""Records of other libraries as rows; the first line of each file names the versions that wrote it."""

from __future__ import annotations

import csv
from functools import cache
from pathlib import Path

import numpy as np

HERE = Path(__file__).parent


@cache
def rows(name: str) -> tuple[dict[str, str], ...]:
    """Rows of one record by column name."""
    lines = (HERE / f"{name}.csv").read_text(encoding="utf-8").splitlines()
    return tuple(csv.DictReader(line for line in lines if not line.startswith("#")))


@cache
def unit_root_series() -> dict[str, np.ndarray]:
    """The series of the unit-root records; their sources stand in the header of the file."""
    found: dict[str, list[float]] = {}
    for row in rows("unit_root_series"):
        found.setdefault(row["series"], []).append(float(row["value"]))
    return {name: np.array(values) for name, values in found.items()}


def of(record: str, referee: str) -> list[dict[str, str]]:
    """Rows of one referee."""
    found = [row for row in rows(record) if row["referee"] == referee]
    assert found
    return found
