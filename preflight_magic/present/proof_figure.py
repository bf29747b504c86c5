"""Errors of forecasts from past origins: one row a forecast, one tick an origin."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from preflight_magic.present.figures import WIDTH, cut
from preflight_magic.present.sheet import DOTTED, FAINT, HAIR, PALE, TITLE, Panel, Sheet
from preflight_magic.present.ticks import value_ticks

if TYPE_CHECKING:
    from preflight_magic.present.cards import ProofCard

MOST = 10
"""Forecasts that are drawn; the table holds all."""
_ROW = 0.22
_LABELS = 3.1


def errors_strip(proof: ProofCard) -> bytes:
    """Mean absolute scaled error of each forecast, at each origin and over all of them.

    Parameters
    ----------
    proof : ProofCard

    Returns
    -------
    bytes
        PNG 7.4 inches wide at 144 dots an inch, background transparent.
    """
    rows = proof.rows[:MOST]
    sheet = Sheet(WIDTH, 0.82 + _ROW * len(rows))
    seen = np.concatenate([np.asarray([row.error, *row.at_origins]) for row in rows])
    seen = seen[np.isfinite(seen)]
    most = 1.05 * float(seen.max()) if len(seen) and seen.max() > 0 else 1.0
    panel = Panel(_LABELS, 0.42, WIDTH - _LABELS - 0.3, _ROW * len(rows), (0.0, most), (-0.5, len(rows) - 0.5))
    if np.isfinite(rows[0].error):
        sheet.upright(panel, rows[0].error, 0.8, HAIR, DOTTED)
    for place, row in enumerate(rows):
        level = len(rows) - 1 - place
        errors = np.asarray(row.at_origins)
        errors = errors[np.isfinite(errors)]
        sheet.words(panel.left - 0.14, float(panel.y(level)) - 0.04, cut(row.forecast, 44), across="right")
        ticks = [panel.points(one, np.array([level - 0.24, level + 0.24])) for one in errors]
        sheet.lines(ticks, 1.2, PALE)
        if np.isfinite(row.error):
            sheet.marks(panel.points(row.error, level), "s", 5.0, filled=place == 0)
    sheet.base(panel, *value_ticks(0.0, most))
    sheet.words(0.01, panel.top + 0.14, "mean absolute scaled error of forecasts from the past", TITLE)
    sheet.words(panel.left, 0.06, "squares: mean; ticks: one origin each; dotted: the plan", color=FAINT)
    return sheet.png()
