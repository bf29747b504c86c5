"""The overview of many series in a file that grows while they are checked, and goes on where it stopped."""

from __future__ import annotations

import csv
import importlib.util
import io
import os
import re
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path
from time import monotonic
from typing import Any, Protocol, TextIO

import pandas as pd

from preflight_magic.batch import checked, computed, digest_of, opened, report_of
from preflight_magic.model import CheckError, TimeSeries
from preflight_magic.overview import COLUMNS, row_of, table_of
from preflight_magic.policy import Settings
from preflight_magic.pooling import Lost
from preflight_magic.progress import Tally, follow
from preflight_magic.series_report import SeriesReport

HEADER = ("series", *COLUMNS, "fingerprint")
ROWS_OF_A_PART = 1000
"""Rows of a Parquet part: large enough that a million series make a thousand parts."""
SECONDS_OF_A_PART = 5.0
"""Seconds after which a part is written though it is not full: what a crash may cost."""

Row = dict[str, object]
Stays = Callable[[str, str], bool]
"""Whether the row of a series (its name as text, its fingerprint) that is in the file already stays there."""


def write_overview(frame: Any, path: str | Path, **options: Any) -> int:
    """Check the series of a table and write a row for each as soon as it is done.

    Run again with the same table and options it goes on where it stopped: a series whose row is in the file, with
    the fingerprint of the same data, options and version, is not checked again. Only rows come back from a pool, so
    this is the way for a million series. Rows of series that are not in this table stay.

    Parameters
    ----------
    frame : DataFrame, Series, or anything with ``to_pandas``
    path : str or Path
        ``.csv``: a file to which each row is added at once. ``.parquet``: a folder of parts, each written whole after
        some seconds at most; ``pandas.read_parquet`` reads the folder. Both hold the columns of ``Report.overview``
        between ``series``, the name as text, and ``fingerprint``; rows stand in the order in which they were checked.
    **options
        As for `check`; ``cache`` is not used.

    Returns
    -------
    int
        Rows written now.

    Raises
    ------
    CheckError
        For another suffix, a folder that does not exist, a file that is no such overview, or Parquet without pyarrow.
    """
    every, settings, given = opened("write_overview", frame, options)
    file = _file(Path(path))
    fingerprints = [digest_of(one, settings).hex() for one in every]
    names, wanted = {str(one.name) for one in every}, set(fingerprints)
    there = file.open(lambda name, fingerprint: fingerprint in wanted or name not in names)
    todo = [(one, key) for one, key in zip(every, fingerprints, strict=True) if key not in there]
    tally = Tally()
    found = computed(_row, [one for one, _ in todo], settings, given["pool"], tally)
    try:
        for position, row in follow(found, len(todo), given["progress"], tally):
            one, fingerprint = todo[position]
            if isinstance(row, Lost):
                row = row_of(report_of(one, None, settings, row))
            file.add({"series": str(one.name), **row, "fingerprint": fingerprint})
    finally:
        file.close()
    return file.written


def _row(one: TimeSeries, settings: Settings) -> Row | Lost:
    """Row of a series; the findings stay in the worker."""
    found = checked(one, settings)
    return found if isinstance(found, Lost) else row_of(SeriesReport(one, settings, found))


def _file(path: Path) -> _Growing:
    if not path.parent.is_dir():
        raise CheckError(f"The folder '{path.parent}' does not exist; make it first, or write somewhere else.")
    if path.suffix == ".csv":
        return _Csv(path)
    if path.suffix != ".parquet":
        raise CheckError(f"An overview cannot be written to '{path.name}'; use a name that ends in .csv or .parquet.")
    if importlib.util.find_spec("pyarrow") is None:
        raise CheckError("Parquet takes pyarrow, which is not installed; install it, or use a name that ends in .csv.")
    return _Parts(path)


class _Growing(Protocol):
    written: int

    def open(self, stays: Stays) -> set[str]:
        """Begin or go on; drop rows that do not stay, and tell the fingerprints of the others."""

    def add(self, row: Row) -> None: ...

    def close(self) -> None: ...


