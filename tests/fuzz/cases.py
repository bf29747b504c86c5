"""Tables, options and plans to throw at the package: each case is a few plain values, so that its repr repeats it."""

from __future__ import annotations

import decimal
from collections.abc import Callable, Hashable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pandas as pd
from hypothesis import strategies as st

Array = np.ndarray


@dataclass(frozen=True)
class Column:
    """One column: a kind of values, and what is done to them."""

    kind: str = "walk"
    seed: int = 0
    scale: float = 1.0
    offset: float = 0.0
    gaps: str = "none"
    odd: str = "none"
    dtype: str = "float64"


@dataclass(frozen=True)
class Case:
    """A table and the options it is checked with."""

    n: int = 40
    index: str = "MS"
    mess: tuple[str, ...] = ()
    names: tuple[Hashable, ...] = ("a",)
    columns: tuple[Column, ...] = (Column(),)
    form: str = "wide"
    options: tuple[tuple[str, Any], ...] = ()
    seed: int = field(default=0)

    def frame(self) -> Any:
        """The table, made anew."""
        index = make_index(self.index, self.n)
        parts = [values_of(column, self.n) for column in self.columns]
        frame = pd.concat([pd.Series(part) for part in parts], axis=1) if parts else pd.DataFrame(index=range(self.n))
        frame.columns = pd.Index(list(self.names[: len(parts)]), tupleize_cols=False, dtype=object)
        frame = frame.set_axis(index, axis=0)
        for what in self.mess:
            frame = MESSES[what](frame, np.random.default_rng(self.seed))
        return FORMS[self.form](frame)


# ---------------------------------------------------------------------------------------------------------- values
def _walk(rng: np.random.Generator, n: int) -> Array:
    return 50.0 + np.cumsum(rng.standard_normal(n))


