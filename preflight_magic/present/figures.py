"""The first picture of a card: the series before and after its plan, and the correlogram of both."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from preflight_magic.present import words
from preflight_magic.present.sheet import (
    DASHED,
    DOTTED,
    FAINT,
    HAIR,
    INK,
    PALE,
    TITLE,
    WASH,
    Panel,
    Sheet,
    runs,
)
from preflight_magic.present.ticks import lag_ticks, time_ticks, value_ticks

if TYPE_CHECKING:
    from preflight_magic.present.cards import Picture

WIDTH = 7.4
"""Width of the pictures in inches; shown at 96 pixels an inch they hold 1.5 dots a pixel."""

_LEFT, _SERIES, _LAGS, _BOTTOM = 0.6, 4.2, 5.2, 0.42


def before_after(picture: Picture) -> bytes:
    """Series as given and as transformed, and one correlogram with after over before.

    Parameters
    ----------
    picture : Picture

    Returns
    -------
    bytes
        PNG of 7.4 by 3 inches (2.2 without a transformed series) at 144 dots an inch, background transparent.
    """
    height = 3.0 if picture.after is not None else 2.2
    sheet = Sheet(WIDTH, height)
    index = picture.before.index
    ticks, labels = time_ticks(index)
    if picture.after is None:
        given = _series(sheet, picture.before, (_BOTTOM, height - _BOTTOM - 0.3), "as given")
        sheet.base(given, ticks, labels)
    else:
        given = _series(sheet, picture.before, (1.72, 0.98), "as given")
        sheet.base(given, ticks, None)
        after = picture.after.reindex(index)
        middle = float(picture.after.mean())
        below = _series(sheet, after, (_BOTTOM, 0.96), cut(f"after: {picture.plan}", 64), middle)
        sheet.base(below, ticks, labels)
    for at in picture.shifts:
        _mark_shift(sheet, given, index, at)
    if len(picture.correlogram_before):
        _correlogram(sheet, picture, height)
    return sheet.png()


def cut(text: str, most: int) -> str:
    """Text of at most `most` characters."""
    return text if len(text) <= most else text[: most - 1].rstrip(" ,") + "\u2026"


def _series(
    sheet: Sheet, series: pd.Series, place: tuple[float, float], title: str, middle: float | None = None
) -> Panel:
    """Panel with one series; missing spans inside it are shaded."""
    values = series.to_numpy(dtype=float)
    seen = np.isfinite(values)
    low, high = (float(values[seen].min()), float(values[seen].max())) if seen.any() else (0.0, 1.0)
    room = 0.06 * (high - low) or abs(high) * 0.1 or 1.0
    panel = Panel(_LEFT, place[0], _SERIES, place[1], (-0.5, len(values) - 0.5), (low - room, high + room))
    inside = (np.cumsum(seen) > 0) & (np.cumsum(seen[::-1])[::-1] > 0)
    gaps = [
        panel.points(np.array([a, a, b, b]) - 0.5, np.array([*panel.y_range, *panel.y_range[::-1]]))
        for a, b in runs(~seen & inside)
    ]
    sheet.fills(gaps, WASH)
    if middle is not None:
        sheet.level(panel, middle, 0.6, HAIR)
    pieces = [(a, b) for a, b in runs(seen)]
    sheet.lines([panel.points(np.arange(a, b), values[a:b]) for a, b in pieces if b - a > 1])
    alone = [a for a, b in pieces if b - a == 1]
    if alone:
        sheet.marks(panel.points(np.array(alone), values[alone]), ".", 2.5)
    sheet.side(panel, *value_ticks(*panel.y_range))
    sheet.words(0.01, panel.top + 0.12, title, TITLE)
    return panel


def _mark_shift(sheet: Sheet, panel: Panel, index: pd.Index, at: object) -> None:
    found = int(index.get_indexer(pd.Index([at]))[0])
    if found > 0:
        sheet.upright(panel, found - 0.5, 0.9, INK, DOTTED)
        sheet.words(float(panel.x(found - 0.5)) + 0.04, panel.top - 0.08, "shift", color=FAINT)


def _correlogram(sheet: Sheet, picture: Picture, height: float) -> None:
    nlags = len(picture.correlogram_before)
    wide = WIDTH - _LAGS - 0.1
    panel = Panel(_LAGS, _BOTTOM, wide, height - _BOTTOM - 0.3, (0.3, nlags + 0.7), (-1.0, 1.0))
    lags = np.arange(1, nlags + 1)
    # A series that the plan leaves without any change has no correlogram.
    if picture.correlogram_after is None or len(picture.correlogram_after) != nlags:
        sheet.fills(_bars(panel, lags, picture.correlogram_before, 0.4))
    else:
        sheet.fills(_bars(panel, lags, picture.correlogram_before, 0.84), PALE)
        sheet.fills(_bars(panel, lags, picture.correlogram_after, 0.36))
        _key(sheet, panel)
    sheet.level(panel, 0.0, 0.6, HAIR)
    if np.isfinite(picture.band):
        for side in (-picture.band, picture.band):
            sheet.level(panel, side, 0.7, INK, DASHED)
    ticks = lag_ticks(nlags, picture.period)
    sheet.side(panel, [-1, 0, 1], [f"{words.MINUS}1", "0", "1"])
    sheet.base(panel, ticks, [str(t) for t in ticks])
    sheet.words(panel.left, panel.top + 0.12, "correlogram", TITLE)
    sheet.words(panel.left, 0.06, f"lag in {words.plural(picture.noun)}; dashed: 95 % band", color=FAINT)


def _key(sheet: Sheet, panel: Panel) -> None:
    y = panel.top + 0.12
    for x, wide, color, text in (
        (panel.right - 1.16, 0.11, PALE, "as given"),
        (panel.right - 0.42, 0.05, INK, "after"),
    ):
        sheet.fills([np.array([[x, y], [x, y + 0.09], [x + wide, y + 0.09], [x + wide, y]])], color)
        sheet.words(x + wide + 0.05, y, text)


def _bars(panel: Panel, lags: np.ndarray, heights: np.ndarray, width: float) -> list[np.ndarray]:
    left, right, zero = lags - width / 2, lags + width / 2, np.zeros(len(lags))
    return [
        panel.points(np.array([a, a, b, b]), np.array([z, h, h, z]))
        for a, b, z, h in zip(left, right, zero, heights, strict=True)
        if np.isfinite(h)
    ]
