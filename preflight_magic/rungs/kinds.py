"""Kinds of series for which an ARMA plan is not the road: what they are called, and what to use instead."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

SMALL_COUNT = 10.0
"""Mean below which whole numbers are called small counts. Common practice: above it a normal law is near a Poisson."""


def demand_road(found: Mapping[str, Any], demand: str, interval: float) -> str:
    """What to use for demand that comes now and then.

    Parameters
    ----------
    found : Mapping
        Measures of the values.
    demand : str
        Its class: ``intermittent demand`` or ``lumpy demand``.
    interval : float
        Mean interval between demands from which demand is intermittent.

    Returns
    -------
    str
        A sentence with code that sums to the shortest period in which demand is intermittent no longer, were demands
        independent of each other.
    """
    empty = 1.0 - 1.0 / found["demand_interval"]
    k = max(2, math.floor(math.log(1.0 - 1.0 / interval) / math.log(empty)) + 1)
    return (
        f"No ARMA plan is made for {demand}, and steps that other rungs propose are left out: use Croston's method "
        f"with the correction of Syntetos and Boylan (2005), or forecast sums of {k} steps, "
        f"y.groupby((np.arange(len(y)) - len(y)) // {k}).sum()."
    )


def other_kinds(found: Mapping[str, Any]) -> tuple[list[str], list[str]]:
    """Names of the kinds a series is of besides intermittent demand, and a sentence for each.

    Parameters
    ----------
    found : Mapping
        Measures of the values.
    """
    names, sentences = [], []
    whole, least, most = found["whole_numbers"], found["minimum"], found["maximum"]
    mean = found.get("mean", math.inf)
    if whole and least >= 0 and mean < SMALL_COUNT and found["distinct"] > 2:
        names.append("small counts")
        sentences.append(
            f"Counts with a mean of {mean:.2g} are far from normal: a regression for counts (Poisson or negative "
            "binomial) on lags and season serves better, or sums over longer periods; intervals of the plan may reach "
            "below zero."
        )
    if found["unit_interval"] and not whole:
        names.append("values between 0 and 1")
        bounds = "0, 1" if least > 0 and most < 1 else "-0.01, 1.01"
        sentences.append(
            f"If these are shares, put_in(Logit({bounds})) keeps forecasts and intervals between the bounds; if they "
            "are amounts that happen to be small, leave them."
        )
    return names, sentences
