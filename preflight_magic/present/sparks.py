"""The small pictures of an overview, drawn dot by dot: loading a plotting library would cost more than all of them."""

from __future__ import annotations

import numpy as np

from preflight_magic.present.sheet import encode, runs

WIDTH, HEIGHT = 180, 42
"""Size in dots."""
_FINE = 4
"""Dots drawn for each dot shown, across and up, which makes the edges of the line soft."""
_PEN = 6
"""Width of the line in fine dots."""


def spark(values: np.ndarray, width: int = WIDTH, height: int = HEIGHT) -> bytes:
    """Small picture of a series.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where one is missing.
    width, height : int
        Size in dots.

    Returns
    -------
    bytes
        PNG in black ink, background transparent.
    """
    from PIL import Image, ImageDraw

    sheet = Image.new("L", (width * _FINE, height * _FINE), 0)
    pen = ImageDraw.Draw(sheet)
    for line in _lines(values, width, height):
        pen.line([(float(x) * _FINE, float(y) * _FINE) for x, y in line], fill=255, width=_PEN, joint="curve")
    ink = np.asarray(sheet.reduce(_FINE))
    dots = np.zeros((height, width, 4), dtype=np.uint8)
    dots[..., 3] = ink
    return encode(dots)


def _lines(values: np.ndarray, width: int, height: int) -> list[np.ndarray]:
    """Pieces of the line between missing values, in dots from the upper left corner."""
    values = _thin(values, width) if len(values) > 4 * width else values
    seen = np.isfinite(values)
    if seen.sum() < 2:
        return []
    low, high = float(values[seen].min()), float(values[seen].max())
    scaled = (values - low) / (high - low) if high > low else np.where(seen, 0.5, np.nan)
    y = height - 4 - scaled * (height - 8)
    x = np.linspace(2, width - 2, len(values))
    return [np.column_stack([x[a:b], y[a:b]]) for a, b in runs(seen) if b - a > 1]


def _thin(values: np.ndarray, width: int) -> np.ndarray:
    """Least and greatest of each of `width` pieces: more points than dots cannot be told apart."""
    kept: list[float] = []
    for piece in np.array_split(values, width):
        seen = piece[np.isfinite(piece)]
        kept += [float(seen.min()), float(seen.max())] if len(seen) else [np.nan, np.nan]
    return np.array(kept)
