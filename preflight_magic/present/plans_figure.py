"""How clear the decision was: the odds against each plan that was compared, on one scale."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from preflight_magic.present.figures import WIDTH, cut
from preflight_magic.present.sheet import DOTTED, FAINT, HAIR, TITLE, Panel, Sheet

if TYPE_CHECKING:
    from preflight_magic.present.cards import PlanRow

MOST = 8
"""Plans that are drawn; the table below holds all."""
SCALE = ((3.0, "3 to 1"), (20.0, "20 to 1"), (150.0, "150 to 1"))
"""Odds at which evidence is called positive, strong and very strong: Kass and Raftery (1995), from twice the log."""
_END = math.log(1500.0)
_ROW = 0.21
_LABELS = 3.1


def plans_strip(rows: Sequence[PlanRow]) -> bytes:
    """Odds of the best plan against each other, on a log scale from even odds at the left.

    Parameters
    ----------
    rows : sequence of PlanRow
        The best first.

    Returns
    -------
    bytes
        PNG 7.4 inches wide at 144 dots an inch, background transparent.
    """
    rows = rows[:MOST]
    height = 0.82 + _ROW * len(rows)
    sheet = Sheet(WIDTH, height)
    panel = Panel(_LABELS, 0.42, WIDTH - _LABELS - 0.3, _ROW * len(rows), (0.0, _END), (-0.5, len(rows) - 0.5))
    for odds, _ in SCALE:
        sheet.upright(panel, math.log(odds), 0.7, HAIR, DOTTED)
    for place, row in enumerate(rows):
        level = len(rows) - 1 - place
        below = min(row.below, _END)
        x, y = (float(found[0]) for found in (panel.points(below, level)[:, 0], panel.points(below, level)[:, 1]))
        sheet.words(panel.left - 0.14, y - 0.04, cut(row.text, 44), across="right")
        sheet.lines([np.array([[panel.left, y], [x, y]])], 1.6)
        sheet.marks(np.array([[x, y]]), "s", 5.0, filled=row.shown)
    sheet.lines([panel.points(0.0, np.array(panel.y_range))], 0.6, HAIR)
    places = [0.0, *(math.log(odds) for odds, _ in SCALE), math.log(1000)]
    sheet.base(panel, places, ["even", *(text for _, text in SCALE), "1,000 to 1"])
    sheet.words(0.01, panel.top + 0.14, "odds of the best plan against each", TITLE)
    sheet.words(panel.left, 0.06, "filled: the plan that is shown", color=FAINT)
    return sheet.png()
