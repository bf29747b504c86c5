"""Values as JSON: what JSON knows as it is, everything else as an object with one tag that says what it is."""

from __future__ import annotations

import datetime
import math
import re
import warnings
from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

import numpy as np
import pandas as pd

from preflight_magic.model import Root

DEEPEST = 8
"""Levels of nesting inside one value."""
FREQUENCY = re.compile(r"(\d{1,4})?[A-Za-z]{1,4}(-[A-Z]{3})?")
_ZONE = re.compile(r"[A-Za-z0-9_+:\-]{1,40}(/[A-Za-z0-9_+\-]{1,40}){0,3}")
_DATE = re.compile(r"\d{4}-\d\d-\d\d")
_MOMENT = re.compile(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d(\.\d{1,9})?")
_WORDS = {"nan": math.nan, "inf": math.inf, "-inf": -math.inf}


class CannotTagError(TypeError):
    """A value of a kind that a record does not hold."""


class BadTagError(ValueError):
    """A JSON value that stands for nothing; the message is the end of a sentence."""


# ---------------------------------------------------------------------------------------------------- to JSON
def encode(value: object) -> Any:
    """Value as JSON.

    Parameters
    ----------
    value : None, bool, int, float, str, tuple, list, mapping, Period, Timestamp, datetime, date or Root
        Scalars of numpy count as those of Python.

    Returns
    -------
    object
        For `json.dumps`, never NaN or infinite.

    Raises
    ------
    CannotTagError
        For any other kind of value.
    """
    match value:
        case None | bool():
            return value
        case np.bool_():
            return bool(value)
        case str():
            return str.__str__(value)
        case int() | np.integer():
            return _whole(int(value))
        case float() | np.floating():
            return number(float(value))
        case tuple():
            return {"tuple": [encode(one) for one in value]}
        case list():
            return [encode(one) for one in value]
        case Mapping():
            return {"mapping": [[encode(key), encode(one)] for key, one in value.items()]}
        case Root():
            return {"root": {key: encode(one) for key, one in asdict(value).items()}}
        case _:
            return _stamp(value)


def number(value: float) -> Any:
    """Number as JSON, which has no word for what is not finite."""
    if math.isfinite(value):
        return value
    return {"float": "nan" if math.isnan(value) else "inf" if value > 0 else "-inf"}


def _whole(value: int) -> int:
    if abs(value) >= 2**63:
        raise CannotTagError("a whole number of more than 63 bits")
    return value


def _stamp(value: object) -> Any:
    told: Any = None
    if isinstance(value, np.datetime64 | datetime.datetime) and not pd.isna(value):
        value = pd.Timestamp(value)
    if isinstance(value, pd.Period):
        told = {"period": int(value.ordinal), "freq": value.freqstr}
    elif isinstance(value, pd.Timestamp):
        zone = value.tz
        plain = value if zone is None else value.tz_convert("UTC").tz_localize(None)
        name = None if zone is None else getattr(zone, "key", None) or getattr(zone, "zone", None) or str(zone)
        told = {"timestamp": plain.isoformat(), "zone": name}
    elif isinstance(value, datetime.date):
        told = {"date": value.isoformat()}
    if told is None:
        raise CannotTagError(f"a value of type {type(value).__name__}")
    try:
        back = decode(told)
    except BadTagError as error:
        raise CannotTagError(f"the stamp {value!s}, which {error}") from None
    if back != value:
        raise CannotTagError(f"the stamp {value!s}, which would not come back as it is")
    return told


# -------------------------------------------------------------------------------------------------- from JSON
def decode(told: object, depth: int = 0) -> Any:
    """Value that `encode` wrote.

    Parameters
    ----------
    told : object
        From `json.loads`; trusted in nothing.
    depth : int
        Levels above this one.

    Raises
    ------
    BadTagError
        Where it stands for nothing.
    """
    if depth > DEEPEST:
        raise BadTagError("is nested too deeply")
    if isinstance(told, list):
        return [decode(one, depth + 1) for one in told]
    if not isinstance(told, dict):
        return told
    match told:
        case {"tuple": list(items), **rest} if not rest:
            return tuple(decode(one, depth + 1) for one in items)
        case {"mapping": list(pairs), **rest} if not rest:
            return _mapping(pairs, depth)
        case {"float": str(word), **rest} if not rest and word in _WORDS:
            return _WORDS[word]
        case {"period": int(ordinal), "freq": str(freq), **rest} if not rest and not isinstance(ordinal, bool):
            return _period(ordinal, freq)
        case {"timestamp": str(text), "zone": str() | None as zone, **rest} if not rest:
            return _timestamp(text, zone)
        case {"date": str(text), **rest} if not rest and _DATE.fullmatch(text):
            return _tried(lambda: datetime.date.fromisoformat(text), "date")
        case {"root": dict(fields), **rest} if not rest:
            return _root(fields)
        case _:
            raise BadTagError("has no tag that is known")


def _mapping(pairs: list[object], depth: int) -> dict[Any, Any]:
    found: dict[Any, Any] = {}
    for pair in pairs:
        if not isinstance(pair, list) or len(pair) != 2:
            raise BadTagError("is a mapping with an entry that is no pair")
        try:
            found[decode(pair[0], depth + 1)] = decode(pair[1], depth + 1)
        except TypeError:
            raise BadTagError("is a mapping with a key that cannot be one") from None
    return found


def _root(fields: dict[str, object]) -> Root:
    numbers = {"modulus", "period", "standard_error"}
    if fields.keys() != {"part", "seasonal", *numbers} or fields["part"] not in ("AR", "MA"):
        raise BadTagError("is not a root")
    read = {key: decode(fields[key], DEEPEST) for key in numbers}
    if not all(isinstance(one, float | int) and not isinstance(one, bool) for one in read.values()):
        raise BadTagError("is a root with what is no number")
    if not isinstance(fields["seasonal"], bool) or not 0.0 <= read["modulus"] < math.inf or not read["period"] > 0.0:
        raise BadTagError("is a root that cannot be one")
    return Root(fields["part"], seasonal=fields["seasonal"], **{key: float(one) for key, one in read.items()})


def _period(ordinal: int, freq: str) -> Any:
    if not FREQUENCY.fullmatch(freq):
        raise BadTagError("is a period of a frequency that is not known")

    def made() -> pd.Period:
        found = pd.Period(ordinal=ordinal, freq=freq)
        # numbers that overflow wrap round to other dates
        if not 1 <= found.year <= 9999 or pd.Period(str(found).split("/")[0], freq=freq).ordinal != ordinal:
            raise ValueError
        return found

    return _tried(made, "period")


def _timestamp(text: str, zone: str | None) -> Any:
    if not _MOMENT.fullmatch(text) or not (zone is None or _ZONE.fullmatch(zone)):
        raise BadTagError("is no date and time that can be read")
    if zone is not None and zone.startswith(("dateutil", "tzlocal")):
        raise BadTagError("is in a time zone that has no name of its own")

    def made() -> pd.Timestamp:
        plain = pd.Timestamp(text)
        return plain if zone is None else plain.tz_localize("UTC").tz_convert(zone)

    return _tried(made, "date and time")


def _tried(make: Any, what: str) -> Any:
    """What is made from text of a record: whatever pandas thinks of it, nothing but a sentence comes out."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            found = make()
    except Exception:
        raise BadTagError(f"is no {what} that can be read") from None
    if found is pd.NaT:
        raise BadTagError(f"is no {what} that can be read")
    return found
