"""Wide tables, a column a series, and long tables, a row an observation, to series."""

from __future__ import annotations

import difflib
from collections.abc import Hashable, Iterable
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.intake.columns import FEWEST_VALUES, Column, Options, column, refused, to_series
from preflight_magic.intake.dates import plain, readable, refusal
from preflight_magic.intake.mend import Mended, mend
from preflight_magic.intake.remedies import Remedies
from preflight_magic.intake.spans import Span, excluded, refuse_empty_spans
from preflight_magic.model import CheckError, ReadDates, TimeSeries
from preflight_magic.stamps import counted


# -------------------------------------------------------------------------------------------------- wide tables
def wide_table(
    table: pd.DataFrame | pd.Series,
    options: Options,
    spans: tuple[Span, ...],
    time: Hashable | None,
    value: Hashable | None,
    only: Any,
) -> tuple[TimeSeries, ...]:
    """Read a column a series; `time` names the column of the dates where they are not the index."""
    base = "series" if isinstance(table, pd.Series) else "frame"
    remedies = Remedies(
        base,
        f"{base}.index",
        f"{base} = {base}[{base}.index.notna()]",
        f"{base} = {base}.sort_index()",
        f"{base} = {base}[~{base}.index.duplicated()]",
        f"merge them with `{base} = {base}.groupby(level=0).sum()`, or mean() where they are levels",
    )
    if isinstance(table, pd.Series):
        if time is not None or value is not None:
            raise CheckError("a Series has no columns; leave out `time` and `value`, or pass the whole DataFrame.")
        table = table.to_frame("series" if table.name is None else table.name)
    elif time is not None:
        remedies = Remedies(
            f"frame.set_index({time!r})",
            f"frame[{time!r}]",
            f"frame = frame.dropna(subset=[{time!r}])",
            f"frame = frame.sort_values({time!r})",
            f"frame = frame.drop_duplicates({time!r})",
            f"merge them with `frame = frame.groupby({time!r}, as_index=False).sum()`, or mean() where they are levels",
            " and leave out time",
        )
        at = _position(table, time, "time")
        table = table.drop(columns=[time]).set_axis(pd.Index(table.iloc[:, at]), axis=0)
    if value is not None:
        _position(table, value, "value")
        only = [value]
    labels: list[Hashable] = list(table.columns)
    names = _chosen(labels, only)
    if len(table) < FEWEST_VALUES:
        raise CheckError(
            f"the table has {counted(len(table), 'row')}, where at least {FEWEST_VALUES} are "
            "needed; give longer series."
        )
    _refuse_plain_numbers(table, table.index, options)
    mended = mend(table.index, remedies, options.repairs)
    mask, held = excluded(mended.index, spans)
    refuse_empty_spans(spans, [held])
    columns = (_laid(one, mended, remedies) for one in _columns(table, labels, names, base))
    return tuple(to_series(one, mended, mask, options) for one in columns)


def _laid(source: Column, mended: Mended, remedies: Remedies) -> Column:
    """The column on the regular index."""
    if source.numbers is None or mended.place is None:
        return source
    numbers, problem = mended.lay(source.numbers, remedies)
    return replace(source, numbers=None if problem else numbers, problem=problem)


def _columns(table: pd.DataFrame, labels: list[Hashable], names: list[Hashable], base: str) -> list[Column]:
    """Raw material of the named columns, a repeated name once."""
    positions: dict[Hashable, list[int]] = {}
    for i, name in enumerate(labels):
        positions.setdefault(name, []).append(i)
    plain = [i for i, dtype in enumerate(table.dtypes) if isinstance(dtype, np.dtype) and dtype.kind in "fiub"]
    # One conversion for all plain columns is far quicker than one each; a copy, never a view of the table.
    matrix = np.array(table.iloc[:, plain].to_numpy(dtype=np.float64), order="F", copy=True)
    place = {at: i for i, at in enumerate(plain)}
    found = []
    for name in names:
        label, at = f"column {name!r}", positions[name]
        if len(at) > 1:
            problem = f"{len(at)} columns have this name; rename them, for example with `frame.columns = [...]`"
            found.append(Column(name, label, None, problem))
        elif at[0] in place:
            found.append(Column(name, label, matrix[:, place[at[0]]]))
        else:
            code = base if base == "series" else f"frame[{name!r}]"
            found.append(column(name, label, table.iloc[:, at[0]], code))
    return found


