"""Making cards of reports: what is shown is chosen and put into words here; nothing is computed again."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Literal, cast

import numpy as np
import pandas as pd

from preflight_magic.model import (
    CheckError,
    Difference,
    Finding,
    HypothesisTest,
    RemovePattern,
    RemoveShift,
    Root,
    Step,
)
from preflight_magic.plan.words import describe
from preflight_magic.present import words
from preflight_magic.present.cards import (
    Card,
    CodeForm,
    HalvesPicture,
    Picture,
    PlanRow,
    RootsPicture,
    RungCard,
    StepMark,
    TestRow,
)
from preflight_magic.present.make_switched import changes
from preflight_magic.present.measures import measure_rows

if TYPE_CHECKING:
    from preflight_magic.present.contract import SeriesView

FORMS = {"pandas": "Code for pandas", "model": "Code for a model, which gets the plan as its arguments"}
"""Forms of the code that are shown, and the words above each."""


# ------------------------------------------------------------------------------------------------ one series
def card(view: SeriesView, recommended: SeriesView | None = None, asked: str = "") -> Card:
    """Card of one series, without its code: that is not needed for the first picture.

    Parameters
    ----------
    view : SeriesView
        With the plan that is shown.
    recommended : SeriesView, optional
        The same series with the recommended plan, to say what changed.
    asked : str
        Season and spans that a person chose, as whole sentences.
    """
    return Card(
        name=view.name,
        verdict=view.verdict,
        answer=words.sentence(view.answer),
        span=span_text(view.series, view.noun),
        problem=None if view.problem is None else words.sentence(view.problem),
        repairs=tuple(StepMark(describe(r), words.meaning(r, view.noun)) for r in view.plan.repairs),
        steps=step_marks(view),
        yours=asked,
        changes=() if recommended is None else changes(view, recommended),
        picture=_picture(view),
        roots=_roots(view),
        halves=_halves(view),
        rungs=_rungs(view, recommended),
        plans=_plans(view),
    )


def span_text(series: pd.Series, noun: str) -> str:
    """Count, first and last stamp and missing values of a series, in words."""
    if not len(series):
        # a record holds no data, but it knows their span
        return str(series.attrs.get("span", "no values"))
    missing = int(series.isna().sum())
    ends = f"{words.stamp(series.index[0], noun)} to {words.stamp(series.index[-1], noun)}"
    return f"{words.count_of(len(series), noun)}, {ends}" + (f", {missing:,} missing" if missing else "")


def step_marks(view: SeriesView) -> tuple[StepMark, ...]:
    """Steps of the plan and of the recommendation, in the order of both, each told from the recommendation."""
    kept, marks = Counter(view.plan.steps), []
    recommended = Counter(view.recommended.steps)
    put_in = kept - recommended
    queue = list(view.plan.steps)
    for step in view.recommended.steps:
        while queue and put_in[queue[0]] and queue[0] != step:
            marks.append(_mark(view, queue.pop(0), "put in"))
        if kept[step]:
            kept[step] -= 1
            queue.remove(step)
            marks.append(_mark(view, step, "kept"))
        else:
            marks.append(_mark(view, step, "left out"))
    return (*marks, *(_mark(view, step, "put in") for step in queue))


def _mark(view: SeriesView, step: Step, state: Literal["kept", "left out", "put in"]) -> StepMark:
    return StepMark(describe(step), words.meaning(step, view.noun), state)


def with_code(made: Card, view: SeriesView) -> Card:
    """The card with the code of its plan in every form."""
    forms = () if view.problem is not None else tuple(_code(view, form, title) for form, title in FORMS.items())
    return replace(made, codes=forms)


def _code(view: SeriesView, form: str, title: str) -> CodeForm:
    try:
        return CodeForm(title, view.code(form))
    except CheckError as error:  # a plan that this form cannot hold
        return CodeForm(title, "", words.sentence(str(error)))
    except Exception as error:  # a fault of the generated code must be seen in the card, not hide the card
        told = f"The code could not be proved, which is a fault of this program: {error}"
        return CodeForm(title, "", words.plain(told))


def _picture(view: SeriesView) -> Picture | None:
    observed = int(view.series.notna().sum())
    if observed < 2:
        return None
    shifts = tuple(step.at for step in view.plan.steps if isinstance(step, RemoveShift))
    changed = bool(view.plan.steps) and len(view.transformed) > 1
    period = _season_of(view)
    nlags = min(max(24, 2 * period + 1), observed // 2, len(view.transformed) - 1)
    if view.problem is not None or nlags < 1:
        empty = np.empty(0)
        return Picture(view.series, None, empty, None, math.nan, period, shifts, view.noun, str(view.plan))
    before, after, band = view.correlograms(nlags)
    return Picture(
        before=view.series,
        after=view.transformed if changed else None,
        correlogram_before=np.asarray(before, dtype=float),
        correlogram_after=np.asarray(after, dtype=float) if changed else None,
        band=float(band),
        period=period,
        shifts=shifts,
        noun=view.noun,
        plan=", ".join(describe(step) for step in view.plan.steps),
    )


def _season_of(view: SeriesView) -> int:
    """Seasonal period for the ticks of a correlogram: of a step, else the shortest of the first rung, else 1."""
    for step in (*view.plan.steps, *view.recommended.steps):
        if isinstance(step, RemovePattern):
            return step.period
        if isinstance(step, Difference) and step.lag > 1:
            return step.lag
    finding = view.findings.get("time index")
    measured = finding.measures.get("season") if finding else None
    first = measured[0] if isinstance(measured, tuple) and measured else measured
    return int(first) if isinstance(first, int | np.integer) and first > 1 else 1


def _roots(view: SeriesView) -> RootsPicture | None:
    finding = view.findings.get("roots")
    if finding is None or not finding.measures.get("order"):
        return None
    roots = cast("tuple[Root, ...]", tuple(cast("Sequence[Root]", finding.measures.get("roots", ()))))
    keys = ("psi_sum", "variance_implied", "variance_sample", "half_life")
    notes = measure_rows({key: finding.measures[key] for key in keys if key in finding.measures}, view.noun)
    return RootsPicture(roots, words.plain(str(finding.measures["order"])), view.noun, tuple(notes))


def _halves(view: SeriesView) -> HalvesPicture | None:
    finding = view.findings.get("halves")
    moments = finding.measures.get("moments", ()) if finding is not None else ()
    if finding is None or not isinstance(moments, tuple) or not moments or len(view.transformed) < 2:
        return None
    told = tuple((str(one.name), float(one.first), float(one.second), float(one.z)) for one in moments)
    return HalvesPicture(view.transformed, finding.measures.get("second_from"), told, view.noun)


def _rungs(view: SeriesView, recommended: SeriesView | None) -> tuple[RungCard, ...]:
    earlier = {} if recommended is None else recommended.findings
    return tuple(
        _rung(position, finding, view, earlier.get(name))
        for position, (name, finding) in enumerate(view.findings.items(), start=1)
    )


def _rung(position: int, finding: Finding, view: SeriesView, earlier: Finding | None) -> RungCard:
    method, sources = view.methods.get(finding.rung, ("", ()))
    before = None
    if earlier is not None and (earlier.verdict, earlier.headline) != (finding.verdict, finding.headline):
        before = words.plain(f"{words.verdict_text(earlier.verdict)}: {earlier.headline}")
    return RungCard(
        position=position,
        rung=finding.rung,
        question=words.plain(finding.question),
        verdict=finding.verdict,
        headline=words.sentence(finding.headline),
        reason=words.sentence(finding.reason),
        steps=tuple(describe(step) for step in finding.steps),
        tests=tuple(_test(test) for test in finding.tests),
        measures=tuple(measure_rows(finding.measures, view.noun)),
        method=words.plain(method),
        sources=tuple(words.plain(source) for source in sources),
        before=before,
    )


def _test(test: HypothesisTest) -> TestRow:
    return TestRow(
        series=words.test_series(test),
        test=words.plain(test.test),
        null=words.plain(test.null),
        statistic=words.number(test.statistic),
        p=words.p_value(test.p_value, test.p_bound),
        details=words.test_details(test),
    )


def _plans(view: SeriesView) -> tuple[PlanRow, ...]:
    ordered = sorted(view.alternatives, key=lambda item: item[1])
    return tuple(
        PlanRow(words.plain(text), words.odds(below), below, tuple(steps) == tuple(view.plan.steps))
        for text, below, steps in ordered
    )
