"""Stamps that are text, numbers or date objects: read as dates, or refused with the code that reads them."""

from __future__ import annotations

import datetime
import re
from collections.abc import Hashable, Iterable

import numpy as np
import pandas as pd

from preflight_magic.model import CheckError

_ISO = re.compile(r"\d{4}-\d{2}(-\d{2}([T ]\d{2}:\d{2}(:\d{2}(\.\d{1,9})?)?)?)?Z?")
_OFFSET = re.compile(r"\d{4}-\d{2}-\d{2}[T ][\d:.]+[+-]\d{2}:?\d{2}")
_QUARTER = re.compile(r"\d{4}-?[Qq][1-4]")
_DAY_OR_MONTH = re.compile(r"(\d{1,2})([/.-])(\d{1,2})\2(\d{4}|\d{2})")
_WHOLE = re.compile(r"[+-]?\d{1,18}")


def plain(index: pd.Index) -> pd.Index:
    """Index of the types that NumPy knows: dates of Arrow become dates of pandas."""
    if isinstance(index.dtype, pd.ArrowDtype) and index.dtype.kind == "M":
        return pd.DatetimeIndex(index)
    return index


def readable(index: pd.Index) -> pd.Index | None:
    """Dates of an index that holds them as text in ISO form or as objects; None where it holds anything else.

    Parameters
    ----------
    index : pandas.Index, shape (n,)

    Returns
    -------
    pandas.DatetimeIndex or None
        Missing stamps stay missing.
    """
    if isinstance(index, pd.MultiIndex) or not _wordy(index):
        return None
    present = index[index.notna()]
    text = all(isinstance(one, str) and _ISO.fullmatch(one) for one in present)
    if not len(present) or not (text or all(isinstance(one, datetime.date | np.datetime64) for one in present)):
        return None
    try:
        found = pd.to_datetime(index, format="ISO8601")
    except (ValueError, TypeError):
        return None
    return found if isinstance(found, pd.DatetimeIndex) else None


def _wordy(index: pd.Index) -> bool:
    return (
        pd.api.types.is_object_dtype(index.dtype)
        or pd.api.types.is_string_dtype(index.dtype)
        or isinstance(index.dtype, pd.CategoricalDtype)
    )


def refusal(index: pd.Index, stamps: str, multiple: str) -> CheckError:
    """Error for an index without dates, periods or whole numbers, with the code that makes it one of them.

    Parameters
    ----------
    index : pandas.Index, shape (n,)
    stamps : str
        Expression for the stamps in the person's own table: ``frame.index``.
    multiple : str
        Expression for a table whose index has one level, where this one has several.
    """
    if isinstance(index, pd.MultiIndex):
        return CheckError(
            f"the index has {index.nlevels} levels where one of dates is needed; make them columns with `{multiple}` "
            "and name the time, series and value columns."
        )
    shown = next((one for one in index if not _missing(one)), None)
    first = "" if shown is None else f", beginning with {short(shown)}"
    start = f"the index holds {_what(index)}{first}, where dates, periods or whole numbers are needed; "
    cure = _numbers_cure(index, stamps) if index.inferred_type.endswith("floating") else _cure(index, stamps)
    return CheckError(start + cure)


def _what(index: pd.Index) -> str:
    kind = str(index.inferred_type)
    return {"string": "text", "floating": "numbers with decimals", "boolean": "true or false"}.get(
        kind, f"{kind} values"
    )


def _missing(value: Hashable) -> bool:
    return value is None or bool(np.ndim(pd.isna(value)) == 0 and pd.isna(value))  # type: ignore[call-overload]


def short(value: object) -> str:
    """Value as it is written in code, on one line and cut where it is long."""
    if isinstance(value, np.generic):
        value = value.item()
    text = value if isinstance(value, str) else repr(value)
    text = " ".join("".join(c if c.isprintable() else " " for c in text).split())
    text = text if len(text) <= 40 else text[:37] + "..."
    return repr(text) if isinstance(value, str) else text


def _numbers_cure(index: pd.Index, stamps: str) -> str:
    numbers = index.to_numpy(dtype=np.float64, na_value=np.nan)
    if np.isfinite(numbers).all() and (numbers == np.rint(numbers)).all():
        return f"convert it with `{stamps} = {stamps}.astype(int)`."
    return f"number the rows with `{stamps} = range(len({stamps}))` and give the season, for example season=1 for none."


def _cure(index: pd.Index, stamps: str) -> str:
    texts = [one for one in index if isinstance(one, str)]
    number = f"number the rows with `{stamps} = range(len({stamps}))` and give the season, for example season=1."
    if not texts or len(texts) < len(index) - np.count_nonzero(index.isna()):
        if any(isinstance(one, datetime.date) for one in index):
            return f"convert it with `{stamps} = pd.to_datetime({stamps}, utc=True)`."
        return f"put the dates there, or {number}"
    if all(_ISO.fullmatch(one) for one in texts):
        return f"convert it with `{stamps} = pd.to_datetime({stamps}, format='ISO8601')`."
    if all(_OFFSET.fullmatch(one) or _ISO.fullmatch(one) for one in texts):
        return f"convert it with `{stamps} = pd.to_datetime({stamps}, utc=True)`."
    if all(_QUARTER.fullmatch(one) for one in texts):
        return f"convert it with `{stamps} = pd.PeriodIndex({stamps}, freq='Q')`."
    if all(_WHOLE.fullmatch(one) for one in texts):
        return f"convert it with `{stamps} = {stamps}.astype(int)`."
    parts = [_DAY_OR_MONTH.fullmatch(one) for one in texts]
    if all(parts):
        return _day_or_month([part for part in parts if part is not None], stamps)
    return f"give pd.to_datetime its format where it is a date, or else {number}"


def _day_or_month(parts: list[re.Match[str]], stamps: str) -> str:
    mark, year = parts[0][2], "%Y" if len(parts[0][4]) == 4 else "%y"
    days, months = (f"%d{mark}%m{mark}{year}", f"%m{mark}%d{mark}{year}")
    code = f"`{stamps} = pd.to_datetime({stamps}, format='{{}}')`"
    if any(int(part[1]) > 12 for part in parts):
        return f"convert it with {code.format(days)}."
    if any(int(part[3]) > 12 for part in parts):
        return f"convert it with {code.format(months)}."
    return f"say whether the day or the month comes first, for example with {code.format(days)}."


def written_as_number(numbers: Iterable[int]) -> str | None:
    """Format of whole numbers that write dates, such as ``%Y%m`` for 202403; None where they are plain numbers."""
    values = [int(one) for one in numbers]
    for form, size, day in (("%Y%m", 100, False), ("%Y%m%d", 10000, True)):
        years = [one // size for one in values]
        months = [one // (100 if day else 1) % 100 for one in values]
        days = [one % 100 if day else 1 for one in values]
        sound = all(1600 <= year <= 2400 for year in years) and all(1 <= month <= 12 for month in months)
        if sound and all(1 <= one <= 31 for one in days):
            return form
    return None