def _refuse_plain_numbers(table: pd.DataFrame, stamps: pd.Index, options: Options) -> None:
    """Rows that are only numbered have no calendar, so the season must be told."""
    if options.season is not None or not pd.api.types.is_integer_dtype(stamps.dtype):
        return
    dated = [
        name
        for name, dtype in zip(table.columns, table.dtypes, strict=True)
        if pd.api.types.is_datetime64_any_dtype(dtype) or isinstance(dtype, pd.PeriodDtype)
    ]
    if dated:
        raise CheckError(
            f"the rows are numbered from {stamps[0]}, and column {dated[0]!r} holds the dates; pass time={dated[0]!r}."
        )
    raise CheckError(
        f"the rows are numbered from {stamps[0]}, which tells no calendar; give the season, for example 12 for months "
        "or 1 for none, or make the dates the index."
    )


def _position(table: pd.DataFrame, name: Hashable, option: str) -> int:
    found = [i for i, one in enumerate(table.columns) if one == name]
    if len(found) != 1:
        what = "no column has that name" if not found else f"{len(found)} columns have that name"
        raise CheckError(f"{option}={name!r}, but {what}; {_name_one_of(list(table.columns), name)}")
    return found[0]


def _chosen(names: list[Hashable], only: Any) -> list[Hashable]:
    """Names to read, each once, in the order asked for or else that of the table."""
    known = dict.fromkeys(names)
    if only is None:
        return list(known)
    single = isinstance(only, str) or not isinstance(only, Iterable) or (isinstance(only, tuple) and only in known)
    try:
        wanted: dict[Hashable, None] = dict.fromkeys([only] if single else only)
    except TypeError as error:
        raise CheckError(f"only={only!r} holds what cannot be a name; {_name_one_of(list(known), None)}") from error
    if not wanted:
        raise CheckError(f"only is empty; {_name_one_of(list(known), None)}")
    for name in wanted:
        if name not in known:
            raise CheckError(f"only names {name!r}, which is not there; {_name_one_of(list(known), name)}")
    return list(wanted)


def _name_one_of(names: list[Hashable], near: Hashable) -> str:
    close = difflib.get_close_matches(str(near), [str(name) for name in names], n=1)
    if close:
        return f"did you mean {next(name for name in names if str(name) == close[0])!r}?"
    shown = ", ".join(repr(name) for name in names[:5])
    more = f" and {len(names) - 5} more" if len(names) > 5 else ""
    return f"name one of {shown}{more}."


# -------------------------------------------------------------------------------------------------- long tables
def long_table(
    table: pd.DataFrame,
    options: Options,
    spans: tuple[Span, ...],
    time: Hashable | None,
    series: Hashable,
    value: Hashable | None,
    only: Any,
) -> tuple[TimeSeries, ...]:
    """Group by name without pivoting, so that groups may have different spans."""
    keys = table.iloc[:, _position(table, series, "series")]
    source = _value_column(table, [series, time], value)
    if source.numbers is None:
        raise CheckError(f"{source.label}: {source.problem}.")
    remedies = _long_remedies(time, series, source.name)
    stamps = plain(table.index if time is None else pd.Index(table.iloc[:, _position(table, time, "time")]))
    _refuse_plain_numbers(table, stamps, options)
    dates = readable(stamps)
    if isinstance(stamps, pd.MultiIndex) or (dates is not None and "read dates" not in options.repairs):
        raise refusal(stamps, remedies.stamps, "frame.reset_index()")
    stamps = stamps if dates is None else dates
    codes, uniques = pd.factorize(keys)
    nameless = np.flatnonzero(codes < 0)
    if nameless.size:
        raise CheckError(
            f"column {series!r} names no series in {counted(int(nameless.size), 'row')}, the first "
            f"in row {nameless[0] + 1}; drop such rows with `frame.dropna(subset=[{series!r}])`."
        )
    names = pd.Index(uniques).tolist()
    order = np.argsort(codes, kind="stable")
    edges = np.concatenate([[0], np.cumsum(np.bincount(codes, minlength=len(names)))])
    stamps, numbers = stamps.take(order), source.numbers[order]
    calendars = _Calendars(remedies, spans, options.repairs, dates is not None)
    found: list[TimeSeries] = []
    held: list[list[bool]] = []
    at = {name: i for i, name in enumerate(names)}
    for name in _chosen(names, only):
        rows = slice(edges[at[name]], edges[at[name] + 1])
        one = Column(name, f"series {name!r}", numbers[rows])
        found.append(_group(one, stamps[rows], calendars, options, held))
    refuse_empty_spans(spans, held)
    return tuple(found)


