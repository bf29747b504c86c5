"""How numbers, dates, names, verdicts and steps are told; every format of the cards is decided here."""

from __future__ import annotations

import datetime as dt
import math
import unicodedata
from collections.abc import Hashable, Mapping, Sequence
from typing import assert_never

import numpy as np
import pandas as pd

from preflight_magic.model import (
    Difference,
    FillGaps,
    HypothesisTest,
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
    Verdict,
)
from preflight_magic.stamps import stamp_text

MINUS = "\u2212"
NONE = "\u2013"
ZERO_WIDTH_JOINER = "\u200d"
NO_BREAK = "\u00a0"

SHAPES: Mapping[Verdict, str] = {
    "clear": "\u25cb",
    "transform": "\u25c6",
    "inconclusive": "\u25d0",
    "infeasible": "\u25a0",
}
"""One shape a verdict, told apart without colour: ring, lozenge, half disc, block."""

MEANINGS: Mapping[Verdict, str] = {
    "clear": "nothing to do",
    "transform": "a step is proposed",
    "inconclusive": "the evidence is too even or too weak: a person decides",
    "infeasible": "cannot be computed",
}

TERMS: Mapping[str, str] = {
    "n": "no deterministic terms",
    "c": "constant",
    "ct": "constant and trend",
    "ctt": "constant, trend and squared trend",
}

CAUTION = (
    "Tests have limited power, and a plan is a recommendation: other plans may serve as well. Where a decision can "
    "hurt someone, local rules and qualified people decide."
)


# -------------------------------------------------------------------------------------------------- numbers
def number(value: float, digits: int = 3) -> str:
    """Number with `digits` significant digits; whole parts are kept whole, thousands are set apart.

    Below 1e-4 and from 1e9 on it is a power of ten. NaN is a dash.
    """
    value = float(value)
    if math.isnan(value):
        return NONE
    if math.isinf(value):
        return ("" if value > 0 else MINUS) + "\u221e"
    size = abs(value)
    if size == 0:
        return "0"
    sign = MINUS if value < 0 else ""
    if not 1e-4 <= size < 1e9:
        mantissa, exponent = f"{size:.{digits - 1}e}".split("e")
        # A power of ten below 1e-308 is no number, so the digits are read from the text.
        short = _short(mantissa, float(f"{size:.15e}".split("e")[0]))
        return f"{sign}{short}e{int(exponent)}".replace("e-", f"e{MINUS}")
    decimals = max(0, digits - 1 - math.floor(math.log10(float(f"{size:.{digits - 1}e}"))))
    return f"{sign}{_short(f'{size:,.{decimals}f}', size)}"


def _short(told: str, value: float) -> str:
    """Without zeros at the end where nothing was rounded: they would claim digits that are not there."""
    exact = "." in told and math.isclose(float(told.replace(",", "")), value, rel_tol=1e-12)
    return told.rstrip("0").rstrip(".") if exact else told


def p_value(value: float, bound: str = "exact") -> str:
    """p-value in words: ``0.032``, ``< 0.001``, ``at most 0.010``, ``at least 0.100``."""
    if math.isnan(value):
        return NONE
    if bound == "at least":
        return f"at least {value:.3f}" if value >= 0.0005 else f"at least {number(value, 1)}"
    if value < 0.001:
        return "< 0.001"
    if bound == "at most":
        return f"at most {value:.3f}"
    return "> 0.999" if value > 0.9995 else f"{value:.3f}"


def odds(log_odds: float) -> str:
    """Odds against a plan from their natural logarithm: ``4.1 to 1``; ``best`` where there are none."""
    if log_odds <= 0:
        return "best"
    return "over 1,000 to 1" if log_odds > math.log(1000) else f"{number(math.exp(log_odds), 2)} to 1"


def plural(noun: str, count: float = 2) -> str:
    """Noun in the number that `count` asks for."""
    return noun if count == 1 else f"{noun}s"


def count_of(count: int, noun: str) -> str:
    """Count and noun: ``1 month``, ``120 months``."""
    return f"{count:,} {plural(noun, count)}"


# ------------------------------------------------------------------------------------------- names and dates
def plain(text: str) -> str:
    """Text on one line: characters that break lines, hide or turn the writing direction become spaces."""
    kept = (c if c.isprintable() or c == ZERO_WIDTH_JOINER else " " for c in text)
    return " ".join("".join(kept).split())


def name_text(name: Hashable, limit: int | None = None) -> str:
    """Name of a series on one line; parts of a tuple are joined, what is beyond `limit` characters is cut."""
    text = plain(" / ".join(str(part) for part in name) if isinstance(name, tuple) else str(name))
    if not text:
        return "(no name)"
    return text if limit is None or len(text) <= limit else text[: limit - 1].rstrip() + "\u2026"


_BY_NOUN = {"month": "%Y-%m", "year": "%Y", "hour": "%Y-%m-%d %H:%M", "minute": "%Y-%m-%d %H:%M"}


def stamp(label: object, noun: str = "") -> str:
    """Stamp of a time index in the frequency that `noun` names: ``2021-03`` for a month, ``2021 Q1`` for a quarter."""
    if isinstance(label, pd.Period) and label.freqstr.startswith("Q"):
        return f"{label.year} Q{label.quarter}"
    if isinstance(label, pd.Period) and label.freqstr.startswith("W"):
        return f"week of {label.start_time:%Y-%m-%d}"
    if isinstance(label, pd.Timestamp):
        if noun == "quarter":
            return f"{label.year} Q{label.quarter}"
        return f"{label:{_BY_NOUN[noun]}}" if noun in _BY_NOUN else stamp_text(label)
    if isinstance(label, int | np.integer):
        return str(int(label)).replace("-", MINUS)
    return stamp_text(label)


