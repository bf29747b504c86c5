"""Work for pools that goes wrong on purpose, and how results of different ways are compared."""

from __future__ import annotations

import os
import signal
from collections.abc import Mapping, Sequence
from dataclasses import fields, is_dataclass
from pathlib import Path

import numpy as np
import pandas as pd


def die() -> str:
    """End this process as a lack of memory does."""
    os.kill(os.getpid(), signal.SIGKILL)
    return "never"


class Fatal:
    """A name that ends each process that reads it; the one that wrote it goes on."""

    def __repr__(self):
        return "'tides'"

    def __reduce__(self):
        return die, ()


def noted(one, settings):
    """Leave a file behind for each call; `first` ends its process the first time, `fatal` each time."""
    folder = Path(os.environ["PREFLIGHT_NOTES"])
    calls = len(list(folder.glob(f"{one.name}.*")))
    (folder / f"{one.name}.{calls}").touch()
    if one.name.startswith("fatal") or (one.name.startswith("first") and not calls):
        die()
    return one.name, float(one.values.sum())


def missing(one, settings):
    """Fail as a worker does that lacks a package."""
    raise ModuleNotFoundError("No module named 'preflight_magic'", name="preflight_magic")


def differences(one: object, other: object, path: str = "") -> list[str]:
    """Places where two results differ by more than 1e-10 of their size."""
    if type(one) is not type(other):
        return [f"{path}: {type(one).__name__} and {type(other).__name__}"]
    if isinstance(one, pd.Series):
        same = one.index.equals(other.index) and one.name == other.name
        return differences(one.to_numpy(), other.to_numpy(), path) if same else [f"{path}: index"]
    if isinstance(one, np.ndarray | float):
        same = np.shape(one) == np.shape(other) and np.allclose(one, other, rtol=1e-10, atol=1e-10, equal_nan=True)
        return [] if same else [f"{path}: {one} and {other}"]
    if isinstance(one, Mapping):
        if list(one) != list(other):
            return [f"{path}: keys"]
        return [text for key in one for text in differences(one[key], other[key], f"{path}[{key!r}]")]
    if is_dataclass(one):
        parts = [(getattr(one, field.name), getattr(other, field.name), field.name) for field in fields(one)]
        return [text for a, b, name in parts for text in differences(a, b, f"{path}.{name}")]
    if isinstance(one, Sequence) and not isinstance(one, str):
        if len(one) != len(other):
            return [f"{path}: length"]
        pairs = enumerate(zip(one, other, strict=True))
        return [text for at, (a, b) in pairs for text in differences(a, b, f"{path}[{at}]")]
    return [] if one == other else [f"{path}: {one} and {other}"]
