"""What roots say of the plan that was taken, in words: the judgement of the rung "roots"."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import cast

import numpy as np

from preflight_magic.kernels.arma_roots import CommonFactor
from preflight_magic.model import Evidence, Judgement, Root
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.shares import per_cent

MA_AT_ONE = 0.5
"""Log likelihood by which an MA root must differ from one to be told from it: half of 1.0, the 10% point of the
likelihood ratio (Davis, Chen and Dunsmuir 1995), confirmed by simulation."""
CYCLE_AT_ONE = 0.98
"""Modulus from which a cycle hardly fades. Common practice."""
VARIANCE_FACTOR = 2.0
"""Ratio from which the variance implied and that of the sample disagree. Common practice."""
MA_FAR = 2.2
"""The same at the 1% point, beyond which an MA root is not at one whatever else is known."""


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Notes on the plan from the roots; no steps."""
    if evidence.problem is not None:
        return Judgement("inconclusive", "not examined", evidence.problem[:1].upper() + evidence.problem[1:])
    found = evidence.measures
    roots = cast("tuple[Root, ...]", found["roots"])
    doubts = [*_ar_notes(found, roots, thresholds), *_ma_notes(found, roots, thresholds)]
    remarks = _remarks(found)
    if doubts:
        headline = doubts[0][0]
    elif remarks:
        headline = remarks[0][0]
    else:
        headline = _all_well(found, roots)
    reason = " ".join(text for _, text in (*doubts, *remarks)) or _reason(found, roots)
    return Judgement("inconclusive" if doubts else "clear", headline, reason)


Note = tuple[str, str]
"""Headline and sentence."""


def _ar_notes(found: Mapping[str, object], roots: tuple[Root, ...], thresholds: Thresholds) -> list[Note]:
    """What AR roots near one say about the differences taken; those that an MA root may cancel say nothing."""
    cancelled = [factor.ar for factor in cast("tuple[CommonFactor, ...]", found["common_factors"])]
    notes: list[Note] = []
    for root in (root for root in roots if root.part == "AR" and root not in cancelled):
        size = _per_season(root, found)
        near = size.modulus >= thresholds.near_unit_modulus or size.modulus + size.standard_error >= 1.0
        if root.seasonal and near and root.period == found["season"] and _likely(found, "share_wandering", thresholds):
            head = "the season may wander" if not found["seasonal_difference"] else "the season still wanders"
            text = f"The seasonal AR root is {_told(size)}, so {head}: "
            notes.append((head, text + f"a difference at lag {found['season']} may be needed."))
        elif not root.seasonal and near and np.isinf(root.period) and _likely(found, "share_more", thresholds):
            text = f"The largest AR root is {_told(size)}, hardly to be told from one: a shock {_lasting(found)}, "
            head = "one more difference may be needed"
            notes.append((f"near-unit root: {head}", f"{text}and {head}."))
        elif not root.seasonal and np.isfinite(root.period) and root.modulus >= CYCLE_AT_ONE:
            text = f"A cycle of {root.period:.3g} steps has an AR root of {_told(size)} and hardly fades: "
            notes.append(("a cycle that hardly fades", text + "a season of that length may have been missed."))
    return notes[:2]


def _likely(found: Mapping[str, object], share: str, thresholds: Thresholds) -> bool:
    """Whether the comparison of plans does not contradict a root: its plan has more than a negligible share."""
    return cast(float, found.get(share, 1.0)) >= thresholds.contradicted_share


def _at_one(found: Mapping[str, object], root: str, share: str, thresholds: Thresholds) -> bool:
    """Whether an MA root is at one: by itself where the comparison of plans allows it, or less so where it says so."""
    fall, evidence = cast(float, found[root]), cast(float, found.get(share, float("nan")))
    if evidence >= thresholds.even_share:
        return fall < MA_FAR
    return fall < MA_AT_ONE and not evidence < thresholds.contradicted_share


