"""Steps that act on one value at a time: per day, log, power and logit, and their inverses."""

from __future__ import annotations

from collections.abc import Callable
from typing import assert_never

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.model import CheckError, Log, Logit, PerDay, Power, Step
from preflight_magic.plan.words import called, describe
from preflight_magic.stamps import days_of, stamp_text

Array = npt.NDArray[np.float64]
PointStep = PerDay | Log | Power | Logit

# Trapezoidal rule for the mean under a standard normal error: it converges geometrically for functions that are
# analytic near the real line (Trefethen and Weideman 2014, SIAM Review 56), and what lies beyond eight standard
# deviations has a probability of 1e-15.
NODES = np.linspace(-8.0, 8.0, 129)
WEIGHTS = np.exp(-(NODES**2) / 2) / np.exp(-(NODES**2) / 2).sum()


def point_steps(steps: tuple[Step, ...]) -> tuple[PointStep, ...]:
    """The steps among these that act on one value at a time, in their order."""
    return tuple(step for step in steps if isinstance(step, PerDay | Log | Power | Logit))


def transform_points(steps: tuple[Step, ...], x: pd.Series, given: pd.Series) -> pd.Series:
    """Apply the point steps to `x`, which lies on the whole time axis; `given` names the series in errors."""
    for step in point_steps(steps):
        values = x.to_numpy()
        match step:
            case PerDay(unit=unit):
                values = values / day_counts(x.index, unit, given)
            case Log():
                _check_domain(values > 0, x, given, step, "above zero", "leave the log out or use Power with an offset")
                values = np.log(values)
            case Power(exponent=exponent, offset=offset):
                raised = values + offset
                inside = raised >= 0 if exponent > 0 else raised > 0
                what = f"{'at least' if exponent > 0 else 'above'} {0.0 - offset:g}"
                _check_domain(inside, x, given, step, what, "use a larger offset or leave the power out")
                values = box_cox(raised, exponent)
            case Logit(lower=lower, upper=upper):
                inside = (values > lower) & (values < upper)
                remedy = "use wider bounds or leave the logit out"
                _check_domain(inside, x, given, step, f"between {lower:g} and {upper:g}", remedy)
                values = np.log((values - lower) / (upper - values))
            case _:
                assert_never(step)
        x = pd.Series(values, index=x.index)
    return x


def undo_points(
    steps: tuple[Step, ...], z: Array, variance: Array | None, timeline: pd.Index, given: pd.Series
) -> Array:
    """Undo the point steps on the last rows of the time axis: medians, or means where a variance is given."""
    for step in reversed(point_steps(steps)):
        match step:
            case PerDay(unit=unit):
                z = z * day_counts(timeline, unit, given)[len(timeline) - len(z) :]
            case Log():
                with np.errstate(over="ignore"):
                    z = np.exp(z if variance is None else z + variance / 2)
            case Power(exponent=exponent, offset=offset):
                z = _undo_power(z, exponent, variance) - offset
            case Logit(lower=lower, upper=upper):
                share = _share(z) if variance is None else _mean(_share, z, variance)
                z = lower + (upper - lower) * share
            case _:
                assert_never(step)
    return z


def box_cox(raised: Array, exponent: float) -> Array:
    """``(raised**exponent - 1) / exponent``, exact for exponents near zero; exponent 0 is the log."""
    with np.errstate(divide="ignore", over="ignore"):
        logs = np.log(raised)
        return logs if exponent == 0 else np.asarray(np.expm1(exponent * logs) / exponent)


def _undo_power(z: Array, exponent: float, variance: Array | None) -> Array:
    if exponent == 0:
        with np.errstate(over="ignore"):
            return np.exp(z if variance is None else z + variance / 2)

    def level(z: Array) -> Array:
        # Below the transform's range the value is its bound: 0 for a positive exponent, infinity for a negative one.
        with np.errstate(divide="ignore", over="ignore"):
            return np.exp(np.log1p(np.maximum(exponent * z, -1.0)) / exponent)

    return level(z) if variance is None else _mean(level, z, variance)


def _share(z: Array) -> Array:
    with np.errstate(over="ignore"):
        return 1 / (1 + np.exp(-z))


def _mean(level: Callable[[Array], Array], z: Array, variance: Array) -> Array:
    """Mean of ``level(z + error)``, the error normal; nodes where the level is infinite are left out."""
    with np.errstate(over="ignore", invalid="ignore"):
        levels = level(z[:, None] + np.sqrt(variance)[:, None] * NODES)
        finite = ~np.isinf(levels)
        return np.asarray(np.where(finite, levels, 0.0) @ WEIGHTS / (finite @ WEIGHTS))


def _check_domain(
    inside: npt.NDArray[np.bool_], x: pd.Series, given: pd.Series, step: Step, domain: str, remedy: str
) -> None:
    outside = ~inside & ~np.isnan(x.to_numpy())
    if outside.any():
        first = int(np.argmax(outside))
        value = x.iloc[first]
        raise CheckError(
            f"{called(given)} is {value:g} at {stamp_text(x.index[first])}, and '{describe(step)}' needs values "
            f"{domain}; {remedy}."
        )


def day_counts(index: pd.Index, unit: str, given: pd.Series) -> Array:
    """Days or workdays (Monday to Friday) in the month, quarter or year of each stamp.

    Parameters
    ----------
    index : Index, shape (n,)
        A regular index of at least two periods or timestamps.

    Returns
    -------
    ndarray, shape (n,)

    Raises
    ------
    CheckError
        If the index does not count whole months.
    """
    refusal = CheckError(
        f"{called(given)} has no monthly, quarterly or yearly index, which 'per day' needs; leave PerDay out."
    )
    counts = days_of(index, unit)
    if counts is None:
        raise refusal
    return counts
