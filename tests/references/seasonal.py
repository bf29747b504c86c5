"""The record of seasonal.json: what uroot and strucchange say, and the published tables that uroot carries."""

from __future__ import annotations

import json
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np


@cache
def record() -> dict[str, Any]:
    """The whole record; `versions` names what wrote it."""
    found: dict[str, Any] = json.loads(Path(__file__).with_suffix(".json").read_text(encoding="utf-8"))
    return found


def series(name: str) -> tuple[np.ndarray, int]:
    """Values and period."""
    found = record()["series"][name]
    return np.array(found["values"], dtype=float), int(found["period"])


def table(name: str) -> tuple[list[list[str]], np.ndarray]:
    """Names of the rows of each axis, and the values."""
    found = record()["tables"][name]
    names = found["dimnames"]
    return names, np.array(found["values"], dtype=float).reshape([len(one) for one in names], order="F")
