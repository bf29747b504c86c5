"""A proof in rows and sentences."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.forecast_comparison import diebold_mariano
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.words import describe
from preflight_magic.proof_result import ProofRow

if TYPE_CHECKING:
    from preflight_magic.proof import Scored

Floats = NDArray[np.float64]

ENOUGH_ORIGINS = 8
"""Origins from which a test is computed. Common practice: with fewer it hardly ever rejects."""
ALIKE = 0.02
"""Relative difference of errors up to which they are called alike. Common practice."""
CAUTION = "choosing a plan by a few past errors does no better than a rule of thumb"


def rows_and_sentences(
    scored: Mapping[str, Sequence[Scored | None]], cuts: Sequence[int], horizon: int, plan: Plan
) -> tuple[tuple[ProofRow, ...], tuple[str, ...], dict[str, tuple[float, ...]]]:
    """Sum up the errors of every forecast.

    Parameters
    ----------
    scored : Mapping from forecast to errors at each origin
        The plan first; None where a forecast could not be computed.
    cuts : sequence of int
        Lengths of the training parts.
    horizon : int
    plan : Plan

    Returns
    -------
    rows : tuple of ProofRow
    sentences : tuple of str
    by_origin : dict from forecast to mean absolute scaled errors
    """
    errors = {label: _by_origin(each) for label, each in scored.items()}
    stride = int(np.diff(cuts).min()) if len(cuts) > 1 else horizon
    overlap = -(-horizon // stride)
    base = errors["the plan"]
    rows = [_row(label, each, errors[label], base, overlap) for label, each in scored.items()]
    told = {row.forecast: row for row in rows}
    sentences = [_step_sentence(describe(step), told) for step in plan.steps]
    sentences += [_other_sentence(row) for row in rows if row.forecast.startswith(("no plan", "runner-up"))]
    sentences.append(_naive_sentence([row for row in rows if row.forecast.endswith("naive")]))
    by_origin = {label: tuple(values.tolist()) for label, values in errors.items()}
    return tuple(rows), tuple(sentences), by_origin


def _by_origin(each: Sequence[Scored | None]) -> Floats:
    means = [float("nan") if one is None else _mean(one.absolute) for one in each]
    return np.array(means, dtype=float)


def _mean(values: Floats) -> float:
    seen = values[np.isfinite(values)]
    return float(seen.mean()) if seen.size else float("nan")


def _row(label: str, each: Sequence[Scored | None], errors: Floats, base: Floats, overlap: int) -> ProofRow:
    done = [one for one in each if one is not None]
    both = np.isfinite(errors) & np.isfinite(base)
    ratio = p_value = float("nan")
    if both.any() and base[both].mean() > 0.0:
        ratio = float(errors[both].mean() / base[both].mean())
    if both.sum() >= max(ENOUGH_ORIGINS, 2 * overlap + 2) and label != "the plan":
        found = diebold_mariano(errors[both], base[both], overlap)
        p_value = found.p_value if found is not None else p_value
    squares = np.concatenate([one.squared for one in done]) if done else np.empty(0)
    inside = np.concatenate([one.inside for one in done]) if done else np.empty(0)
    return ProofRow(label, _mean(errors), float(np.sqrt(_mean(squares))), _mean(inside), ratio, p_value, len(done))


def _step_sentence(step: str, told: Mapping[str, ProofRow]) -> str:
    row = told[f"without {step}"]
    start = f"Without '{step}'"
    if not np.isfinite(row.ratio):
        return f"{start} no forecast could be computed."
    size = f"the error {_change(row.ratio)}{_evidence(row)}"
    if row.ratio > 1.0 + ALIKE:
        return f"{start} {size}: the step pays here{_doubt(row)}."
    verdict = "the step does not pay here" if row.ratio < 1.0 - ALIKE else "the step makes no difference here"
    return f"{start} {size}: {verdict}. That alone is no reason to leave it out; {CAUTION}."


def _other_sentence(row: ProofRow) -> str:
    name = "With no plan" if row.forecast == "no plan" else f"With the {row.forecast.replace(': ', ' (')})"
    if not np.isfinite(row.ratio):
        return f"{name} no forecast could be computed."
    return f"{name} the error {_change(row.ratio)}{_evidence(row)}."


def _naive_sentence(rows: Sequence[ProofRow]) -> str:
    parts = [f"{row.forecast} {_change(row.ratio)}" for row in rows if np.isfinite(row.ratio)]
    if not parts:
        return "The naive forecasts could not be computed."
    worse = any(row.ratio < 1.0 - ALIKE for row in rows)
    text = f"Beside the plan, the error of {' and that of '.join(parts)}"
    return f"{text}; a plan that does no better than repeating values deserves doubt." if worse else f"{text}."


def _doubt(row: ProofRow) -> str:
    """End of a sentence where the test does not reject at 5 %, or there is none."""
    return "" if row.p_value < 0.05 else f", though {row.origins} origins prove little"


def _change(ratio: float) -> str:
    if abs(ratio - 1.0) <= ALIKE:
        return "is the same within 2 %"
    if ratio > 2.0:
        return f"is {ratio:.1f} times as large"
    return f"is {abs(ratio - 1.0):.0%} {'larger' if ratio > 1.0 else 'smaller'}".replace("%", " %")


def _evidence(row: ProofRow) -> str:
    p = "" if not np.isfinite(row.p_value) else ", p < 0.001" if row.p_value < 0.001 else f", p = {row.p_value:.3f}"
    return f" ({row.origins} origins{p})"
