"""``python -m preflight_magic``: the check, the comparison and the record without a notebook."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.__main__ import CHANGED, SAME, WRONG, main
from tests.test_against import BEFORE, table


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    table(BEFORE).rename_axis("month").to_csv("before.csv")
    table().rename_axis("month").to_csv("now.csv")
    return tmp_path


def run(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    status = main([*arguments, "--season", "1"])
    told = capsys.readouterr()
    return status, told.out, told.err


def test_a_month_and_the_next(folder, capsys):
    status, out, err = run(capsys, "before.csv", "--save", "last.json")
    assert (status, err) == (SAME, "")
    assert "3 series" in out
    assert "earlier report" not in out

    status, out, err = run(capsys, "before.csv", "--against", "last.json")
    assert (status, err) == (SAME, "")
    assert out.endswith("Against the earlier report: all plans stand.\n")

    status, out, err = run(capsys, "now.csv", "--against", "last.json", "--save", "last.json", "--save", "page.html")
    assert (status, err) == (CHANGED, "")
    assert "2 stand, 1 changed" in out
    assert "remove shift" in out.split("earlier report")[1]
    assert (folder / "page.html").read_text(encoding="utf-8").startswith("<!DOCTYPE html>")

    # what was saved is what is compared next
    assert pf.load("last.json")["jump"].plan.steps == (pf.RemoveShift(pd.Timestamp("2020-11-01")),)
    assert run(capsys, "now.csv", "--against", "last.json", "--quiet") == (SAME, "", "")


def test_options_reach_the_check(folder, capsys):
    status, out, _ = run(
        capsys, "now.csv", "--only", "walk", "--only", "calm", "--exclude", "2016-03..2016-05", "--exclude", "2017-02",
        "--horizon", "5", "--significance", "0.1", "--save", "a.json",
    )  # fmt: skip
    assert status == SAME
    loaded = pf.load("a.json")
    assert loaded.names == ("walk", "calm")
    assert loaded["walk"].span.missing == 4
    assert loaded["walk"].horizon == 5
    assert loaded["walk"].settings.thresholds.significance == 0.1
    assert "walk" in out


@pytest.mark.parametrize(
    "arguments", [("long.csv", "--time", "month"), ("indexed.csv",), ("long.parquet", "--time", "month")]
)
def test_long_tables(folder, capsys, arguments):
    long = table().rename_axis("month").stack().rename("amount").rename_axis(["month", "book"]).reset_index()
    long["month"] = long["month"].astype(str)
    long["book"] = long["book"].map({"calm": 1, "jump": 2, "walk": 3})
    long.to_csv("long.csv", index=False)
    long.to_csv("indexed.csv", index=False)
    long.to_parquet("long.parquet")
    options = ("--series", "book", "--value", "amount", "--only", "2", "--save", "a.json")
    status, _, err = run(capsys, *arguments, *options)
    assert (status, err) == (SAME, "")
    assert pf.load("a.json").names == (2,)
    assert str(pf.load("a.json")[2].plan).startswith("remove shift")


def test_parquet_with_its_index_and_with_a_column_of_dates(folder, capsys):
    run(capsys, "now.csv", "--save", "last.json", "--quiet")
    dated = table().to_timestamp().rename_axis("month")
    dated.to_parquet("indexed.parquet")
    dated.reset_index().to_parquet("column.parquet")
    for name in ("indexed.parquet", "column.parquet"):
        assert run(capsys, name, "--against", "last.json", "--quiet") == (SAME, "", "")


@pytest.mark.parametrize(
    ("text", "kind"),
    [("2019Q{q}", "quarterly"), ("2019-Q{q}", "quarterly")],
)
def test_quarters(folder, capsys, text, kind):
    frame = table(40)[["walk"]].copy()
    frame.index = [text.replace("2019", str(2000 + i // 4)).format(q=i % 4 + 1) for i in range(40)]
    frame.rename_axis("quarter").to_csv("q.csv")
    assert run(capsys, "q.csv", "--save", "a.json")[0] == SAME
    calendar = pf.load("a.json")["walk"].source.calendar
    assert calendar is not None
    assert calendar.kind == kind


@pytest.mark.parametrize(("mark", "noun"), [(";", "semicolons"), ("\t", "tabs")])
def test_other_marks_between_columns_are_named(folder, capsys, mark, noun):
    table().to_csv("marks.csv", sep=mark, decimal=",", index_label="month")
    status, _, err = run(capsys, "marks.csv")
    assert status == WRONG
    assert f"'marks.csv' has {noun} between its columns" in err
    assert f"sep={mark!r}" in err


def test_remedies_are_written_as_options(folder, capsys):
    assert main(["now.csv", "--season=-3"]) == WRONG
    err = capsys.readouterr().err
    assert "--season 12 for months, or --season 1 for none" in err
    assert "season=" not in err


def test_numbered_rows_and_their_spans(folder, capsys):
    table().reset_index(drop=True).rename_axis("row").to_csv("n.csv")
    assert run(capsys, "n.csv", "--only", "walk", "--exclude", "3..5", "--save", "a.json")[0] == SAME
    assert pf.load("a.json")["walk"].span.missing == 3


def write(name: str, data: bytes) -> None:
    Path(name).write_bytes(data)


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (("none.csv",), "'none.csv': no such file"),
        (("now.csv", "--against", "none.json"), "'none.json': no such file"),
        (("now.csv", "--against", "now.csv"), "not JSON"),
        (("now.csv", "--save", "a.xlsx"), "--save a.xlsx"),
        (("now.csv", "--save", "none/a.json"), "The folder 'none' does not exist"),
        (("now.csv", "--seas", "12"), "unrecognized arguments: --seas"),
        (("now.csv", "--season", "x"), "'x' is not a whole number"),
        (("now.csv", "--exclude", "2020.."), "is not a span"),
        (("now.csv", "--significance", "5"), "significance is 5.0"),
        (("now.csv", "--time", "tide"), "has no column 'tide'; it has 'month'"),
        (("now.csv", "--only", "tide"), "only names 'tide'"),
        (("now.csv", "--series", "tide"), "--series tide"),
        (("now.csv", "--odds", "0"), ""),
        (("now.txt",), "neither .csv nor .parquet"),
        (("empty.csv",), "cannot be read as CSV"),
        (("one.csv",), "has 1 column"),
        (("noise.csv",), "cannot be read as CSV"),
        (("noise.parquet",), "cannot be read as Parquet"),
        (("american.csv",), "'03/04/2021', which is no date written as 2024-12-31"),
        (("holes.csv",), "rows without a date"),
        ((".",), "neither .csv nor .parquet"),
        ((), "the following arguments are required: table"),
    ],
)
def test_wrong_input_is_one_sentence_and_a_status(folder, capsys, arguments, told):
    write("now.txt", b"")
    write("empty.csv", b"")
    write("one.csv", b"a\n1\n")
    write("noise.csv", bytes(range(128, 256)) * 9)
    write("noise.parquet", bytes(range(256)) * 9)
    write("american.csv", b"day,fares\n03/04/2021,1\n03/05/2021,2\n")
    write("holes.csv", b"day,fares\n2021-03-04,1\n,2\n")
    if "--odds" in arguments:
        run(capsys, "now.csv", "--save", "last.json", "--quiet")
        arguments, told = (*arguments, "--against", "last.json"), "odds is 0.0"
    status, out, err = run(capsys, *arguments)
    assert (status, out) == (WRONG, "")
    assert told in err
    assert err.startswith("preflight_magic: ")
    assert err.count("\n") == 1
    assert err.endswith(".\n")


def test_in_a_process_of_its_own(folder):
    """Exit statuses as a shell sees them, on a terminal that knows no more than ASCII, and no notebook loaded."""
    environment = os.environ | {"PYTHONPATH": str(Path(pf.__file__).parents[1]), "PYTHONIOENCODING": "ascii"}

    def shell(*arguments: str) -> subprocess.CompletedProcess[str]:
        command = [sys.executable, "-W", "error", "-m", "preflight_magic", *arguments, "--season", "1"]
        return subprocess.run(command, env=environment, capture_output=True, text=True, check=False)

    first = shell("before.csv", "--save", "last.json")
    assert (first.returncode, first.stderr) == (0, "")
    assert shell("now.csv", "--against", "last.json").returncode == 3
    wrong = shell("none.csv")
    assert wrong.returncode == 2
    assert "Traceback" not in wrong.stderr
    assert "--against" in shell("--help").stdout
