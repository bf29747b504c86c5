"""Which steps may stand together, and in which order."""

from __future__ import annotations

import math
import re
import warnings
from collections.abc import Iterable
from typing import assert_never

import numpy as np
import pandas as pd

from preflight_magic.model import (
    CheckError,
    Difference,
    FillGaps,
    Log,
    Logit,
    MergeDuplicates,
    PerDay,
    Power,
    ReadDates,
    RegularCalendar,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Repair,
    Sort,
    Step,
)
from preflight_magic.plan.words import describe

REPAIR_TYPES = (ReadDates, Sort, MergeDuplicates, RegularCalendar, FillGaps)
"""In the order in which they are made."""
STEP_TYPES = (PerDay, Log, Power, Logit, Difference, RemoveTrend, RemoveShift, RemovePattern)


def canonical(steps: Iterable[Step]) -> tuple[Step, ...]:
    """Steps in canonical order.

    Per-day values; log, power or logit; differences, the longest lag first; then trend, shifts and patterns, which are
    removed together, so that their order among themselves is only a convention. Equal ranks keep their order.
    """
    return tuple(sorted(steps, key=_rank))


def _rank(step: Step) -> tuple[int, int]:
    match step:
        case PerDay():
            return 0, 0
        case Log() | Power() | Logit():
            return 1, 0
        case Difference(lag=lag):
            return 2, -lag
        case RemoveTrend():
            return 3, 0
        case RemoveShift():
            return 4, 0
        case RemovePattern(period=period):
            return 5, period
        case _:
            assert_never(step)


def validate(repairs: tuple[Repair, ...], steps: tuple[Step, ...]) -> None:
    """Raise a CheckError unless the repairs and steps can stand together in one plan."""
    for repair in repairs:
        _validate_repair(repair)
    order = [REPAIR_TYPES.index(type(repair)) for repair in repairs]
    if order != sorted(set(order)):
        names = ", ".join(f"'{describe(repair)}'" for repair in repairs)
        raise CheckError(
            f"A plan makes each repair once, dates first, then order, duplicates, calendar and gaps, not {names}."
        )
    for step in steps:
        _validate_step(step)
    bends = [step for step in steps if isinstance(step, Log | Power | Logit)]
    if len(bends) > 1:
        texts = " and ".join(describe(step) for step in bends)
        raise CheckError(f"A plan has one of Log, Power and Logit at most, not {texts} together; leave one out.")
    once = [step for step in steps if not isinstance(step, Difference)]
    for position, step in enumerate(once):
        if step in once[:position]:
            raise CheckError(f"The step '{describe(step)}' stands twice in the plan; leave one out.")
    if sum(isinstance(step, PerDay) for step in steps) > 1:
        raise CheckError("A plan divides by days or by workdays, not by both; leave one PerDay out.")


def _validate_repair(repair: Repair) -> None:
    if type(repair) not in REPAIR_TYPES:
        names = ", ".join(one.__name__ for one in REPAIR_TYPES)
        raise CheckError(f"{repair!r} is not a repair of a plan; use one of {names}.")
    match repair:
        case FillGaps(period=period) if not _count(period, 1):
            raise CheckError(f"FillGaps needs a whole period of at least 1, not {period!r}; 1 means no season.")
        case RegularCalendar(freq=freq, kind=kind):
            if kind not in ("dates", "periods", "numbers") or (freq is None) != (kind == "numbers"):
                raise CheckError(f"RegularCalendar needs the frequency of dates or periods, not {freq!r} of {kind!r}.")
            _validate_frequency(freq, kind)
        case _:
            pass


def _validate_frequency(freq: str | None, kind: str) -> None:
    if freq is None:
        return
    try:
        # It is written into code, so nothing but letters, digits and a dash may be in it.
        if not re.fullmatch(r"[0-9A-Za-z-]{1,20}", freq):
            raise ValueError
        with warnings.catch_warnings():
            # what is spelt as in older releases of pandas is still understood
            warnings.simplefilter("ignore")
            if kind == "periods":
                pd.PeriodDtype(freq)
            else:
                pd.tseries.frequencies.to_offset(freq)
    except (ValueError, TypeError):
        raise CheckError(f"RegularCalendar needs a frequency of pandas, such as 'MS', not {freq!r}.") from None


def _count(value: object, least: int) -> bool:
    return isinstance(value, int | np.integer) and not isinstance(value, bool) and int(value) >= least


def _validate_step(step: Step) -> None:
    if not isinstance(step, STEP_TYPES):
        raise CheckError(f"{step!r} is not a step of a plan; use one of {', '.join(t.__name__ for t in STEP_TYPES)}.")
    match step:
        case PerDay(unit=unit) if unit not in ("days", "workdays"):
            raise CheckError(f"PerDay counts 'days' or 'workdays', not {unit!r}.")
        case Power(exponent=exponent, offset=offset) if not (math.isfinite(exponent) and math.isfinite(offset)):
            raise CheckError(f"Power needs a finite exponent and offset, not {exponent} and {offset}.")
        case Logit(lower=lower, upper=upper) if not (math.isfinite(lower) and math.isfinite(upper) and lower < upper):
            raise CheckError(f"Logit needs a lower bound below a finite upper one, not {lower} and {upper}.")
        case Difference(lag=lag) if not _count(lag, 1):
            raise CheckError(f"Difference needs a whole lag of at least 1, not {lag!r}.")
        case RemovePattern(period=period) if not _count(period, 2):
            raise CheckError(f"RemovePattern needs a whole period of at least 2, not {period!r}.")
        case RemoveShift(at=at) if not isinstance(at, pd.Period | pd.Timestamp | int | np.integer):
            raise CheckError(f"RemoveShift needs a period, a timestamp or an integer, not {at!r}.")
        case _:
            pass
