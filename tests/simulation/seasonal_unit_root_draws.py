"""HEGY statistics of many seasonal random walks at once, by normal equations in batches.

The package reads its statistics from one orthogonal factorisation a series; this is another road to the same numbers.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

TERMS = ("n", "c", "ct", "cD", "ctD")
"""No terms, constant, constant and line; ``D`` adds seasonal dummies."""
KINDS = ("zero", "pi", "pair", "seasonal", "all")
_BATCH = 2_000_000  # numbers held at once


def draw(s: int, n: int, lags: int, count: int, rng: np.random.Generator) -> dict[tuple[str, str], Array]:
    """Statistics of `count` seasonal random walks that start from zero.

    Parameters
    ----------
    s, n, lags : int
        Seasonal period, values in the series, lagged seasonal differences in the regression.
    count : int
    rng : numpy.random.Generator

    Returns
    -------
    dict
        (terms, kind) to an array of statistics: t-ratios for ``zero`` and ``pi``, F for the rest; all pairs together.
    """
    found: dict[tuple[str, str], list[Array]] = {}
    size = max(_BATCH // (n * (s + lags + 1)), 20)
    for start in range(0, count, size):
        noise = rng.standard_normal((min(size, count - start), -(-n // s), s))
        walks = noise.cumsum(axis=1).reshape(len(noise), -1)[:, :n]
        for key, values in statistics(walks, s, lags).items():
            found.setdefault(key, []).append(values)
    return {key: np.concatenate(values) for key, values in found.items()}


def frequencies(s: int) -> Array:
    """Weights of the last s values, the latest first, at the frequencies 0, pi and the pairs; shape (s, s)."""
    lag = np.arange(1, s + 1)
    columns = [np.ones(s)]
    if s % 2 == 0:
        columns.append(np.cos(np.pi * lag))
    for k in range(1, (s + 1) // 2):
        columns += [np.cos(2.0 * np.pi * k * lag / s), np.sin(2.0 * np.pi * k * lag / s)]
    return np.column_stack(columns)


def statistics(walks: Array, s: int, lags: int) -> dict[tuple[str, str], Array]:
    """Statistics of each row of `walks`, shape (count, n), as `draw` returns them."""
    count, n = walks.shape
    change = walks[:, s:] - walks[:, :-s]
    windows = np.lib.stride_tricks.sliding_window_view(walks, s, axis=1)[:, :-1, ::-1]
    rows = n - s - lags
    block = np.empty((count, rows, lags + s + 1))
    for lag in range(1, lags + 1):
        block[:, :, lag - 1] = change[:, lags - lag : n - s - lag]
    block[:, :, lags:-1] = windows[:, lags:] @ frequencies(s)
    block[:, :, -1] = change[:, lags:]
    gram = block.transpose(0, 2, 1) @ block
    line = np.linspace(-1.0, 1.0, rows)
    dummies = np.eye(s)[np.arange(rows) % s]
    found: dict[tuple[str, str], Array] = {}
    for columns, names in (
        (np.column_stack([np.ones(rows), line]), {"n": 0, "c": 1, "ct": 2}),
        (np.column_stack([dummies, line]), {"cD": s, "ctD": s + 1}),
    ):
        taken = np.linalg.qr(columns)[0].T @ block
        for terms, width in names.items():
            left = taken[:, :width]
            degrees = rows - width - lags - s
            if degrees > 2:
                for kind, values in _read(gram - left.transpose(0, 2, 1) @ left, s, degrees).items():
                    found[terms, kind] = values
    return found


def _read(gram: Array, s: int, degrees: int) -> dict[str, Array]:
    """t-ratios and F statistics from moments with the terms taken out; the last s + 1 columns are those tested."""
    factor = np.linalg.cholesky(gram)[:, -s - 1 :, -s - 1 :].transpose(0, 2, 1)
    variance = factor[:, -1, -1] ** 2 / degrees
    z = factor[:, :-1, -1]
    inverse = np.linalg.inv(factor[:, :-1, :-1])
    effects = (inverse @ z[:, :, None])[:, :, 0]
    covariance = inverse @ inverse.transpose(0, 2, 1)
    even = s % 2 == 0
    found = {"zero": effects[:, 0] / np.sqrt(covariance[:, 0, 0] * variance)}
    if even:
        found["pi"] = effects[:, 1] / np.sqrt(covariance[:, 1, 1] * variance)
    pairs = []
    for first in range(1 + even, s, 2):
        two = effects[:, first : first + 2]
        solved = np.linalg.solve(covariance[:, first : first + 2, first : first + 2], two[:, :, None])[:, :, 0]
        pairs.append((two * solved).sum(axis=1) / 2.0 / variance)
    if pairs:
        found["pair"] = np.concatenate(pairs)
    found["seasonal"] = (z[:, 1:] ** 2).sum(axis=1) / (s - 1) / variance
    found["all"] = (z**2).sum(axis=1) / s / variance
    return found