def _ma_notes(found: Mapping[str, object], roots: tuple[Root, ...], thresholds: Thresholds) -> list[Note]:
    """What MA roots at one, where a model is not invertible, say about the differences taken."""
    notes: list[Note] = []
    plain, seasonal = (cast(float, found[key]) for key in ("ma_at_one", "seasonal_ma_at_one"))
    largest = [root for root in roots if root.part == "MA" and not root.seasonal and np.isinf(root.period)]
    size = f"is {_told(largest[0])}, and holding it at one" if largest else "may be one: holding it there"
    text = f"The largest MA root {size} costs only {max(plain, 0.0):.2f} of log likelihood; "
    if found["differences"] or found["seasonal_difference"]:
        if _at_one(found, "ma_at_one", "share_less", thresholds):
            text += "one difference too many leaves such a root, so the plan with one less is worth a look."
            notes.append(("over-differenced: one difference too many", text))
    # Without differences no plan has one less, so the series is summed up and asked again.
    elif plain < MA_FAR and cast(float, found.get("share_summed", 1.0)) >= thresholds.even_share:
        text += "no difference was taken, so the series may already have been differenced, or be a change itself"
        if "share_summed" in found:
            text += f": {per_cent(cast(float, found['share_summed']))} of the evidence says that its sums need none"
        notes.append(("over-differenced: it may already have been differenced", f"{text}."))
    sized = [_per_season(root, found) for root in roots if root.part == "MA" and root.seasonal]
    if sized and found["seasonal_difference"] and _at_one(found, "seasonal_ma_at_one", "share_fixed", thresholds):
        text = (
            f"The seasonal MA root is {_told(sized[0])}, and holding it at one costs only {max(seasonal, 0.0):.2f} of "
        )
        text += (
            "log likelihood; differencing a fixed pattern leaves such a root, so removing the pattern may do better."
        )
        notes.append(("a fixed pattern was differenced", text))
    return notes


def _remarks(found: Mapping[str, object]) -> list[Note]:
    """What leaves the plan alone but not the model."""
    notes: list[Note] = []
    if np.isinf(cast(float, found["psi_sum"])):
        text = "The psi weights have no finite sum: the model is not stationary, and implies no variance."
        notes.append(("not stationary", text))
    for one in cast("tuple[CommonFactor, ...]", found["common_factors"])[:1]:
        within = "" if np.isnan(one.standard_error) else f", {one.distance / one.standard_error:.1f} standard errors"
        text = (
            f"An AR root of modulus {one.ar.modulus:.2f} and an MA root of {one.ma.modulus:.2f} lie {one.distance:.2f} "
        )
        text += f"apart{within}: they may cancel, so one AR and one MA term less may do."
        notes.append(("the order may be too high", text))
    implied, sample = cast(float, found["variance_implied"]), cast(float, found["variance_sample"])
    ratio = implied / sample
    if np.isfinite(ratio) and not 1.0 / VARIANCE_FACTOR <= ratio <= VARIANCE_FACTOR:
        text = f"The model implies a variance of {implied:.3g}, where the sample has {sample:.3g}: "
        text += (
            "with roots near one a sample shows only part of it."
            if ratio > 1.0
            else "it does not describe all that varies."
        )
        notes.append(("model and sample differ in variance", text))
    return notes


def _all_well(found: Mapping[str, object], roots: tuple[Root, ...]) -> str:
    if not roots:
        return "white noise"
    plain = [root.modulus for root in roots if root.part == "AR" and not root.seasonal]
    seasonal = [_per_season(root, found).modulus for root in roots if root.part == "AR" and root.seasonal]
    if plain:
        return f"stationary, largest AR root {max(plain):.2f}"
    return f"stationary, seasonal AR root {max(seasonal):.2f}" if seasonal else "stationary, no AR root"


def _reason(found: Mapping[str, object], roots: tuple[Root, ...]) -> str:
    if not roots:
        return "Corrected AIC chooses no ARMA term: what the plan leaves is white noise."
    if all(root.part == "MA" for root in roots):
        parts = [f"The {found['order']} has no AR root, so it is stationary"]
    else:
        parts = [f"All AR roots of the {found['order']} lie inside the circle"]
    cycle = next((r for r in roots if r.part == "AR" and not r.seasonal and 2.0 < r.period < np.inf), None)
    if cycle is not None:
        parts.append(f"one pair makes a cycle of {cycle.period:.3g} steps with modulus {cycle.modulus:.2f}")
    half = cast(float, found["half_life"])
    fading = ("after one step" if half < 1.05 else f"after {half:.2g} steps") if half >= 1.0 else "within one step"
    parts.append(f"the absolute psi weights sum to {found['psi_sum']:.3g}, and a shock is halved {fading}")
    return "; ".join(parts) + "."


def _lasting(found: Mapping[str, object]) -> str:
    half = cast(float, found["half_life"])
    return f"is halved only after {half:.3g} steps" if np.isfinite(half) else "never fades"


def _per_season(root: Root, found: Mapping[str, object]) -> Root:
    """A seasonal root per cycle, as its coefficient, not per step; others as they are."""
    if not root.seasonal:
        return root
    season = cast(int, found["season"])
    slope = season * root.modulus ** (season - 1.0)
    return replace(root, modulus=root.modulus**season, standard_error=root.standard_error * slope)


def _told(root: Root) -> str:
    error = "" if np.isnan(root.standard_error) else f" with a standard error of {root.standard_error:.2g}"
    return f"{root.modulus:.3f}{error}"
