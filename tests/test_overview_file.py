"""The overview in a file that grows, and goes on after a crash."""

from __future__ import annotations

import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic import overview_file
from preflight_magic.overview_file import HEADER
from tests.small_table import BAD, NAMES, small_table

KINDS = {"verdict": "string", "plan": "string", "season": "string", "note": "string", "power": "Float64"}
KINDS |= dict.fromkeys(("log", "trend", "shift"), "boolean") | dict.fromkeys(
    ("D", "d", "period", "n", "missing"), "Int64"
)


def found(path):
    """What the file holds, in the order and of the kinds of the overview."""
    table = pd.read_csv(path, dtype={"series": str}) if path.suffix == ".csv" else pd.read_parquet(path)
    assert tuple(table.columns) == HEADER
    assert table["fingerprint"].is_unique
    table = table.set_index("series").drop(columns="fingerprint")
    return table.astype(KINDS).fillna({"note": ""})


def assert_holds(path, report):
    expected = report.overview
    expected.index = expected.index.astype(str)
    expected = expected.fillna({"note": ""})
    pd.testing.assert_frame_equal(found(path).loc[expected.index], expected, check_index_type=False)


def write(frame, path, **options):
    return pf.write_overview(frame, path, progress=False, **options)


@pytest.fixture(params=["overview.csv", "overview.parquet"])
def path(request, tmp_path):
    return tmp_path / request.param


@pytest.fixture
def climbs(monkeypatch):
    """Names of the series that were climbed."""
    seen, original = [], overview_file.checked
    monkeypatch.setattr(
        overview_file, "checked", lambda one, settings: seen.append(one.name) or original(one, settings)
    )
    return seen


# -------------------------------------------------------------------------------------------------------- writing
def test_file_holds_the_overview(path):
    frame = small_table(bad=True)
    assert write(frame, path) == 4
    assert_holds(path, pf.check(frame, progress=False))
    assert found(path).loc[BAD, "verdict"] == "infeasible"


def test_names_with_commas_quotes_and_line_breaks(path):
    name = 'quay "A",\nnorth'
    frame = small_table()[["cargo"]].rename(columns={"cargo": name})
    write(frame, path)
    assert found(path).index.tolist() == [name]
    assert write(frame, path) == 0


def test_pool_sends_rows_back(path):
    frame = small_table()
    with ThreadPoolExecutor(2) as pool:
        assert write(frame, path, pool=pool) == 3
    assert_holds(path, pf.check(frame, progress=False))


def test_series_that_fails_is_a_row(path, monkeypatch):
    monkeypatch.setattr(overview_file, "checked", lambda one, settings: overview_file.Lost("the tide came in"))
    write(small_table()[["cargo"]], path)
    assert found(path)["verdict"].tolist() == ["infeasible"]
    assert found(path)["note"].tolist() == ["column 'cargo': the tide came in."]


def test_every_row_is_in_the_csv_at_once(tmp_path):
    path, sizes = tmp_path / "overview.csv", []
    pf.write_overview(small_table(), path, progress=lambda done, total: sizes.append(len(found(path))))
    # Told before the row is handed on, so each row is there when the next series is done.
    assert sizes == [0, 1, 2]


def test_parts_are_written_when_full_or_old(tmp_path, monkeypatch):
    path = tmp_path / "overview.parquet"
    monkeypatch.setattr(overview_file, "ROWS_OF_A_PART", 2)
    write(small_table(), path)
    assert sorted(part.name for part in path.iterdir()) == ["part-000000.parquet", "part-000001.parquet"]
    monkeypatch.setattr(overview_file, "SECONDS_OF_A_PART", 0.0)
    write(small_table() + 1, path)
    assert len(found(path)) == 3


# --------------------------------------------------------------------------------------------------------- resuming
def test_crash_costs_nothing_that_is_written(path, climbs):
    def crash(done: int, total: int) -> None:
        if done == 3:
            raise RuntimeError("power is gone")

    with pytest.raises(RuntimeError, match="power is gone"):
        pf.write_overview(small_table(), path, progress=crash)
    assert found(path).index.tolist() == list(NAMES[:2])
    climbs.clear()
    assert write(small_table(), path) == 1
    assert climbs == [NAMES[2]]
    assert_holds(path, pf.check(small_table(), progress=False))


