"""What several rungs say alike: shares of the evidence from the comparison of plans, and verdicts of tests."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Mapping

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.plan_likelihood import Candidate, Comparison, PlanPrior, compare
from preflight_magic.model import Difference, HypothesisTest, Step
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context


def shares(comparison: Comparison, answer: Callable[[Candidate], Hashable]) -> dict[Hashable, float]:
    """Share of the evidence for each answer to a question, summed over the candidate plans that give it.

    Parameters
    ----------
    comparison : Comparison
    answer : Callable[[Candidate], Hashable]
        What a plan says to the question.

    Returns
    -------
    dict
        Answer to share, in order of the best plan that gives it; shares sum to one.
    """
    found: dict[Hashable, float] = {}
    for candidate, weight in zip(comparison.candidates, comparison.weights, strict=True):
        key = answer(candidate)
        found[key] = found.get(key, 0.0) + weight
    return found


def per_cent(share: float) -> str:
    """Write a share of the evidence: ``92 %``, ``under 1 %``, ``over 99 %``."""
    if share < 0.01:
        return "under 1 %"
    return "over 99 %" if share > 0.99 else f"{100 * share:.0f} %"


def told(found: Mapping[Hashable, float], words: Mapping[Hashable, str]) -> str:
    """Shares in a sentence, the leading answer first: ``92 % of the evidence is for A, 7 % for B.``"""
    items = list(found.items())
    text = f"{per_cent(items[0][1])} of the evidence is for {words[items[0][0]]}"
    if len(items) > 1:
        rest = max(items[1:], key=lambda item: item[1])
        text += f", {per_cent(rest[1])} for {words[rest[0]]}"
    return f"{capital(text)}."


def capital(text: str) -> str:
    """Text with a capital first letter, the rest as it is."""
    return text[:1].upper() + text[1:]


def does(rejects: bool) -> str:
    """What a test does to its null hypothesis, in words."""
    return "rejects" if rejects else "does not reject"


def p_text(test: HypothesisTest) -> str:
    """Write a p-value in a sentence: ``p = 0.032``, ``p < 0.001``, ``p at least 0.100``."""
    if test.p_value < 0.001 and test.p_bound != "at least":
        return "p < 0.001"
    return f"p {'=' if test.p_bound == 'exact' else test.p_bound} {test.p_value:.3f}"


def order_shares(comparison: Comparison, steps: tuple[Step, ...]) -> dict[str, object]:
    """What the comparison says of one difference more or less than some steps take, and of either kind of season.

    Parameters
    ----------
    comparison : Comparison
    steps : tuple of Step

    Returns
    -------
    dict
        Shares of the evidence `share_more`, `share_less`, `share_fixed` and `share_wandering`.
    """
    taken = sum(isinstance(step, Difference) for step in steps)
    weighed = list(zip(comparison.candidates, comparison.weights, strict=True))
    return {
        "share_more": sum(weight for one, weight in weighed if one.d + one.D > taken),
        "share_less": sum(weight for one, weight in weighed if one.d + one.D < taken),
        "share_fixed": sum(weight for one, weight in weighed if one.D == 0),
        "share_wandering": sum(weight for one, weight in weighed if one.D > 0),
    }


def summed_share(values: NDArray[np.float64], context: Context) -> float:
    """Share of the evidence that the sums of a series need no difference: then it was differenced once too often.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Without missing values.
    context : Context
        Its thresholds are the prior.

    Returns
    -------
    float
        NaN where no plan of the sums can be computed.
    """
    found = compare(np.r_[0.0, np.cumsum(values - values.mean())], 1, prior_of(context.settings.thresholds))
    return float("nan") if found is None else shares(found, lambda one: one.d).get(0, 0.0)


def prior_of(thresholds: Thresholds) -> PlanPrior:
    """What the comparison of plans believes before the data."""
    return PlanPrior(
        log_margin=thresholds.log_margin,
        season_p=thresholds.season_p,
        trend=thresholds.trend_odds,
        shift=thresholds.shift_odds,
        difference=thresholds.difference_odds,
        second=thresholds.second_difference_odds,
        wandering=thresholds.wandering_odds,
        both=thresholds.both_differences_odds,
        short=thresholds.short_series_odds,
        slope=thresholds.slope_scale,
        outlier_bound=thresholds.outlier_bound,
    )
