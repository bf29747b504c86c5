"""A forecast distribution in the original units, from one or several plans."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from preflight_magic.kernels.candidate_prediction import Ahead
from preflight_magic.kernels.student import student_cdf, student_quantile
from preflight_magic.model import Step
from preflight_magic.plan.plan import Plan

Array = NDArray[np.float64]
_HALVINGS = 60
"""Of the bracket of a quantile: to rounding errors."""


@dataclass(frozen=True)
class Part:
    """What one plan says of the future; `logged` says that `ahead` is in logs of the scale that the parts share."""

    weight: float
    ahead: Ahead
    logged: bool = False


@dataclass(frozen=True)
class Mixture:
    """Parts weighted together.

    Attributes
    ----------
    parts : sequence of Part
        Weights sum to one.
    points : tuple of Step
        The steps on single values, such as per day or log, that lead from the original units to the shared scale.
    history : Series
    index : Index, shape (steps,)
        Stamps that follow the history.
    """

    parts: Sequence[Part]
    points: tuple[Step, ...]
    history: pd.Series
    index: pd.Index

    def table(self, coverage: float) -> pd.DataFrame:
        """Median, mean and interval.

        Parameters
        ----------
        coverage : float
            Probability of the interval.

        Returns
        -------
        DataFrame
            ``median``, ``mean``, ``lower``, ``upper``. The mean is that of normal errors, since the exponential of a
            t-distributed one has none; the quantiles are those of Student's t.
        """
        columns = {
            "median": self._undone(self._quantile(0.5), None),
            "mean": sum(part.weight * self._mean(part) for part in self.parts),
            "lower": self._undone(self._quantile((1.0 - coverage) / 2.0), None),
            "upper": self._undone(self._quantile((1.0 + coverage) / 2.0), None),
        }
        return pd.DataFrame(columns, index=self.index)

    def _mean(self, part: Part) -> Array:
        ahead = part.ahead
        if not part.logged:
            return self._undone(ahead.mean, ahead.variance)
        with np.errstate(over="ignore"):
            return self._undone(np.exp(ahead.mean + ahead.variance / 2.0), None)

    def _quantile(self, probability: float) -> Array:
        """Of the mixture on the shared scale; it lies between those of the parts."""
        each = np.stack([_part_quantile(part, probability) for part in self.parts])
        low, high = each.min(axis=0), each.max(axis=0)
        for _ in range(_HALVINGS if len(self.parts) > 1 else 0):
            middle = (low + high) / 2.0
            below = sum(part.weight * _distribution(part, middle) for part in self.parts) < probability
            low, high = np.where(below, middle, low), np.where(below, high, middle)
        return np.asarray((low + high) / 2.0)

    def _undone(self, values: Array, variance: Array | None) -> Array:
        series = pd.Series(values, index=self.index, name=self.history.name)
        return Plan((), self.points).back_transform(series, self.history, variance).to_numpy()


def _part_quantile(part: Part, probability: float) -> Array:
    ahead = part.ahead
    found = ahead.mean + student_quantile(probability, ahead.degrees) * np.sqrt(ahead.variance)
    with np.errstate(over="ignore"):
        return np.asarray(np.exp(found) if part.logged else found)


def _distribution(part: Part, values: Array) -> Array:
    """Probability of at most these values."""
    ahead = part.ahead
    if part.logged:
        with np.errstate(divide="ignore"):
            values = np.log(np.maximum(values, 0.0))
    score = (values - ahead.mean) / np.sqrt(np.maximum(ahead.variance, 1e-300))
    return student_cdf(score, ahead.degrees)