# ------------------------------------------------------------------------------------------ verdicts and steps
def verdict_text(verdict: Verdict) -> str:
    """Shape and word of a verdict."""
    return f"{SHAPES[verdict]} {verdict}"


def meaning(step: Step | Repair, noun: str = "step") -> str:
    """What a step or repair does, in a few words."""
    match step:
        case ReadDates():
            return "stamps read as dates"
        case Sort():
            return "rows put in the order of their stamps"
        case MergeDuplicates():
            return "rows with the same stamp and the same value made one"
        case RegularCalendar():
            return f"a row for every {noun}, without a value where there was none"
        case FillGaps(period=period):
            pattern = "" if period == 1 else f", after taking out the mean pattern of {count_of(period, noun)}"
            return f"missing values on a straight line{pattern}"
        case PerDay(unit=unit):
            return f"each total divided by its number of {'days' if unit == 'days' else 'working days'}"
        case Log():
            return "natural logarithm"
        case Power(exponent=exponent, offset=offset):
            added = f" of the value plus {number(offset)}" if offset else ""
            return f"Box-Cox power {number(exponent)}{added}"
        case Logit(lower=lower, upper=upper):
            return f"log-odds between {number(lower)} and {number(upper)}"
        case Difference(lag=lag):
            return f"change against the value {count_of(lag, noun)} before"
        case RemoveTrend():
            return "a straight line subtracted"
        case RemoveShift(at=at):
            return f"the change of level at {stamp(at, noun)} subtracted"
        case RemovePattern(period=period):
            return f"a fixed pattern of {count_of(period, noun)} subtracted"
        case _:
            assert_never(step)


# ------------------------------------------------------------------------------------------ tests and measures
def test_series(test: HypothesisTest) -> str:
    """Which series a test looks at; empty where it does not say."""
    return value_text(test.options["series"]) if "series" in test.options else ""


def test_details(test: HypothesisTest) -> str:
    """What else is needed to repeat a test: lags, terms, observations, critical values, options."""
    options = {key: value for key, value in test.options.items() if key != "series"}
    kernel = options.get("kernel")
    parts = []
    if test.lags is not None:
        parts.append(f"bandwidth {test.lags}" if kernel is not None else count_of(test.lags, "lag"))
    parts.append(TERMS[test.terms])
    parts.append(f"{test.nobs:,} observations")
    if test.critical_values:
        values = ", ".join(f"{level} {number(v)}" for level, v in test.critical_values.items())
        parts.append(f"critical values {values}")
    parts.extend(f"{label_text(key)} {value_text(value)}" for key, value in options.items())
    return "; ".join(plain(part) for part in parts)


def sentence(text: str) -> str:
    """Text on one line that begins with a capital, unless its first word is a symbol of one letter."""
    text = kept_together(plain(text))
    symbol = len(text.split(" ", 1)[0]) == 1 and text[:1] != "a"
    return text if symbol else text[:1].upper() + text[1:]


def kept_together(text: str) -> str:
    """Text that does not break between a number and its percent sign."""
    return text.replace(" %", f"{NO_BREAK}%")


def label_text(key: str) -> str:
    """Label of an option or of a part of a measure."""
    return plain(str(key).replace("_", " "))


def value_text(value: object, noun: str = "") -> str:
    """Value of a measure or option in a few words; long arrays are summarised."""
    if value is None or value is pd.NaT or value is pd.NA:
        return NONE
    if isinstance(value, bool | np.bool_):
        return "yes" if value else "no"
    if isinstance(value, str):
        return plain(value)
    if isinstance(value, int | np.integer):
        return f"{int(value):,}".replace("-", MINUS)
    if isinstance(value, float | np.floating):
        return number(float(value))
    if isinstance(value, pd.Period | pd.Timestamp):
        return stamp(value, noun)
    if isinstance(value, dt.date):
        return value.isoformat()
    if isinstance(value, Mapping):
        return ", ".join(f"{label_text(str(k))}: {value_text(v, noun)}" for k, v in value.items()) or NONE
    if isinstance(value, pd.Series | pd.Index | np.ndarray):
        return _many(list(value.tolist()), noun)
    if isinstance(value, Sequence | set | frozenset):
        return _many(list(value), noun)
    return plain(str(value))


def _many(values: list[object], noun: str, limit: int = 8) -> str:
    if not values:
        return NONE
    shown = ", ".join(value_text(v, noun) for v in values[:limit])
    return shown if len(values) <= limit else f"{shown} and {len(values) - limit:,} more"


# ------------------------------------------------------------------------------------------------- text width
def width_of(text: str) -> int:
    """Columns that a text takes in a terminal: two for wide characters, none for combining ones."""
    return len(text) if text.isascii() else sum(_columns(c) for c in text)


def _columns(character: str) -> int:
    if character == ZERO_WIDTH_JOINER or unicodedata.combining(character) or character == "\ufe0f":
        return 0
    return 2 if unicodedata.east_asian_width(character) in "WF" else 1


def fit(text: str, columns: int) -> str:
    """Text cut or padded to exactly `columns` columns of a terminal."""
    if width_of(text) > columns:
        kept, room = "", columns - 1
        for character in text:
            room -= _columns(character)
            if room < 0:
                break
            kept += character
        text = kept + "\u2026"
    return text + " " * max(0, columns - width_of(text))
