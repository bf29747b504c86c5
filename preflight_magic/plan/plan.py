"""The plan: repairs, then steps in canonical order."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CheckError, Repair, Step
from preflight_magic.plan.apply import apply
from preflight_magic.plan.back_transform import back_transform
from preflight_magic.plan.order import canonical, validate
from preflight_magic.plan.words import describe

__all__ = ["Plan", "canonical", "describe"]


@dataclass(frozen=True, repr=False)
class Plan:
    """What is done to a series before a model sees it, and undone on the model's forecast.

    A plan holds no data and nothing estimated: `apply` and `back_transform` estimate what they need from the history
    they are given. Plans are equal when their repairs and steps are.

    Parameters
    ----------
    repairs : tuple of Repair
        Never undone.
    steps : tuple of Step
        Put in canonical order on construction.

    Raises
    ------
    CheckError
        If the steps cannot stand together.
    """

    repairs: tuple[Repair, ...] = ()
    steps: tuple[Step, ...] = ()

    def __post_init__(self) -> None:
        repairs, steps = tuple(self.repairs), tuple(self.steps)
        validate(repairs, steps)
        object.__setattr__(self, "repairs", repairs)
        object.__setattr__(self, "steps", canonical(steps))

    def __bool__(self) -> bool:
        return bool(self.steps)

    def __str__(self) -> str:
        return ", ".join(describe(step) for step in self.steps) or "as given"

    def __repr__(self) -> str:
        repairs = ", ".join(describe(repair) for repair in self.repairs)
        return f"<Plan: {repairs + '; ' if repairs else ''}{self}>"

    def apply(self, series: pd.Series, history: pd.Series | None = None) -> pd.Series:
        """Repair and transform a series.

        Parameters
        ----------
        series : Series, shape (n,)
            Any numeric dtype, on a regular time index or one that the repairs make regular; values may be missing.
        history : Series, optional
            What everything is estimated on, and where values before the start of `series` come from; by default
            the series itself.

        Returns
        -------
        Series, shape (n,)
            float64 on the index of `series`, after its repairs; NaN where a value is missing or lost to differencing.

        Raises
        ------
        CheckError
            If the joined index is not regular, a value lies outside the domain of a step, or the history is too short.
        """
        return apply(self, series, history)

    def back_transform(
        self,
        forecast: pd.Series,
        history: pd.Series,
        variance: float | Sequence[float] | npt.NDArray[np.float64] | pd.Series | None = None,
    ) -> pd.Series:
        """Undo the plan on a forecast of the transformed series.

        Parameters
        ----------
        forecast : Series, shape (h,)
            On the index that follows the last observed value of the history.
        history : Series, shape (n,)
            The observed series in its own units, as it was given to `apply`.
        variance : float or array of shape (h,) or Series, optional
            Error variance of the forecast after undoing differences and before undoing log, power or logit. With it
            the result is the mean of the back-transformed distribution (normal errors); without it the median.

        Returns
        -------
        Series, shape (h,)
            In the units of the history, on the forecast's index.

        Raises
        ------
        CheckError
            If the forecast's index does not follow the history's, or values needed to undo a difference are missing.
        """
        return back_transform(self, forecast, history, variance)

    def without(self, step: Step | int) -> Plan:
        """Leave out a step, given as itself or by its position; the other steps stay as they are."""
        if isinstance(step, int | np.integer):
            position = int(step)
            if not -len(self.steps) <= position < len(self.steps):
                raise CheckError(f"The plan '{self}' has no step at position {position}; it has {len(self.steps)}.")
            position %= len(self.steps)
        elif step in self.steps:
            position = self.steps.index(step)
        else:
            raise CheckError(f"The plan '{self}' has no step '{_text(step)}' to leave out.")
        return Plan(self.repairs, self.steps[:position] + self.steps[position + 1 :])

    def with_step(self, step: Step) -> Plan:
        """Put one more step in, at its place in canonical order."""
        return Plan(self.repairs, (*self.steps, step))


def _text(step: object) -> str:
    try:
        return describe(step)  # type: ignore[arg-type]
    except AssertionError:
        return repr(step)
