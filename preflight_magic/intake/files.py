"""Tables from files, for checks outside a notebook."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import pandas as pd

from preflight_magic.model import CheckError

# From 3.1 on numbers are always read exactly, and the option is deprecated.
_EXACT: dict[str, Any] = (
    {} if tuple(map(int, pd.__version__.split(".")[:2])) >= (3, 1) else {"float_precision": "round_trip"}
)
_QUARTER = re.compile(r"\d{4}-?Q[1-4]")


def read_table(path: Path, *, time: str | None = None, long: bool = False) -> pd.DataFrame:
    """Read a CSV or Parquet file with its dates as dates.

    Parameters
    ----------
    path : Path
        ``.csv``, also compressed as ``.csv.gz`` and the like, or ``.parquet``.
    time : str, optional
        Column with the dates; by default the first column of a CSV file, and in a Parquet file the index or else the
        first column of dates.
    long : bool
        Leave the dates in their column, as a long table needs them.

    Returns
    -------
    DataFrame
        With the dates in the index, unless `long`.

    Raises
    ------
    CheckError
        For a file that holds no table, or dates that are not written as such.
    OSError
        For a file that cannot be read.
    """
    kinds = [suffix.lower() for suffix in path.suffixes]
    where: str | None
    if ".csv" in kinds[-2:]:
        frame = _read_csv(path)
        where = time if time is not None else str(frame.columns[0])
    elif kinds[-1:] == [".parquet"]:
        frame = _read_parquet(path)
        where = time if time is not None else _first_dates(frame)
    else:
        raise CheckError(f"'{path.name}' is neither .csv nor .parquet; save the table as one of them.")
    if where is None:
        return frame
    if where not in frame.columns:
        shown = ", ".join(repr(name) for name in frame.columns[:5])
        raise CheckError(f"'{path.name}' has no column {where!r}; it has {shown}.")
    stamps = _stamps(frame[where], path)
    if long:
        return frame.assign(**{where: stamps}) if time is not None else frame.drop(columns=where).set_axis(stamps)
    return frame.drop(columns=where).set_axis(stamps)


def _read_csv(path: Path) -> pd.DataFrame:
    try:
        _refuse_other_separators(path)
        frame: pd.DataFrame = pd.read_csv(path, low_memory=False, **_EXACT)
    except CheckError:
        raise
    except (ValueError, pd.errors.ParserError) as error:
        raise CheckError(f"'{path.name}' cannot be read as CSV ({_first_line(error)}); save it again as CSV.") from None
    if frame.shape[1] < 2:
        raise CheckError(f"'{path.name}' has {frame.shape[1]} column; a column of dates and one of values are needed.")
    return frame


def _refuse_other_separators(path: Path) -> None:
    """Say what stands between the columns, where it is no comma: numbers with a decimal comma would be torn apart."""
    first = str(next(iter(pd.read_csv(path, nrows=0).columns), ""))
    for mark, noun in ((";", "semicolons"), ("\t", "tabs")):
        if mark in first:
            raise CheckError(
                f"'{path.name}' has {noun} between its columns; save it with commas and decimal points, as from "
                f"pd.read_csv({path.name!r}, sep={mark!r}, decimal=',')."
            )


def _read_parquet(path: Path) -> pd.DataFrame:
    path.open("rb").close()
    try:
        return pd.read_parquet(path)
    except ImportError:
        raise CheckError(f"'{path.name}' needs pyarrow, which is not installed; install it, or save as CSV.") from None
    except Exception as error:
        told = _first_line(error)
        raise CheckError(f"'{path.name}' cannot be read as Parquet ({told}); save it again as Parquet.") from None


def _first_dates(frame: pd.DataFrame) -> str | None:
    if isinstance(frame.index, pd.DatetimeIndex | pd.PeriodIndex):
        return None
    dated = [name for name in frame.columns if pd.api.types.is_datetime64_any_dtype(frame[name].dtype)]
    return dated[0] if dated else None


def _stamps(column: pd.Series, path: Path) -> pd.Index:
    """Dates of a column of text; dates and numbers stay what they are."""
    if pd.api.types.is_datetime64_any_dtype(column.dtype) or pd.api.types.is_integer_dtype(column.dtype):
        return pd.Index(column.array)  # type: ignore[no-any-return]
    text = column.astype("string")
    odd = next((value for value in text if pd.isna(value)), None)
    if odd is not None or not len(text):
        raise CheckError(f"column {column.name!r} of '{path.name}' has rows without a date; drop or complete them.")
    if text.map(lambda value: bool(_QUARTER.fullmatch(value))).all():
        return pd.PeriodIndex(text.str.replace("-", "").tolist(), freq="Q")
    try:
        return pd.DatetimeIndex(pd.to_datetime(text, format="ISO8601"))
    except ValueError:
        pass
    bad = next(value for value in text if _not_a_date(value))
    raise CheckError(
        f"column {column.name!r} of '{path.name}' holds {bad[:40]!r}, which is no date written as 2024-12-31; write "
        "the dates so, or name another column with --time."
    )


def _not_a_date(value: str) -> bool:
    try:
        pd.to_datetime(value, format="ISO8601")
    except ValueError:
        return True
    return False


def _first_line(error: Exception) -> str:
    return (str(error).strip().splitlines() or [type(error).__name__])[0].rstrip(".")[:120]
