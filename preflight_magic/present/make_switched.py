"""What a person's choice changed, against the recommendation."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from preflight_magic.present import words
from preflight_magic.present.cards import Change

if TYPE_CHECKING:
    from preflight_magic.present.contract import SeriesView

LAGS = 24


def changes(view: SeriesView, recommended: SeriesView) -> tuple[Change, ...]:
    """Verdicts that moved, and what the transformed series and the residuals of both plans are like.

    Parameters
    ----------
    view : SeriesView
        As the person wants it.
    recommended : SeriesView
        As it was recommended.
    """
    pairs = [
        ("plan", str(recommended.plan), str(view.plan)),
        ("odds of the best plan against it", _odds(recommended), _odds(view)),
        ("lags of the correlogram outside the band", _outside(recommended), _outside(view)),
        ("correlation left in the residuals, smallest p-value of Ljung-Box", _left(recommended), _left(view)),
    ]
    made = [Change(what, words.plain(before), words.plain(after)) for what, before, after in pairs if before != after]
    for name, finding in view.findings.items():
        earlier = recommended.findings.get(name)
        if earlier is not None and earlier.verdict != finding.verdict:
            told = (f"{words.verdict_text(one.verdict)}: {one.headline}" for one in (earlier, finding))
            made.append(Change(f"verdict on {name}", *(words.plain(text) for text in told)))
    return tuple(made)


def _odds(view: SeriesView) -> str:
    found = [below for _, below, steps in view.alternatives if tuple(steps) == tuple(view.plan.steps)]
    return words.odds(found[0]) if found else "not compared"


def _outside(view: SeriesView) -> str:
    nlags = min(LAGS, len(view.transformed) // 2)
    if nlags < 1:
        return words.NONE
    _, after, band = view.correlograms(nlags)
    return f"{int(np.sum(np.abs(after) > band))} of {len(after)}"


def _left(view: SeriesView) -> str:
    finding = view.findings.get("residuals")
    found = [test.p_value for test in finding.tests if test.test == "Ljung-Box"] if finding else []
    return words.p_value(min(found)) if found else words.NONE