# ----------------------------------------------------------------------------------------------------------- CSV
class _Csv:
    """A file to which rows are added; only its last row can be torn."""

    def __init__(self, path: Path) -> None:
        self._path, self.written = path, 0
        self._file: TextIO | None = None

    def open(self, stays: Stays) -> set[str]:
        if not self._path.exists() or not self._path.stat().st_size:
            self._path.write_text(_line(HEADER), encoding="utf-8", newline="\n")
        there, dropped = set(), not self._ends_whole()
        for row in self._read():
            if len(row) == len(HEADER) and stays(row[0], row[-1]):
                there.add(row[-1])
            else:
                dropped = True
        if dropped:
            self._keep(stays)
        self._file = self._path.open("a", encoding="utf-8", newline="")
        return there

    def _read(self) -> Iterator[list[str]]:
        with self._path.open(encoding="utf-8", errors="replace", newline="") as file:
            rows = csv.reader(file)
            if next(rows) != list(HEADER):
                raise _foreign(self._path)
            yield from rows

    def _ends_whole(self) -> bool:
        with self._path.open("rb") as file:
            file.seek(-1, os.SEEK_END)
            return file.read() == b"\n"

    def _keep(self, stays: Stays) -> None:
        """Write the rows that stay beside the file, and move them there."""
        beside = self._path.with_name(f".{self._path.name}")
        with beside.open("w", encoding="utf-8", newline="") as file:
            file.write(_line(HEADER))
            file.writelines(_line(row) for row in self._read() if len(row) == len(HEADER) and stays(row[0], row[-1]))
        os.replace(beside, self._path)

    def add(self, row: Row) -> None:
        assert self._file is not None
        self._file.write(_line(["" if row[key] is pd.NA else row[key] for key in HEADER]))
        self._file.flush()
        self.written += 1

    def close(self) -> None:
        if self._file is not None:
            self._file.close()


def _line(cells: Sequence[object]) -> str:
    text = io.StringIO(newline="")
    csv.writer(text, lineterminator="\n").writerow(cells)
    return text.getvalue()


def _foreign(path: Path) -> CheckError:
    return CheckError(
        f"'{path.name}' is there already and is no overview of this version; move it away, or use another name."
    )


# ------------------------------------------------------------------------------------------------------- Parquet
class _Parts:
    """A folder of parts, each written beside its place and moved there, so that all of them can be read at any time."""

    def __init__(self, path: Path) -> None:
        self._path, self._rows, self._next, self.written = path, list[Row](), 0, 0
        self._last = monotonic()

    def open(self, stays: Stays) -> set[str]:
        if self._path.exists() and not self._path.is_dir():
            raise _foreign(self._path)
        self._path.mkdir(exist_ok=True)
        there: set[str] = set()
        for part in sorted(self._path.iterdir()):
            number = re.fullmatch(r"\.?part-(\d+)\.parquet", part.name)
            if part.name.startswith("."):
                # One of ours is torn: it is moved to its place only when it is whole.
                if number:
                    part.unlink()
                continue
            rows = pd.read_parquet(part, engine="pyarrow") if number else None
            if number is None or rows is None or tuple(rows.columns) != HEADER:
                raise _foreign(part)
            self._next = int(number[1]) + 1
            kept = [stays(name, key) for name, key in zip(rows["series"], rows["fingerprint"], strict=True)]
            if not all(kept):
                self._write(rows[kept], part) if any(kept) else part.unlink()
            there |= set(rows["fingerprint"][kept])
        return there

    def add(self, row: Row) -> None:
        self._rows.append(row)
        if len(self._rows) >= ROWS_OF_A_PART or monotonic() - self._last > SECONDS_OF_A_PART:
            self._flush()

    def close(self) -> None:
        if self._rows:
            self._flush()

    def _flush(self) -> None:
        table = table_of(self._rows, [str(row["series"]) for row in self._rows]).reset_index()
        table = table.assign(fingerprint=[str(row["fingerprint"]) for row in self._rows])
        self._write(table.astype({"series": "string", "fingerprint": "string"}), self._path / self._name())
        self.written += len(self._rows)
        self._rows, self._next, self._last = [], self._next + 1, monotonic()

    def _name(self) -> str:
        return f"part-{self._next:06d}.parquet"

    def _write(self, table: pd.DataFrame, part: Path) -> None:
        beside = part.with_name(f".{part.name}")
        table.to_parquet(beside, engine="pyarrow", index=False)
        os.replace(beside, part)
