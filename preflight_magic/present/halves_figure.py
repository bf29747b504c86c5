"""The two halves of the transformed series side by side, and how far their moments lie apart."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from preflight_magic.present.figures import WIDTH, cut
from preflight_magic.present.sheet import DASHED, DOTTED, FAINT, HAIR, INK, PALE, TITLE, Panel, Sheet
from preflight_magic.present.ticks import time_ticks, value_ticks

if TYPE_CHECKING:
    from preflight_magic.present.cards import HalvesPicture

HEIGHT = 2.0
_REACH = 4.0
"""Largest z-value that is drawn to scale."""


def halves_picture(picture: HalvesPicture) -> bytes:
    """Left the transformed series, with mean and standard deviation of each half; right z of each difference.

    Parameters
    ----------
    picture : HalvesPicture

    Returns
    -------
    bytes
        PNG of 7.4 by 2 inches at 144 dots an inch, background transparent.
    """
    sheet = Sheet(WIDTH, HEIGHT)
    _series(sheet, picture)
    _distances(sheet, picture)
    return sheet.png()


def _series(sheet: Sheet, picture: HalvesPicture) -> None:
    values = picture.after.to_numpy(dtype=float)
    room = 0.06 * float(np.ptp(values)) or 1.0
    around = (float(values.min()) - room, float(values.max()) + room)
    panel = Panel(0.6, 0.42, 3.7, HEIGHT - 0.72, (-0.5, len(values) - 0.5), around)
    middle = len(values) // 2
    sheet.lines([panel.points(np.arange(len(values)), values)], 0.8, PALE)
    for start, stop in ((0, middle), (middle, len(values))):
        mean, spread = float(values[start:stop].mean()), float(values[start:stop].std())
        ends = np.array([start - 0.5, stop - 0.5])
        sheet.lines([panel.points(ends, mean)], 1.6)
        sheet.lines([panel.points(ends, mean + side * spread) for side in (-1, 1)], 1.0, INK, DASHED)
    sheet.upright(panel, middle - 0.5, 0.8, INK, DOTTED)
    sheet.side(panel, *value_ticks(*panel.y_range))
    sheet.base(panel, *time_ticks(picture.after.index))
    sheet.words(0.01, panel.top + 0.12, "after the plan, in halves", TITLE)
    sheet.words(panel.right, panel.top + 0.12, "mean; dashed: one standard deviation", color=FAINT, across="right")


def _distances(sheet: Sheet, picture: HalvesPicture) -> None:
    count = len(picture.moments)
    panel = Panel(5.75, 0.42, WIDTH - 5.75 - 0.2, HEIGHT - 0.72, (-_REACH, _REACH), (-0.5, count - 0.5))
    sheet.upright(panel, 0.0, 0.6, HAIR)
    for side in (-2.0, 2.0):
        sheet.upright(panel, side, 0.7, INK, DASHED)
    for place, (name, _, _, z) in enumerate(picture.moments):
        level = count - 1 - place
        y = float(panel.y(level))
        sheet.words(panel.left - 0.1, y - 0.04, cut(name.replace("autocovariance at", "autocov.,"), 22), across="right")
        if np.isfinite(z):
            sheet.marks(panel.points(float(np.clip(z, -_REACH, _REACH)), level), "o", 5.0)
    sheet.base(panel, [-4, -2, 0, 2, 4], ["\u22124", "\u22122", "0", "2", "4"])
    sheet.words(4.55, panel.top + 0.12, "second half less first", TITLE)
    sheet.words(panel.left, 0.06, "standard errors; dashed: two", color=FAINT)