def test_process_that_ends_at_once_leaves_its_rows(tmp_path):
    path = tmp_path / "overview.csv"
    code = (
        "import os, sys, preflight_magic as pf\n"
        "from tests.small_table import small_table\n"
        "end = lambda done, total: done == 3 and os._exit(7)\n"
        "pf.write_overview(small_table(), sys.argv[1], progress=end)\n"
    )
    root = Path(pf.__file__).parents[1]
    assert subprocess.run([sys.executable, "-c", code, str(path)], cwd=root, check=False).returncode == 7
    assert found(path).index.tolist() == list(NAMES[:2])
    # The fingerprint is the same in another process.
    assert write(small_table(), path) == 1


def test_nothing_is_checked_twice(path, climbs):
    write(small_table(bad=True), path)
    climbs.clear()
    assert write(small_table(bad=True), path) == 0
    assert climbs == []


def test_changed_series_takes_the_place_of_its_row(path, climbs):
    write(small_table(), path)
    changed = small_table()
    changed.iloc[3, 1] += 0.5
    climbs.clear()
    assert write(changed, path) == 1
    assert climbs == ["fares"]
    assert_holds(path, pf.check(changed, progress=False))


def test_other_options_are_checked_again(path, climbs):
    write(small_table()[["cargo"]], path)
    assert write(small_table()[["cargo"]], path, season=5) == 1
    assert found(path)["period"].tolist() == [5]


def test_rows_of_other_tables_stay(path):
    write(small_table()[["cargo", "crew"]], path)
    assert write(small_table()[["fares"]], path) == 1
    assert sorted(found(path).index) == sorted(NAMES)


@pytest.mark.parametrize("cut", [1, 20, 60])
def test_torn_last_row_is_checked_again(tmp_path, cut):
    path = tmp_path / "overview.csv"
    write(small_table(), path)
    whole = path.read_bytes()
    path.write_bytes(whole[:-cut])
    # The end of line alone is no loss of the row.
    assert write(small_table(), path) == (cut > 1)
    assert_holds(path, pf.check(small_table(), progress=False))
    assert len(path.read_bytes()) == len(whole)


def test_torn_part_is_dropped(tmp_path):
    path = tmp_path / "overview.parquet"
    write(small_table(), path)
    (path / ".part-000001.parquet").write_bytes(b"PAR1")
    assert write(small_table(), path) == 0
    assert [part.name for part in path.iterdir()] == ["part-000000.parquet"]


# ------------------------------------------------------------------------------------------------------- bad input
def test_other_files_are_left_alone(tmp_path):
    path = tmp_path / "notes.csv"
    path.write_text("harbour,depth\nnorth,4\n")
    with pytest.raises(pf.CheckError, match=r"'notes.csv' is there already and is no overview"):
        write(small_table(), path)
    assert path.read_text() == "harbour,depth\nnorth,4\n"
    for name, make in {
        "file.parquet": lambda one: one.write_text("x"),
        "folder.parquet": lambda one: (one.mkdir(), (one / "x").write_text("x")),
    }.items():
        make(tmp_path / name)
        with pytest.raises(pf.CheckError, match="is there already"):
            write(small_table(), tmp_path / name)


@pytest.mark.parametrize(
    ("name", "said"), [("overview.xlsx", "ends in .csv or .parquet"), ("no/where.csv", "does not exist")]
)
def test_bad_path_is_refused_before_any_work(tmp_path, climbs, name, said):
    with pytest.raises(pf.CheckError, match=said):
        write(small_table(), tmp_path / name)
    assert climbs == []


def test_parquet_without_pyarrow(tmp_path, monkeypatch):
    monkeypatch.setitem(sys.modules, "pyarrow", None)
    with pytest.raises(pf.CheckError, match="Parquet takes pyarrow, which is not installed; install it, or use"):
        write(small_table(), tmp_path / "overview.parquet")


def test_unknown_option(tmp_path):
    with pytest.raises(TypeError, match=r"write_overview\(\) has no option seasons"):
        write(small_table(), tmp_path / "overview.csv", seasons=12)
