"""What the person passed, options checked, to series."""

from __future__ import annotations

import operator
from collections.abc import Hashable, Iterable, Mapping, Sequence
from typing import Any

import numpy as np
import pandas as pd

from preflight_magic.intake.columns import Options
from preflight_magic.intake.dates import short
from preflight_magic.intake.mend import REPAIRS
from preflight_magic.intake.spans import Span, spans_of
from preflight_magic.intake.tables import long_table, wide_table
from preflight_magic.model import CheckError, TimeSeries


def read(
    frame: Any,
    *,
    season: int | Sequence[int] | None = None,
    time: Hashable | None = None,
    series: Hashable | None = None,
    value: Hashable | None = None,
    only: Hashable | Iterable[Hashable] | None = None,
    exclude: Iterable[Span] | None = None,
    repair: bool | str | Iterable[str] = True,
) -> tuple[TimeSeries, ...]:
    """Read the series of a table.

    Parameters
    ----------
    frame : pandas.DataFrame, pandas.Series, or anything with ``to_pandas``
        Wide: a column a series, the time in the index. Long: `time`, `series` and `value` name the columns.
    season : int or sequence of int, optional
        Seasonal periods in steps; 1 for none. By default those of the calendar that the series is long enough for.
    time, series, value : Hashable, optional
        Columns with the dates, with the name of the series, with the values.
    only : Hashable or iterable of Hashable, optional
        Names of the series to read.
    exclude : iterable of (start, end), optional
        Spans, both ends included, to treat as missing.
    repair : bool, str or iterable of str
        Repairs allowed: all, none, or those named: ``read dates``, ``sort``, ``merge duplicates``,
        ``regular calendar``, ``fill gaps``.

    Returns
    -------
    tuple of TimeSeries
        In the order of the table; those that cannot be checked carry a `problem`.

    Raises
    ------
    CheckError
        Where nothing can be checked: no table, an irregular index, a wrong option, no usable series.
    """
    table = _table(frame)
    spans = spans_of(exclude)
    options = Options(season_of(season), _allowed(repair))
    if spans and not options.fill_gaps:
        raise CheckError(
            "exclude leaves gaps, and repair does not allow filling them; drop exclude, or use repair=True."
        )
    if series is None:
        found = wide_table(table, options, spans, time, value, only)
    else:
        if isinstance(table, pd.Series):
            raise CheckError("a Series holds one series; leave out `series`, or pass the whole DataFrame.")
        found = long_table(table, options, spans, time, series, value, only)
    if all(one.problem is not None for one in found):
        raise CheckError(_nothing_usable([one.problem or "" for one in found]))
    return found


def _nothing_usable(problems: list[str]) -> str:
    if len(problems) == 1:
        return problems[0]
    shown = "; ".join(problem.rstrip(".") for problem in problems[:3])
    more = f"; and {len(problems) - 3} more" if len(problems) > 3 else ""
    return f"none of the {len(problems)} series can be checked: {shown}{more}."


# ------------------------------------------------------------------------------------------------------- options
def _table(frame: Any) -> pd.DataFrame | pd.Series:
    if not isinstance(frame, pd.DataFrame | pd.Series) and callable(getattr(frame, "to_pandas", None)):
        kind = type(frame).__name__
        try:
            frame = frame.to_pandas()
        except Exception as error:
            raise CheckError(
                f"to_pandas of the {kind} failed with {type(error).__name__}, {short(str(error))}; convert it to a "
                "DataFrame first."
            ) from error
    if callable(getattr(frame, "collect", None)) and not hasattr(frame, "iloc"):
        raise CheckError(f"found {type(frame).__name__!r}, which is not computed yet; pass `frame.collect()`.")
    if not isinstance(frame, pd.DataFrame | pd.Series):
        raise CheckError(
            f"found {type(frame).__name__!r} where a DataFrame or Series is needed; wrap it, for example with "
            "`pd.Series(values, index=pd.period_range('2015-01', periods=len(values), freq='M'))`."
        )
    if not len(frame) or (isinstance(frame, pd.DataFrame) and not frame.shape[1]):
        what = "rows" if not len(frame) else "columns"
        raise CheckError(f"the table has no {what}; pass one with a column a series and a row a date.")
    return frame


def season_of(season: Any) -> tuple[int, ...] | None:
    """Seasonal periods as asked for, shortest first; ``(1,)`` for none, None where they are to be inferred."""
    if season is None:
        return None
    single = isinstance(season, str | bytes | Mapping) or not isinstance(season, Iterable)
    try:
        given = [season] if single else list(season)
    except TypeError:  # an array without dimension
        given = [season]
    try:
        whole = sorted({operator.index(one) for one in given if not isinstance(one, bool | np.bool_)})
    except TypeError:
        whole = []
    if not whole or whole[0] < 1 or any(isinstance(one, bool | np.bool_) for one in given):
        raise CheckError(
            f"season={season!r} is not a whole number of steps from 1 up, nor a tuple of them; give for example "
            "season=12 for months, or season=1 for none."
        )
    return tuple(one for one in whole if one > 1) or (1,)


def _allowed(repair: Any) -> frozenset[str]:
    """Names of the repairs that may be made."""
    if isinstance(repair, bool | np.bool_):
        return frozenset(REPAIRS if repair else ())
    try:
        names = [repair] if isinstance(repair, str) else list(repair)
    except TypeError:
        names = [repair]
    unknown = [name for name in names if not isinstance(name, str) or name not in REPAIRS]
    if unknown:
        raise CheckError(
            f"repair names {short(unknown[0])}, which is none of the repairs {', '.join(map(repr, REPAIRS))}; name one "
            "of those, or give True or False."
        )
    return frozenset(names)