KINDS: dict[str, Callable[[np.random.Generator, int], Array]] = {
    "walk": _walk,
    "noise": lambda rng, n: rng.standard_normal(n),
    "season": lambda rng, n: 20 + 5 * np.sin(np.arange(n) * np.pi / 6) + rng.standard_normal(n),
    "growth": lambda rng, n: np.exp(0.05 * np.arange(n) + 0.1 * rng.standard_normal(n)),
    "twice integrated": lambda rng, n: np.cumsum(np.cumsum(rng.standard_normal(n))),
    "counts": lambda rng, n: rng.poisson(3, n).astype(float),
    "rare counts": lambda rng, n: rng.poisson(0.2, n).astype(float),
    "intermittent": lambda rng, n: np.where(rng.random(n) < 0.25, rng.integers(1, 30, n), 0).astype(float),
    "shares": lambda rng, n: np.clip(rng.normal(0.8, 0.3, n), 0, 1),
    "constant": lambda rng, n: np.full(n, 7.0),
    "mostly one value": lambda rng, n: np.where(rng.random(n) < 0.9, 5.0, rng.normal(5, 2, n)),
    "quantised": lambda rng, n: np.round(_walk(rng, n) * 2) / 2,
    "steps": lambda rng, n: np.repeat(rng.standard_normal(n // 8 + 1), 8)[:n],
    "line": lambda rng, n: 3.0 + 2.0 * np.arange(n),
    "parabola": lambda rng, n: np.arange(n) ** 2.0,
    "sine": lambda rng, n: np.sin(2 * np.pi * np.arange(n) / 12),
    "pattern": lambda rng, n: np.resize(rng.standard_normal(12), n),
    "explosive": lambda rng, n: 1.2 ** np.minimum(np.arange(n), 200.0),
    "heavy tails": lambda rng, n: rng.standard_cauchy(n),
    "wild": lambda rng, n: np.exp(4 * rng.standard_normal(n)),
    "alternating": lambda rng, n: (-1.0) ** np.arange(n),
    "two values": lambda rng, n: rng.integers(0, 2, n).astype(float),
    "one shift": lambda rng, n: np.where(np.arange(n) < n // 2, 0.0, 9.0) + rng.standard_normal(n),
    "moving average at one": lambda rng, n: np.diff(rng.standard_normal(n + 1)),
    "tiny noise on a line": lambda rng, n: np.arange(n) + 1e-12 * rng.standard_normal(n),
}


def _every(k: int) -> Callable[[np.random.Generator, int], Array]:
    return lambda rng, n: np.arange(n) % k != 0


GAPS: dict[str, Callable[[np.random.Generator, int], Array]] = {
    "none": lambda rng, n: np.zeros(n, dtype=bool),
    "few": lambda rng, n: rng.random(n) < 0.05,
    "many": lambda rng, n: rng.random(n) < 0.5,
    "start": lambda rng, n: np.arange(n) < n // 4,
    "end": lambda rng, n: np.arange(n) > n - 5,
    "run": lambda rng, n: (np.arange(n) > n // 3) & (np.arange(n) < n // 3 + 9),
    "every third": _every(3),
    "all": lambda rng, n: np.ones(n, dtype=bool),
}
ODD: dict[str, float | None] = {
    "none": None,
    "inf": np.inf,
    "minus inf": -np.inf,
    "huge": 1e300,
    "large": 1e18,
    "tiny": 5e-324,
    "zero": 0.0,
    "negative": -1.0,
}


def values_of(column: Column, n: int) -> Any:
    """Values of a column in its dtype; floats where the dtype cannot hold them."""
    rng = np.random.default_rng(column.seed)
    with np.errstate(all="ignore"):
        values = np.asarray(KINDS[column.kind](rng, n), dtype=float) * column.scale + column.offset
    values[GAPS[column.gaps](rng, n)] = np.nan
    odd = ODD[column.odd]
    if odd is not None and n:
        values[int(rng.integers(n))] = odd
    try:
        with np.errstate(all="ignore"):
            return DTYPES[column.dtype](values)
    except (ValueError, TypeError, OverflowError, decimal.InvalidOperation, ArithmeticError):
        return values


def _whole(values: Array, dtype: str) -> Any:
    if not np.isfinite(values).all() or np.abs(values).max(initial=0.0) > 1e15:
        raise ValueError
    return pd.array(np.rint(values).astype("int64")).astype(dtype)


DTYPES: dict[str, Callable[[Array], Any]] = {
    "float64": lambda values: values,
    "float32": lambda values: values.astype("float32"),
    "int64": lambda values: _whole(values, "int64"),
    "Int64": lambda values: _whole(values, "Int64"),
    "Float64": lambda values: pd.array(values, dtype="Float64"),
    "double[pyarrow]": lambda values: pd.array(values, dtype="double[pyarrow]"),
    "bool": lambda values: values > np.nanmedian(values) if len(values) else values,
    "object": lambda values: pd.array([None if np.isnan(one) else one for one in values], dtype=object),
    "decimal": lambda values: pd.array([decimal.Decimal(repr(float(one))) for one in values], dtype=object),
    "text": lambda values: pd.array([repr(float(one)) for one in values], dtype=object),
    "commas": lambda values: pd.array([f"{one:,.2f}" for one in values], dtype="string"),
    "category": lambda values: pd.Categorical(np.round(values, 1)),
    "complex": lambda values: values + 1j,
    "dates": lambda values: pd.date_range("2020-01-01", periods=len(values)),
    "mixed": lambda values: pd.array(["x" if i == 3 else one for i, one in enumerate(values)], dtype=object),
    "lists": lambda values: pd.array([[one] for one in values], dtype=object),
}
# ----------------------------------------------------------------------------------------------------------- index
DATES = ["MS", "ME", "QS", "QE-NOV", "YS", "YE-FEB", "W-SUN", "W-WED", "D", "B", "h", "15min", "BME", "WOM-2FRI"]
PERIODS = ["period M", "period Q-OCT", "period Y", "period W-SAT", "period D", "period h"]
OTHERS = ["range", "numbers", "every second", "text days", "text months", "text day first", "words", "date objects",
          "floats", "2D", "s", "4-4-5", "levels", "Europe/Oslo h", "Europe/Oslo D", "America/Sao_Paulo h",
          "local autumn", "unknown", "year and month"]  # fmt: skip


def make_index(kind: str, n: int) -> pd.Index:
    """Index of n stamps."""
    if kind in DATES:
        return pd.DatetimeIndex(pd.date_range("2015-01-01", periods=n, freq=kind).to_numpy())
    if kind.startswith("period "):
        return pd.period_range("2015-01-01", periods=n, freq=kind[7:])
    if "/" in kind:
        zone, freq = kind.split()
        return pd.date_range("2017-10-10", periods=n, freq=freq, tz=zone)
    days = pd.date_range("2015-01-01", periods=n, freq="D")
    months = pd.date_range("2015-01-01", periods=n, freq="MS")
    weeks = np.cumsum(np.resize([4, 4, 5], n)) * 7
    return {
        "range": lambda: pd.RangeIndex(n),
        "numbers": lambda: pd.Index(range(1850, 1850 + n)),
        "every second": lambda: pd.RangeIndex(0, 2 * n, 2),
        "text days": lambda: pd.Index(days.strftime("%Y-%m-%d")),
        "text months": lambda: pd.Index(months.strftime("%Y-%m")),
        "text day first": lambda: pd.Index(days.strftime("%d/%m/%Y")),
        "words": lambda: pd.Index([f"<b>{i}</b>" for i in range(n)]),
        "date objects": lambda: pd.Index(list(days.date), dtype=object),
        "floats": lambda: pd.Index(np.arange(n) + 0.5),
        "2D": lambda: pd.date_range("2015-01-01", periods=n, freq="2D"),
        "s": lambda: pd.date_range("2015-01-01", periods=n, freq="s"),
        "4-4-5": lambda: pd.DatetimeIndex(pd.Timestamp("2015-01-31") + pd.to_timedelta(weeks, "D")),
        "levels": lambda: pd.MultiIndex.from_arrays([np.arange(n) % 2, np.arange(n)]),
        "local autumn": lambda: pd.date_range("2023-10-28", periods=n, freq="h", tz="Europe/Oslo").tz_localize(None),
        "unknown": lambda: pd.DatetimeIndex([pd.NaT] * n),
        "year and month": lambda: pd.Index([(2010 + i // 12) * 100 + i % 12 + 1 for i in range(n)]),
    }[kind]()


def _gone(frame: pd.DataFrame, rng: np.random.Generator) -> pd.DataFrame:
    return frame[rng.random(len(frame)) > 0.15]


def _nat(frame: pd.DataFrame, rng: np.random.Generator) -> pd.DataFrame:
    if not isinstance(frame.index, pd.DatetimeIndex) or frame.index.tz is not None or not len(frame):
        return frame
    stamps = frame.index.to_numpy(copy=True)
    stamps[int(rng.integers(len(stamps)))] = np.datetime64("NaT")
    return frame.set_axis(pd.DatetimeIndex(stamps))


def _twice(frame: pd.DataFrame, rng: np.random.Generator) -> pd.DataFrame:
    return pd.concat([frame, frame.iloc[:3]])


def _differs(frame: pd.DataFrame, rng: np.random.Generator) -> pd.DataFrame:
    return pd.concat([frame, frame.iloc[3:5].set_axis(frame.index[:2])]) if len(frame) > 5 else frame


MESSES: dict[str, Callable[[pd.DataFrame, np.random.Generator], pd.DataFrame]] = {
    "newest first": lambda frame, rng: frame.iloc[::-1],
    "shuffled": lambda frame, rng: frame.iloc[rng.permutation(len(frame))],
    "twice": _twice,
    "twice and different": _differs,
    "rows gone": _gone,
    "a stamp lost": _nat,
}


def _long(frame: pd.DataFrame) -> pd.DataFrame:
    parts = [
        pd.DataFrame({"when": frame.index, "who": pd.array([name] * len(frame), dtype=object), "v": frame.iloc[:, i]})
        for i, name in enumerate(frame.columns)
    ]
    return pd.concat(parts, ignore_index=True) if parts else pd.DataFrame()


class Foreign:
    """A table of another library."""

    def __init__(self, frame: pd.DataFrame) -> None:
        self.frame = frame

    def to_pandas(self) -> pd.DataFrame:
        return self.frame


FORMS: dict[str, Callable[[pd.DataFrame], Any]] = {
    "wide": lambda frame: frame,
    "series": lambda frame: frame.iloc[:, 0] if frame.shape[1] else frame,
    "long": _long,
    "foreign": Foreign,
    "dates in a column": lambda frame: frame.rename_axis("when").reset_index() if frame.index.nlevels == 1 else frame,
    "with an object column": lambda frame: frame.assign(beside=[("x",)] * len(frame)),
}
# ------------------------------------------------------------------------------------------------------ strategies
HOSTILE: list[Hashable] = [
    "a", "b", "freight", "", " ", "it's", 'say "x"', '"""', "\\", "one\ntwo", "x\u2028y\u2029z", "{boom}", "%s", "# x",
    "<script>alert(1)</script>", "<img src=x onerror=alert(1)>", "__import__('os').system('touch harm')", "&amp;",
    "$\\int$", "\u202eabc", "\x00", "name" * 60, 3, -1.5, None, True, ("p", 1), (), float("nan"), b"x", "prepare", "np",
    pd.Timestamp("2020-01-01"),
]  # fmt: skip
OPTIONS: dict[str, list[Any]] = {
    "season": [None, 1, 2, 4, 7, 12, (4, 12), 0, -3, 1.5, "12", 10**9, True, [], [12, 3]],
    "horizon": [None, 1, 6, 100, 0, -1, "x", 10**7],
    "significance": [0.05, 0.01, 0.5, 0, 1, float("nan"), "x"],
    "only": ["a", ["a"], [], 7, ["a", "nothing"]],
    "exclude": [[("2015-03", "2015-05")], ("2015-03", "2015-05"), [("1900", "1901")], [(1, 3)], 7, [("b", "a")]],
    "repair": [True, False, "sort", ["fill gaps", "regular calendar"], [], "everything", 3],
    "time": ["when", "nowhere"],
    "series": ["who", "nowhere"],
    "value": ["v", "nowhere"],
    "pool": [3],
    "progress": ["x"],
}


def _mostly(usual: Any, strange: Any, weight: int = 4) -> st.SearchStrategy[Any]:
    """The usual value `weight` times out of weight + 1."""
    return st.one_of(*[st.just(usual)] * weight, st.sampled_from(list(strange)))


def _columns() -> st.SearchStrategy[Column]:
    return st.builds(
        Column,
        kind=st.sampled_from(list(KINDS)),
        seed=st.integers(0, 10**6),
        scale=_mostly(1.0, [1e-3, 1e6, 1e12, 1e-12, 1e60, 1e-60, 1e99, 1e150, 1e-150, -1.0, 0.0], 2),
        offset=_mostly(0.0, [100.0, -50.0, 1e9, 1e15], 2),
        gaps=_mostly("none", GAPS),
        odd=_mostly("none", ODD, 8),
        dtype=_mostly("float64", DTYPES, 8),
    )


def cases() -> st.SearchStrategy[Case]:
    """Cases from plain to hostile."""
    option = st.sampled_from(list(OPTIONS)).flatmap(lambda key: st.tuples(st.just(key), st.sampled_from(OPTIONS[key])))
    options = st.lists(option, min_size=1, max_size=2, unique_by=lambda pair: pair[0]).map(tuple)
    messes = st.lists(st.sampled_from(list(MESSES)), min_size=1, max_size=2, unique=True).map(tuple)
    usual = st.sampled_from([*DATES, *PERIODS, "range", "text days"])
    return st.builds(
        Case,
        n=st.one_of(
            st.integers(8, 60),
            st.integers(24, 60),
            st.integers(24, 60),
            st.sampled_from([0, 1, 7, 8, 9, 24, 25, 36, 48, 100]),
        ),
        index=st.one_of(usual, usual, usual, usual, usual, st.sampled_from(OTHERS)),
        mess=st.one_of(st.just(()), st.just(()), st.just(()), messes),
        names=st.lists(st.one_of(st.sampled_from(HOSTILE), st.text(max_size=12)), min_size=2, max_size=2).map(tuple),
        columns=st.one_of(st.tuples(_columns()), st.tuples(_columns()), st.tuples(_columns(), _columns())),
        form=_mostly("wide", FORMS, 2),
        options=st.one_of(st.just(()), st.just(()), st.just(()), options),
        seed=st.integers(0, 10**6),
    )
