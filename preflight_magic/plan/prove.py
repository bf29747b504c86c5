"""Proof that generated code does what the plan does, on the series itself."""

from __future__ import annotations

import warnings
from collections.abc import Callable, Iterator
from functools import lru_cache
from typing import Any

import numpy as np
import pandas as pd

from preflight_magic.model import CheckError, FillGaps, Logit, MergeDuplicates, Power, ReadDates, RegularCalendar, Sort
from preflight_magic.plan.literals import literal, plain
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps

TOLERANCE = 1e-9
"""Largest difference, relative to the largest value compared."""


class EmitError(RuntimeError):
    """Generated code that does not do what its plan does: a fault of this package."""


def prove(plan: Plan, source: str, series: pd.Series, horizon: int) -> None:
    """Run generated code on a series and compare it with the plan.

    Compared are the whole series, the series given its history without the last `horizon` values, those values alone,
    and the way back from them, without and with a variance.

    Parameters
    ----------
    plan : Plan
    source : str
        From `emit`, of this plan or of several series, this one among them.
    series : Series, shape (n,)
    horizon : int
        At most a quarter of the series is used.

    Raises
    ------
    EmitError
        If the code fails, or its numbers differ from the plan's by more than 1e-9 of the largest.
    CheckError
        If the plan itself cannot be applied to the series.
    """
    prepare, restore = _functions(source, series)
    expected = plan.apply(series)
    scale = _largest(Plan(plan.repairs, point_steps(plan.steps)).apply(series))
    _compare("prepare(y)", expected, lambda: prepare(series), scale, series)
    messy = disordered(plan, series)
    if messy is not None:
        _compare("prepare(y) of an irregular index", plan.apply(messy), lambda: prepare(messy), scale, series)
    h = max(1, min(int(horizon), len(series) // 4))
    for what, wanted, run, size in _held_out(plan, prepare, restore, series, h):
        try:
            value = wanted()
        except CheckError:
            # The shorter history does not carry the plan (a gap at its end, too few values): nothing to compare.
            continue
        _compare(what, value, run, scale if size is None else max(size, _largest(value)), series)


def disordered(plan: Plan, series: pd.Series) -> pd.Series | None:
    """The series as its repairs might have found it; None where they leave the index alone.

    Parameters
    ----------
    plan : Plan
    series : Series, shape (n,)
        On a regular index.
    """
    y = series
    for repair in reversed(plan.repairs):
        match repair:
            case RegularCalendar():
                kept = y.notna().to_numpy(copy=True)
                kept[[0, -1]] = True
                y = y[kept]
            case MergeDuplicates():
                y = pd.concat([y.iloc[:1], y])
            case Sort():
                y = y.iloc[::-1]
            case ReadDates():
                y = y.set_axis(pd.Index([stamp.isoformat() for stamp in y.index], name=y.index.name))
            case FillGaps():
                pass
    return None if y is series else y


def _held_out(
    plan: Plan, prepare: Callable[..., Any], restore: Callable[..., Any], y: pd.Series, h: int
) -> Iterator[tuple[str, Callable[[], pd.Series], Callable[[], Any], float | None]]:
    """What is called, what the plan gives, what the code gives, and how large the values are; `h` values held out."""
    past, future = y.iloc[:-h], y.iloc[-h:]
    yield "prepare(y, history)", lambda: plan.apply(y, past), lambda: prepare(y, past), None
    yield "prepare(future, history)", lambda: plan.apply(future, past), lambda: prepare(future, past), None
    try:
        forecast = plan.apply(y, past).iloc[-h:]
    except CheckError:
        return
    size = max(_largest(y), _constant(plan))
    spread = float(np.nanvar(forecast)) if forecast.notna().any() else 0.0
    variance = pd.Series(np.linspace(0.1, 1.0, h) * (spread or 0.01), index=forecast.index)
    for given in (None, variance, float(variance.iloc[-1])):
        yield (
            "restore(forecast, history)" if given is None else "restore(forecast, history, variance)",
            lambda given=given: plan.back_transform(forecast, past, given),  # type: ignore[misc]
            lambda given=given: restore(forecast, past, given),  # type: ignore[misc]
            size,
        )


@lru_cache(maxsize=4)
def _namespace(source: str) -> dict[str, Any]:
    namespace: dict[str, Any] = {"__name__": "generated"}
    exec(compile(source, "<generated>", "exec"), namespace)
    return namespace


def _functions(source: str, series: pd.Series) -> tuple[Callable[..., Any], Callable[..., Any]]:
    try:
        namespace = _namespace(source)
        if "PLANS" not in namespace:
            return namespace["prepare"], namespace["restore"]
        prepare, restore = namespace["PLANS"][plain(series.name)]
    except Exception as error:
        raise _fault(series, f"does not run ({type(error).__name__}: {error})") from error
    return prepare, restore


def _compare(what: str, expected: pd.Series, run: Callable[[], Any], scale: float, series: pd.Series) -> None:
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            found = run()
    except Exception as error:
        raise _fault(series, f"fails in {what} ({type(error).__name__}: {error})") from error
    if not isinstance(found, pd.Series) or not found.index.equals(expected.index):
        raise _fault(series, f"gives another index in {what}")
    one, two = expected.to_numpy(), found.to_numpy(dtype="float64")
    with np.errstate(invalid="ignore"):
        apart = ~((np.abs(one - two) <= TOLERANCE * max(scale, _largest(expected))) | (one == two))
    apart &= ~(np.isnan(one) & np.isnan(two))
    if apart.any():
        first = int(np.argmax(apart))
        raise _fault(series, f"gives {two[first]!r} instead of {one[first]!r} in {what} at {expected.index[first]}")


def _largest(values: pd.Series) -> float:
    numbers = np.abs(values.to_numpy(dtype="float64", na_value=np.nan))
    numbers = numbers[np.isfinite(numbers)]
    return float(numbers.max()) if len(numbers) else 0.0


def _constant(plan: Plan) -> float:
    """Largest number that undoing a point step adds to a value: the value is rounded as that number is."""
    sizes = [0.0]
    for step in point_steps(plan.steps):
        match step:
            case Logit(lower=lower, upper=upper):
                sizes += [abs(lower), abs(upper)]
            case Power(offset=offset):
                sizes.append(abs(offset))
            case _:
                pass
    return max(sizes)


def _fault(series: pd.Series, what: str) -> EmitError:
    return EmitError(
        f"The code generated for {literal(series.name)} {what}; this is a fault of preflight_magic, please report it."
    )
