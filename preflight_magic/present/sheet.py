"""A sheet to draw on: black ink on nothing, measured in inches.

Matplotlib's axes cost most of the time of a small picture; lines, bars and words placed by hand cost a third.
"""

from __future__ import annotations

import io
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.figure import Figure

DPI = 144
INK = "black"
FAINT = "0.4"
HAIR = "0.55"
PALE = "0.6"
WASH = "0.84"
WORDS = 8.0
TITLE = 9.0
"""Sizes of words in points."""

DASHED = (0.0, (4.0, 3.0))
DOTTED = (0.0, (1.0, 2.0))


@dataclass(frozen=True)
class Panel:
    """A rectangle of a sheet (inches) and the values at its edges."""

    left: float
    bottom: float
    width: float
    height: float
    x_range: tuple[float, float] = (0.0, 1.0)
    y_range: tuple[float, float] = (0.0, 1.0)

    @property
    def right(self) -> float:
        """Right edge in inches."""
        return self.left + self.width

    @property
    def top(self) -> float:
        """Upper edge in inches."""
        return self.bottom + self.height

    def x(self, values: float | np.ndarray) -> np.ndarray:
        """Inches from the left of the sheet."""
        low, high = self.x_range
        return np.asarray(self.left + (np.asarray(values, dtype=float) - low) / (high - low) * self.width)

    def y(self, values: float | np.ndarray) -> np.ndarray:
        """Inches from the bottom of the sheet."""
        low, high = self.y_range
        return np.asarray(self.bottom + (np.asarray(values, dtype=float) - low) / (high - low) * self.height)

    def points(self, x: float | np.ndarray, y: float | np.ndarray) -> np.ndarray:
        """Places on the sheet, shape (n, 2)."""
        across, up = np.broadcast_arrays(self.x(x), self.y(y))
        return np.column_stack([across.ravel(), up.ravel()])


class Sheet:
    """A figure without axes; what is put on it first lies beneath."""

    def __init__(self, width: float, height: float) -> None:
        from matplotlib.figure import Figure

        self.figure: Figure = Figure(figsize=(width, height), dpi=DPI)
        self.figure.patch.set_visible(False)
        self._layer = 1.0

    def _add(self, artist: Artist) -> None:
        self._layer += 1
        artist.set_zorder(self._layer)
        # A person's own settings of matplotlib (hand-drawn lines, TeX, fonts) are for their pictures.
        artist.set_sketch_params(None)
        artist.set_path_effects([])
        self.figure.add_artist(artist)

    def lines(
        self,
        lines: Sequence[np.ndarray],
        width: float = 0.9,
        color: str = INK,
        dash: tuple[float, tuple[float, ...]] | None = None,
    ) -> None:
        """Lines through places of shape (n, 2) each, in inches."""
        from matplotlib.collections import LineCollection

        style = "solid" if dash is None else dash
        scale = self.figure.dpi_scale_trans
        self._add(
            LineCollection(
                list(lines), linewidths=width, colors=color, linestyles=style, transform=scale, joinstyle="round"
            )
        )

    def fills(self, shapes: Sequence[np.ndarray], color: str = INK) -> None:
        """Filled shapes with corners of shape (n, 2) each, in inches."""
        from matplotlib.collections import PolyCollection

        self._add(PolyCollection(list(shapes), facecolors=color, linewidths=0, transform=self.figure.dpi_scale_trans))

    def marks(self, places: np.ndarray, marker: str, size: float, filled: bool = True) -> None:
        """Marks of `size` points at places of shape (n, 2), in inches; hollow ones hide what lies beneath."""
        from matplotlib.lines import Line2D

        face = INK if filled else "white"
        self._add(
            Line2D(
                places[:, 0], places[:, 1], linestyle="", marker=marker, markersize=size, markerfacecolor=face,
                markeredgecolor=INK, markeredgewidth=0.9, transform=self.figure.dpi_scale_trans,
            )
        )  # fmt: skip

    def words(
        self,
        x: float,
        y: float,
        text: str,
        size: float = WORDS,
        color: str = INK,
        across: Literal["left", "center", "right"] = "left",
    ) -> None:
        """Words on the base line `y`, set from, around or up to `x` (inches)."""
        from matplotlib.text import Text

        self._add(
            Text(
                x, y, text, fontsize=size, color=color, horizontalalignment=across, verticalalignment="baseline",
                transform=self.figure.dpi_scale_trans, parse_math=False, usetex=False, fontfamily="DejaVu Sans",
            )
        )  # fmt: skip

    def base(self, panel: Panel, ticks: Sequence[float], labels: Sequence[str] | None) -> None:
        """Lower edge of a panel with ticks; labels below, kept within the panel."""
        edge = [np.array([[panel.left, panel.bottom], [panel.right, panel.bottom]])]
        places = [float(p) for p in panel.x(np.asarray(ticks, dtype=float))]
        self.lines([*edge, *(np.array([[p, panel.bottom], [p, panel.bottom - 0.035]]) for p in places)], 0.6, HAIR)
        for place, label in zip(places, labels or [], strict=False):
            half = 0.031 * len(label)
            inside = min(max(place, panel.left + half - 0.1), panel.right - half + 0.06)
            self.words(inside, panel.bottom - 0.155, label, across="center")

    def side(self, panel: Panel, ticks: Sequence[float], labels: Sequence[str]) -> None:
        """Ticks and labels at the left of a panel."""
        places = [float(p) for p in panel.y(np.asarray(ticks, dtype=float))]
        self.lines([np.array([[panel.left - 0.035, p], [panel.left, p]]) for p in places], 0.6, HAIR)
        for place, label in zip(places, labels, strict=True):
            self.words(panel.left - 0.06, place - 0.04, label, across="right")

    def level(
        self, panel: Panel, value: float, width: float, color: str, dash: tuple[float, tuple[float, ...]] | None = None
    ) -> None:
        """Line across a panel at a value."""
        self.lines([panel.points(np.array(panel.x_range), value)], width, color, dash)

    def upright(
        self, panel: Panel, value: float, width: float, color: str, dash: tuple[float, tuple[float, ...]] | None = None
    ) -> None:
        """Line from the lower to the upper edge of a panel."""
        self.lines([panel.points(value, np.array(panel.y_range))], width, color, dash)

    def dots(self) -> np.ndarray:
        """What was drawn, shape (height, width, 4) of bytes."""
        from matplotlib.backends.backend_agg import FigureCanvasAgg

        canvas: Any = FigureCanvasAgg(self.figure)
        canvas.draw()
        return np.asarray(canvas.buffer_rgba())

    def png(self) -> bytes:
        """What was drawn as PNG with a transparent background."""
        return encode(self.dots())


_LEVELS = 16
"""Levels of grey and of opacity that are kept: an eye sees no more at the edge of a line, and a picture is a third
smaller."""


def encode(dots: np.ndarray) -> bytes:
    """PNG of dots of shape (height, width, 4); ink without colour needs only its grey and its opacity."""
    from PIL import Image

    step = 255 // (_LEVELS - 1)
    ink = (dots[..., [0, 3]].astype(np.uint16) + step // 2) // step * step
    buffer = io.BytesIO()
    Image.fromarray(np.ascontiguousarray(ink.astype(np.uint8))).save(buffer, "png", compress_level=6)
    return buffer.getvalue()


def runs(mask: np.ndarray) -> list[tuple[int, int]]:
    """Start and stop of each run of true values."""
    edges = np.flatnonzero(np.diff(np.r_[False, mask, False].astype(np.int8)))
    return [(int(a), int(b)) for a, b in zip(edges[::2], edges[1::2], strict=True)]
