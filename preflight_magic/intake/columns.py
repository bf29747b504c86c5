"""From one column to one `TimeSeries`: numbers out of whatever pandas holds, and the problems of a single series."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from preflight_magic.intake.dates import short
from preflight_magic.intake.mend import REPAIRS, Mended
from preflight_magic.intake.written import reading
from preflight_magic.model import Calendar, CalendarKind, FillGaps, TimeSeries
from preflight_magic.stamps import counted, stamp_text

FEWEST_VALUES = 8
"""Fewest observed values from which anything is decided: common practice."""
LARGEST = 1e75
"""Size beyond which fourth powers leave the range of a double; its inverse is the smallest span."""
CYCLES = 2.5
"""Cycles that a season taken from the calendar needs: two to compare, and some more to tell chance from pattern."""
CYCLES_LONGER = 4.0
"""Cycles that each longer season of the calendar needs beside the shortest, such as four weeks of hours."""

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Options:
    """What was asked of every series: `season` (None infers), and the names of the repairs allowed."""

    season: tuple[int, ...] | None = None
    repairs: frozenset[str] = frozenset(REPAIRS)

    @property
    def fill_gaps(self) -> bool:
        """Whether missing values may be filled."""
        return "fill gaps" in self.repairs


@dataclass(frozen=True)
class Column:
    """Raw material of one series.

    Attributes
    ----------
    name : Hashable
    label : str
        What sentences call it: ``column 'freight'``.
    numbers : numpy.ndarray or None, shape (n,)
        None where the column holds no numbers; then `problem` says what it holds.
    problem : str or None
        Without the label and the final stop.
    """

    name: Hashable
    label: str
    numbers: Floats | None
    problem: str | None = None


def column(name: Hashable, label: str, values: pd.Series, code: str) -> Column:
    """Read the numbers of a column of any dtype; text, dates and the like become a problem.

    Parameters
    ----------
    name : Hashable
    label : str
    values : pandas.Series, shape (n,)
    code : str
        Expression for the column in the person's own table: ``frame['freight']``.
    """
    numbers, problem = _numbers(values, code)
    return Column(name, label, numbers, problem)


def _numbers(values: pd.Series, code: str) -> tuple[Floats | None, str | None]:
    dtype = values.dtype
    if pd.api.types.is_complex_dtype(dtype):
        return None, "complex numbers; take the real part or the modulus, for example with `.abs()`, or drop the column"
    if pd.api.types.is_numeric_dtype(dtype):
        if isinstance(dtype, np.dtype):
            return values.to_numpy(dtype=np.float64, copy=True), None
        if isinstance(dtype, pd.SparseDtype):
            return np.asarray(values.to_numpy(), dtype=np.float64).copy(), None
        return np.array(values.to_numpy(dtype=np.float64, na_value=np.nan)), None
    if pd.api.types.is_bool_dtype(dtype) and not isinstance(dtype, pd.CategoricalDtype):
        return np.array(values.to_numpy(dtype=np.float64, na_value=np.nan)), None
    if pd.api.types.is_object_dtype(dtype):
        return _objects(values, code)
    for test, what in (
        (pd.api.types.is_datetime64_any_dtype, "dates"),
        (pd.api.types.is_timedelta64_dtype, "lengths of time"),
    ):
        if test(dtype):
            return None, f"{what}, not numbers; drop the column, or pass it as `time` if it dates the rows"
    if isinstance(dtype, pd.PeriodDtype):
        return None, "periods, not numbers; drop the column, or pass it as `time` if it dates the rows"
    if isinstance(dtype, pd.CategoricalDtype):
        if pd.api.types.is_numeric_dtype(values.cat.categories.dtype):
            return None, f"categories{_example(values)}; read them as numbers with `{code} = {code}.astype(float)`"
        return None, f"categories{_example(values)}; drop the column, or pass it as `series` if it names the series"
    if pd.api.types.is_string_dtype(dtype):
        return None, f"text{_example(values)}; {reading(values.dropna(), code)}"
    return None, f"values of type {dtype}{_example(values)}; drop the column"


def _objects(values: pd.Series, code: str) -> tuple[Floats | None, str | None]:
    raw = values.to_numpy(dtype=object)
    # A signalling NaN of decimal cannot even be compared.
    seen = np.array([not (_no_number(one) or one is None or one is pd.NA or one is pd.NaT) for one in raw], dtype=bool)
    present = raw[seen]
    if any(isinstance(one, complex | np.complexfloating) for one in present):
        return None, "complex numbers; take the real part or the modulus, or drop the column"
    odd = next((one for one in present if not isinstance(one, _NUMBERS)), None)
    if odd is None:
        numbers = np.full(len(raw), np.nan)
        numbers[seen] = [_float(one) for one in present]
        return numbers, None
    if isinstance(odd, str):
        told = reading(pd.Series([str(one) for one in present]), code)
        return None, f"text, for example {short(odd)}; {told}"
    return None, f"values of type {type(odd).__name__}, for example {short(odd)}; drop the column"


# bool and numpy's bool are numbers here, as in a column of their own dtype.
_NUMBERS = (int, float, np.number, np.bool_, Decimal, Fraction)


def _no_number(value: object) -> bool:
    if isinstance(value, Decimal):
        return value.is_nan()
    return isinstance(value, float | np.floating) and bool(np.isnan(value))


def _float(value: Any) -> float:
    try:
        return float(value)
    except OverflowError:
        return np.inf if value > 0 else -np.inf


def _example(values: pd.Series) -> str:
    present = values.dropna()
    return f", for example {short(present.iloc[0])}" if len(present) else ""


def to_series(source: Column, mended: Mended, excluded: npt.NDArray[np.bool_] | None, options: Options) -> TimeSeries:
    """Trim a column to its observed span and say what season it has, or why it cannot be checked.

    Parameters
    ----------
    source : Column
    mended : Mended
        The regular index, shape (n,), and what made it regular.
    excluded : numpy.ndarray of bool or None, shape (n,)
        True where the values are to be treated as missing.
    options : Options
    """
    calendar, index = mended.calendar, mended.index
    if source.numbers is None:
        return refused(source.name, source.label, source.problem or "no numbers", calendar)
    numbers = source.numbers if excluded is None else np.where(excluded, np.nan, source.numbers)
    finite = np.isfinite(numbers)
    observed = int(np.count_nonzero(finite))
    if observed < len(numbers):
        infinite = _infinite(numbers, index, calendar.kind)
        if infinite is not None:
            return refused(source.name, source.label, infinite, calendar)
        if not observed:
            return refused(source.name, source.label, "no value is observed; drop the column", calendar)
        first, last = int(finite.argmax()), len(finite) - int(finite[::-1].argmax())
        numbers, index = numbers[first:last], index[first:last]
    values = pd.Series(numbers, index=index, name=source.name, copy=False)
    problem = (
        _out_of_scale(values)
        or _too_little(values, observed, calendar.kind)
        or _bad_season(values, options.season)
        or _forbidden_gap(values, observed, calendar.kind, options)
    )
    if problem is not None:
        return refused(source.name, source.label, problem, calendar, values)
    season, notes = (options.season, ()) if options.season else _natural_season(calendar, observed)
    filled = (FillGaps(season[0]),) if observed < len(numbers) else ()
    return TimeSeries(source.name, values, calendar, season, (*mended.repairs, *filled), None, notes)


def refused(
    name: Hashable, label: str, problem: str, calendar: Calendar | None = None, values: pd.Series | None = None
) -> TimeSeries:
    """Series that cannot be checked; `problem` lacks the label and the final stop."""
    values = pd.Series([], dtype=np.float64, name=name) if values is None else values
    return TimeSeries(name, values, calendar, problem=f"{label}: {problem}.")


def _infinite(numbers: Floats, index: pd.Index, kind: CalendarKind) -> str | None:
    infinite = np.flatnonzero(np.isinf(numbers))
    if not infinite.size:
        return None
    found = f"{counted(int(infinite.size), 'infinite value')}, the first at {stamp_text(index[infinite[0]], kind)}"
    cure = "it with a missing value" if infinite.size == 1 else "them with missing values"
    return f"{found}; replace {cure} (NaN) or drop the column"


def _out_of_scale(values: pd.Series) -> str | None:
    """Numbers whose powers a computer cannot hold."""
    numbers = values.to_numpy()
    low, high = float(np.nanmin(numbers)), float(np.nanmax(numbers))
    largest = max(abs(low), abs(high))
    if largest > LARGEST:
        return f"values up to {largest:.3g} in size, too large to compute with; divide the column by a power of ten"
    if 0.0 < high - low < 1.0 / LARGEST:
        return f"values that span {high - low:.3g}, too little to compute with; multiply the column by a power of ten"
    return None


def _forbidden_gap(values: pd.Series, observed: int, kind: CalendarKind, options: Options) -> str | None:
    if options.fill_gaps or observed == len(values):
        return None
    first = stamp_text(values.index[int(np.isnan(values.to_numpy()).argmax())], kind)
    return (
        f"{counted(len(values) - observed, 'value')} missing, the first at {first}, and repair does not allow filling; "
        "allow it with repair=True or fill the values first"
    )


def _too_little(values: pd.Series, observed: int, kind: CalendarKind) -> str | None:
    numbers = values.to_numpy()
    # The first value is observed, so missing values never equal it.
    constant = int(np.count_nonzero(numbers == numbers[0])) == observed
    lacking = observed < FEWEST_VALUES
    if not lacking and not constant:
        return None
    first, last = (stamp_text(stamp, kind) for stamp in (values.index[0], values.index[-1]))
    if lacking:
        span = f"from {first} to {last}" if observed > 1 else f"at {first}"
        return (
            f"only {counted(observed, 'value')}, {span}, where at least {FEWEST_VALUES} are needed; give a longer "
            "series or drop the column"
        )
    value = numbers[0] + 0.0  # no negative zero
    return f"one value only, {value:g} from {first} to {last}, so there is nothing to decide; drop the column"


def _bad_season(values: pd.Series, season: tuple[int, ...] | None) -> str | None:
    longest = season[-1] if season else 1
    if longest <= len(values):
        return None
    return (
        f"{len(values)} values do not hold one cycle of season={longest}; give at least {2 * longest} values, a "
        "shorter season, or season=1 for none"
    )


def _natural_season(calendar: Calendar, observed: int) -> tuple[tuple[int, ...], tuple[str, ...]]:
    """Seasons of the calendar that the series is long enough to show, and a note where it shows none."""
    if not calendar.seasons:
        return (1,), ()
    shortest, *longer = calendar.seasons
    if observed < CYCLES * shortest:
        note = (
            f"{observed} values show no season of {shortest}, which takes {int(np.ceil(CYCLES * shortest))}; the "
            f"series is read without one, unless season={shortest} is given."
        )
        return (1,), (note,)
    return (shortest, *(one for one in longer if observed >= CYCLES_LONGER * one)), ()
