"""What a person wants of a series: other steps, another season, spans left out. Plain state, without widgets."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from preflight_magic.model import (
    Difference,
    Log,
    Logit,
    PerDay,
    Power,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Step,
)
from preflight_magic.plan.order import canonical

if TYPE_CHECKING:
    from preflight_magic.present.contract import SeriesView

Span = tuple[str | int, str | int]
BENDS = Log | Power | Logit


@dataclass(frozen=True)
class Wish:
    """A season (None: as checked), spans left out besides those of the check, and steps (None: as recommended)."""

    season: tuple[int, ...] | None = None
    spans: tuple[Span, ...] = ()
    steps: tuple[Step, ...] | None = None


def read_anew(origin: SeriesView, wish: Wish) -> SeriesView:
    """The series with the season and without the spans of a wish, with the plan that is recommended then."""
    view = origin
    for start, end in wish.spans:
        view = view.without_span(start, end)
    return view if wish.season is None else view.with_season(wish.season)


def examine(base: SeriesView, wish: Wish) -> SeriesView:
    """The series as `read_anew` gives it, with the steps of the wish."""
    if wish.steps is None or wish.steps == tuple(base.plan.steps):
        return base
    return base.with_plan(wish.steps)


def with_turned(steps: Sequence[Step], step: Step, on: bool) -> tuple[Step, ...]:
    """Steps with one more or one less; of log, power and logit the one put in last stays."""
    kept = list(steps)
    if not on:
        kept.remove(step)
        return tuple(kept)
    if isinstance(step, BENDS):
        kept = [one for one in kept if not isinstance(one, BENDS)]
    return canonical([*kept, step])


def could_put_in(view: SeriesView, offered: Sequence[Step]) -> tuple[Step, ...]:
    """Steps that make sense for a series, besides those that are offered already.

    Parameters
    ----------
    view : SeriesView
    offered : sequence of Step
        An ordinary difference may stand twice, all others once.
    """
    values = view.series.to_numpy(dtype=float)
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    seasons = [period for period in view.season if period > 1]
    sensible: list[Step] = [PerDay("days"), PerDay("workdays")] if view.noun in ("month", "quarter") else []
    if low > 0:
        sensible.append(Log())
        sensible += _power(view)
        sensible += [Logit()] if high < 1 else []
    sensible += [Difference(period) for period in seasons] + [Difference(1), Difference(1)]
    sensible.append(RemoveTrend())
    dated = {step: None for *_, steps in view.alternatives for step in steps if isinstance(step, RemoveShift)}
    sensible += [*dated, *(RemovePattern(period) for period in seasons)]
    left = Counter(sensible) - Counter(offered)
    return tuple(step for step in dict.fromkeys(sensible) if left[step])


def _power(view: SeriesView) -> list[Step]:
    """The power that the likelihood of Box and Cox prefers, where it is neither a log nor nothing."""
    finding = view.findings.get("spread")
    exponent = finding.measures.get("box_cox") if finding else None
    if not isinstance(exponent, float) or not np.isfinite(exponent):
        return []
    rounded = round(exponent, 1)
    return [Power(rounded)] if rounded not in (0.0, 1.0) and abs(rounded) <= 2 else []


# ---------------------------------------------------------------------------------------------- what is typed
def read_season(text: str) -> tuple[int, ...]:
    """Seasonal periods as a person types them: ``12``, ``24, 168``; 1 for none."""
    pieces = [piece for piece in re.split(r"[\s,;]+", text.strip()) if piece]
    if not pieces or not all(re.fullmatch(r"[0-9]{1,6}", piece) for piece in pieces):
        raise ValueError(f"'{text}' is no season; write the observations per cycle, such as 12, or 1 for none.")
    return tuple(sorted({int(piece) for piece in pieces}))


def read_span(text: str, index: pd.Index) -> Span:
    """First and last stamp as a person types them: ``2020-03..2020-06``, or one stamp."""
    ends = [end.strip() for end in re.split(r"\.\.+|\u2026|\bto\b", text)]
    if len(ends) > 2 or not all(ends):
        raise ValueError(f"'{text}' is no span; write its first and last stamp, such as {span_example(index)}.")
    start, end = ends[0], ends[-1]
    if pd.api.types.is_integer_dtype(index.dtype):
        if not all(re.fullmatch(r"-?[0-9]+", one) for one in (start, end)):
            raise ValueError(f"'{text}' is no span; the rows are numbered, so write {span_example(index)}.")
        return int(start), int(end)
    return start, end


def span_example(index: pd.Index) -> str:
    """A span of the series, written as its index writes stamps."""
    places = (len(index) // 2, min(len(index) // 2 + 2, len(index) - 1))
    start, end = (_typed(index[place]) for place in places)
    return f"{start}..{end}"


def _typed(label: object) -> str:
    if isinstance(label, pd.Period):
        return f"{label.start_time:%Y-%m-%d}" if label.freqstr.startswith("W") else str(label)
    if isinstance(label, pd.Timestamp):
        midnight = label == label.normalize()
        return f"{label:%Y-%m-%d}" if midnight else f"{label:%Y-%m-%d %H:%M}"
    return str(label)
