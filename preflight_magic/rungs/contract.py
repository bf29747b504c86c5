"""What a rung is: one question asked of a series, how it is examined and how the evidence is judged."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from preflight_magic.kernels.arma import ArmaFit
from preflight_magic.kernels.plan_likelihood import Comparison
from preflight_magic.model import Evidence, Finding, Judgement, Step, TimeSeries
from preflight_magic.policy import Settings, Thresholds


@dataclass(frozen=True)
class Context:
    """What a rung may know besides the series.

    Attributes
    ----------
    settings : Settings
    comparison : Comparison or None
        The comparison of candidate plans that several rungs share, computed once by the ladder; None where no
        candidate could be computed.
    steps : tuple of Step
        The plan so far.
    transformed : pandas.Series or None
        The series after the plan, without missing values; only for rungs that come after "unit root".
    nuisance : ndarray or None, shape (len(transformed), k)
        Differenced indicators of the missing values, for likelihoods that skip them.
    innovations : ndarray or None
        Standardised innovations of the ARMA fit; only for rungs that come after "roots".
    fitted_parameters : int
        Coefficients of that fit.
    fit : ArmaFit or None
        That fit.
    """

    settings: Settings = field(default_factory=Settings)
    comparison: Comparison | None = None
    steps: tuple[Step, ...] = ()
    transformed: pd.Series | None = None
    nuisance: NDArray[np.float64] | None = None
    innovations: NDArray[np.float64] | None = None
    fitted_parameters: int = 0
    fit: ArmaFit | None = None


def with_fit(context: Context, finding: Finding) -> Context:
    """The context of the rungs after one whose finding holds an ARMA fit; unchanged where it holds none."""
    fit = finding.measures.get("fit")
    if not isinstance(fit, ArmaFit):
        return context
    return replace(context, fit=fit, innovations=fit.innovations, fitted_parameters=fit.order.size)


@dataclass(frozen=True)
class Rung:
    """One decision of the ladder.

    Attributes
    ----------
    name : str
        As it appears in findings.
    question : str
        The one question this rung asks of a series.
    after : tuple of str
        Names of the rungs it comes after.
    method : str
        How this is decided, in a few plain sentences.
    sources : tuple of str
        Published sources of the methods.
    examine : Callable[[TimeSeries, Context], Evidence]
        Computes; never sees the significance.
    judge : Callable[[Evidence, Thresholds], Judgement]
        Decides; never sees data.
    """

    name: str
    question: str
    after: tuple[str, ...]
    method: str
    sources: tuple[str, ...]
    examine: Callable[[TimeSeries, Context], Evidence]
    judge: Callable[[Evidence, Thresholds], Judgement]
