"""The strip of roots: modulus against period, the line at one, and the uncertainty of each root."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from preflight_magic.present import words
from preflight_magic.present.figures import WIDTH
from preflight_magic.present.sheet import DOTTED, FAINT, HAIR, INK, TITLE, Panel, Sheet

if TYPE_CHECKING:
    from preflight_magic.present.cards import RootsPicture

HEIGHT = 1.9
_PERIODS = (2, 3, 4, 5, 6, 7, 8, 12, 24, 48, 52, 96, 168, 365, 730, 2000, 5000, 10000)


def roots_strip(picture: RootsPicture) -> bytes:
    """Modulus of each inverse root against its period on a log scale; real positive roots stand apart at the right.

    Filled discs are AR roots, hollow lozenges MA roots; bars are two standard errors to each side.

    Parameters
    ----------
    picture : RootsPicture

    Returns
    -------
    bytes
        PNG of 7.4 by 1.9 inches at 144 dots an inch, background transparent.
    """
    sheet = Sheet(WIDTH, HEIGHT)
    longest = max([8.0, *(r.period for r in picture.roots if math.isfinite(r.period))])
    span = math.log2(longest / 2)
    apart = math.log2(longest) + 0.2 * span
    greatest = max([1.18, *(1.08 * r.modulus for r in picture.roots if math.isfinite(r.modulus))])
    panel = Panel(0.6, 0.42, WIDTH - 0.7, HEIGHT - 0.7, (1 - 0.06 * span, apart + 0.1 * span), (0.0, greatest))
    sheet.upright(panel, apart - 0.1 * span, 0.7, HAIR, DOTTED)
    sheet.level(panel, 1.0, 1.0, INK)
    for part in ("AR", "MA"):
        _draw(sheet, panel, picture, part, apart)
    kept: list[int] = []
    for period in _PERIODS:
        near = bool(kept) and float(panel.x(math.log2(period)) - panel.x(math.log2(kept[-1]))) < 0.26
        if period <= longest * 1.001 and not near:
            kept.append(period)
    sheet.base(panel, [*(math.log2(p) for p in kept), apart], [*(str(p) for p in kept), "no cycle"])
    sheet.side(panel, [0, 0.5, 1], ["0", "0.5", "1"])
    sheet.words(0.01, panel.top + 0.1, "modulus of the inverse roots", TITLE)
    sheet.words(panel.left, 0.06, f"cycle in {words.plural(picture.noun)}", color=FAINT)
    _key(sheet, panel)
    return sheet.png()


def _draw(sheet: Sheet, panel: Panel, picture: RootsPicture, part: str, apart: float) -> None:
    roots = [r for r in picture.roots if r.part == part and math.isfinite(r.modulus)]
    if not roots:
        return
    # A little to the left and to the right, so that AR and MA roots at one place can both be seen.
    nudge = (-0.004 if part == "AR" else 0.004) * (panel.x_range[1] - panel.x_range[0])
    x = np.array([math.log2(r.period) if math.isfinite(r.period) else apart for r in roots]) + nudge
    y = np.array([r.modulus for r in roots])
    spread = 2 * np.array([r.standard_error for r in roots])
    ends = [
        panel.points(a, np.clip([b - c, b + c], 0.0, panel.y_range[1]))
        for a, b, c in zip(x, y, spread, strict=True)
        if math.isfinite(c)
    ]
    sheet.lines(ends, 0.9)
    sheet.marks(panel.points(x, y), "o" if part == "AR" else "D", 5.0 if part == "AR" else 4.4, part == "AR")


def _key(sheet: Sheet, panel: Panel) -> None:
    y = panel.top + 0.1
    for x, marker, text in ((panel.right - 2.75, "o", "AR"), (panel.right - 2.3, "D", "MA")):
        sheet.marks(np.array([[x, y + 0.04]]), marker, 5.0 if marker == "o" else 4.4, marker == "o")
        sheet.words(x + 0.09, y, text)
    sheet.words(panel.right, y, "bars: two standard errors", color=FAINT, across="right")