@dataclass
class _Calendars:
    """Calendars of the groups of a long table: most groups share their stamps, so each index is recognised once."""

    remedies: Remedies
    spans: tuple[Span, ...]
    repairs: frozenset[str]
    read_dates: bool
    known: dict[tuple[Hashable, ...], tuple[Mended, npt.NDArray[np.bool_] | None, list[bool]] | str] = field(
        default_factory=dict
    )

    def of(self, stamps: pd.Index) -> tuple[Mended, npt.NDArray[np.bool_] | None, list[bool]] | str:
        """The mended index, the excluded stamps and which spans are held; or why there is no calendar."""
        numbers = stamps.asi8 if isinstance(stamps, pd.DatetimeIndex | pd.PeriodIndex) else stamps.to_numpy()
        key = (numbers.tobytes(),) if numbers.dtype != object else tuple(map(repr, numbers))
        if key not in self.known:
            try:
                mended = mend(stamps, self.remedies, self.repairs)
                if self.read_dates:
                    mended = replace(mended, repairs=(ReadDates(), *mended.repairs))
                self.known[key] = (mended, *excluded(mended.index, self.spans))
            except CheckError as error:
                self.known[key] = str(error)
        return self.known[key]


def _group(
    source: Column, stamps: pd.Index, calendars: _Calendars, options: Options, held: list[list[bool]]
) -> TimeSeries:
    if len(stamps) < FEWEST_VALUES:
        rows = counted(len(stamps), "row")
        return refused(
            source.name, source.label, f"only {rows}, where at least {FEWEST_VALUES} are needed; give a longer series"
        )
    found = calendars.of(stamps)
    if isinstance(found, str):
        return refused(source.name, source.label, found.rstrip("."))
    mended, mask, hits = found
    held.append(hits)
    return to_series(_laid(source, mended, calendars.remedies), mended, mask, options)


def _value_column(table: pd.DataFrame, taken: list[Hashable], value: Hashable | None) -> Column:
    if value is None:
        rest = [i for i, name in enumerate(table.columns) if name not in taken]
        rest = [i for i in rest if pd.api.types.is_numeric_dtype(table.dtypes.iloc[i])]
        if len(rest) != 1:
            names: list[Hashable] = [table.columns[i] for i in rest] or list(table.columns)
            raise CheckError(
                f"{len(rest) or 'no'} columns could hold the values of the series; pass value= and "
                f"{_name_one_of(names, '')}"
            )
        at = rest[0]
    else:
        at = _position(table, value, "value")
    name = table.columns[at]
    return column(name, f"column {name!r}", table.iloc[:, at], f"frame[{name!r}]")


def _long_remedies(time: Hashable | None, series: Hashable, value: Hashable) -> Remedies:
    sums = "sum()`, or mean() where they are levels"
    if time is None:
        return Remedies(
            f"frame.pivot(columns={series!r}, values={value!r})",
            "frame.index",
            "frame = frame[frame.index.notna()]",
            "frame = frame.sort_index()",
            f"frame = frame[~frame.set_index({series!r}, append=True).index.duplicated()]",
            f"merge them with `frame.set_index({series!r}, append=True).groupby(level=[0, 1]).{sums}",
            " and pass that wide table",
        )
    return Remedies(
        f"frame.pivot(index={time!r}, columns={series!r}, values={value!r})",
        f"frame[{time!r}]",
        f"frame = frame.dropna(subset=[{time!r}])",
        f"frame = frame.sort_values([{series!r}, {time!r}])",
        f"frame = frame.drop_duplicates([{series!r}, {time!r}])",
        f"merge them with `frame = frame.groupby([{series!r}, {time!r}], as_index=False).{sums}",
        " and pass that wide table",
    )
