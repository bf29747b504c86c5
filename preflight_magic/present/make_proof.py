"""What a proof is as plain data of a card."""

from __future__ import annotations

from typing import TYPE_CHECKING

from preflight_magic.present import words
from preflight_magic.present.cards import Change, ProofCard, ProofLine

if TYPE_CHECKING:
    from preflight_magic.present.contract import SeriesView

HOLD_OUT = "hold-out error, mean absolute scaled"


def proof_card(view: SeriesView) -> ProofCard:
    """Forecasts of a series from the past; computed here if they were not yet."""
    proof = view.proof
    rows = tuple(
        ProofLine(
            forecast=words.plain(row.forecast),
            error=float(row.mase),
            ratio=words.number(row.ratio),
            coverage=f"{100 * row.coverage:.0f}{words.NO_BREAK}%" if row.coverage == row.coverage else words.NONE,
            p=words.p_value(row.p_value),
            at_origins=tuple(float(one) for one in proof.by_origin.get(row.forecast, ())),
        )
        for row in proof.rows
    )
    ends = ""
    if proof.origins:
        first, last = words.stamp(proof.origins[0], view.noun), words.stamp(proof.origins[-1], view.noun)
        ends = f"{len(proof.origins)} origins from {first} to {last}, {words.count_of(proof.horizon, view.noun)} ahead"
    problem = None if proof.problem is None else words.sentence(proof.problem)
    return ProofCard(rows, tuple(words.sentence(one) for one in proof.sentences), ends, problem)


def hold_out(recommended: ProofCard, own: ProofCard) -> tuple[Change, ...]:
    """Errors of both plans, where both could be computed."""
    if not recommended.rows or not own.rows:
        return ()
    return (Change(HOLD_OUT, words.number(recommended.rows[0].error), words.number(own.rows[0].error)),)
