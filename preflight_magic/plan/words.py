"""How steps and series are named in short texts and in sentences."""

from __future__ import annotations

from typing import assert_never

import pandas as pd

from preflight_magic.model import (
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
from preflight_magic.stamps import stamp_text


def describe(step: Step | Repair) -> str:
    """Short text of one step or repair, such as ``difference 12``."""
    match step:
        case ReadDates():
            return "read dates"
        case Sort():
            return "sort"
        case MergeDuplicates():
            return "merge duplicates"
        case RegularCalendar():
            return "regular calendar"
        case FillGaps(period=period):
            return "fill gaps" if period == 1 else f"fill gaps {period}"
        case PerDay(unit=unit):
            return "per day" if unit == "days" else "per workday"
        case Log():
            return "log"
        case Power(exponent=exponent, offset=offset):
            return f"power {exponent:g}" + (f" offset {offset:g}" if offset else "")
        case Logit(lower=lower, upper=upper):
            return f"logit {lower:g} to {upper:g}"
        case Difference(lag=lag):
            return f"difference {lag}"
        case RemoveTrend():
            return "remove trend"
        case RemoveShift(at=at):
            return f"remove shift from {stamp_text(at)}"
        case RemovePattern(period=period):
            return f"remove pattern {period}"
        case _:
            assert_never(step)


def called(series: pd.Series) -> str:
    """How a sentence names the series: ``Series 'passengers'``, or ``The series`` where it has no name."""
    return "The series" if series.name is None else f"Series {series.name!r}"
