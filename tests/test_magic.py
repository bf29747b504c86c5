"""What the magics accept, hand to the check, refuse and return."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import pandas as pd
import pytest
from IPython.core.interactiveshell import InteractiveShell

from preflight_magic.model import CheckError
from tests.shells import Report, checked, frame, refused, running_shell


@pytest.fixture
def shell(tmp_path: Path) -> Iterator[InteractiveShell]:
    with running_shell(tmp_path) as made:
        yield made


# ------------------------------------------------------------------------------------------------- forms and results
def test_line_form_checks_a_variable_and_returns_the_report(
    shell: InteractiveShell, capsys: pytest.CaptureFixture[str]
) -> None:
    report = checked(shell, "%checkseries monthly")
    assert report.frame is shell.user_ns["monthly"]
    assert report.options == {}
    assert shell.user_ns["_"] is report
    assert capsys.readouterr().out.count("the report is shown") == 1


def test_line_form_takes_any_expression_and_options_in_any_place(shell: InteractiveShell) -> None:
    report = checked(shell, '%checkseries --season 12 monthly[["passengers", "crew overtime"]] --horizon=6')
    assert list(report.frame) == ["passengers", "crew overtime"]
    assert report.options == {"season": 12, "horizon": 6}
    report = checked(shell, '%checkseries monthly["passengers"] + 1 - 2')
    assert report.frame.tolist() == list(range(-1, 23))


def test_cell_form_runs_in_the_namespace_of_the_person(
    shell: InteractiveShell, capsys: pytest.CaptureFixture[str]
) -> None:
    report = checked(
        shell, '%%checkseries --season 12 --into kept\npart = monthly["passengers"]\nprint("once")\npart\n'
    )
    assert report.frame is shell.user_ns["part"]
    assert shell.user_ns["kept"] is report
    assert shell.user_ns["_"] is report
    assert report.options == {"season": 12}
    out = capsys.readouterr().out
    assert out.count("once") == 1
    assert out.count("the report is shown") == 1


def test_cell_may_hold_magics_and_an_expression_over_several_lines(shell: InteractiveShell) -> None:
    report = checked(shell, "%%checkseries\nwhere = %pwd\n(\n    monthly\n    .iloc[:12]\n)  # a comment\n")
    assert len(report.frame) == 12
    assert isinstance(shell.user_ns["where"], str)


def test_value_with_to_pandas_is_a_frame(shell: InteractiveShell) -> None:
    class Table:
        def to_pandas(self) -> pd.DataFrame:
            return frame()

    shell.user_ns["table"] = table = Table()
    assert checked(shell, "%checkseries table").frame is table


@pytest.mark.parametrize(
    "text",
    [
        "%checkseries monthly --quiet --into kept",
        "%%checkseries --into kept --quiet\nmonthly",
        "%checkseries monthly; --into kept",
        "%%checkseries --into kept\nmonthly;  # nothing to see",
    ],
)
def test_quiet_and_a_semicolon_show_nothing(
    shell: InteractiveShell, text: str, capsys: pytest.CaptureFixture[str]
) -> None:
    result = shell.run_cell(text)
    result.raise_error()
    assert result.result is None
    assert isinstance(shell.user_ns["kept"], Report)
    assert shell.user_ns["kept"].options == ({"progress": False} if "--quiet" in text else {})
    assert capsys.readouterr().out == ""


# ------------------------------------------------------------------------------------------------------------ options
@pytest.mark.parametrize(
    ("line", "options"),
    [
        ("--season 24,168", {"season": (24, 168)}),
        ("--season 24, 168", {"season": (24, 168)}),
        ("--horizon 12", {"horizon": 12}),
        ("--significance .01", {"significance": 0.01}),
        ("--time 'sailing day' --series route --value \"cars\"",
         {"time": "sailing day", "series": "route", "value": "cars"}),
        ('--only passengers,"crew overtime"', {"only": ["passengers", "crew overtime"]}),
        ('--only passengers, "crew overtime"', {"only": ["passengers", "crew overtime"]}),
        ("--only passengers --only='crew overtime'", {"only": ["passengers", "crew overtime"]}),
        ('--only "a,b"', {"only": ["a,b"]}),
        ("--only 2020", {"only": [2020]}),
        ("--exclude 2020-03..2020-06", {"exclude": [("2020-03", "2020-06")]}),
        ("--exclude 2020-03 --exclude '2020-05-01 06:00 .. 2020-05-02'",
         {"exclude": [("2020-03", "2020-03"), ("2020-05-01 06:00", "2020-05-02")]}),
    ],
)  # fmt: skip
def test_options_reach_the_check(shell: InteractiveShell, line: str, options: dict[str, Any]) -> None:
    assert checked(shell, f"%checkseries monthly {line}").options == options
    assert checked(shell, f"%%checkseries {line}\nmonthly").options == options


def test_names_are_those_of_the_groups_in_a_long_table(shell: InteractiveShell) -> None:
    shell.user_ns["long"] = pd.DataFrame({"route": [1, 1, 2, 2], "cars": [5, 6, 7, 8]})
    report = checked(shell, "%checkseries long --series route --value cars --only 2")
    assert report.options == {"series": "route", "value": "cars", "only": [2]}


def test_spans_are_numbers_where_the_rows_are_numbered(shell: InteractiveShell) -> None:
    shell.user_ns["counted"] = frame().reset_index(drop=True)
    assert checked(shell, "%checkseries counted --exclude 3..5").options == {"exclude": [(3, 5)]}
    shell.user_ns["counted"]["trip"] = pd.date_range("2020", periods=24)
    report = checked(shell, "%checkseries counted --time trip --exclude 2020..2021")
    assert report.options["exclude"] == [("2020", "2021")]


def test_pool_is_the_executor_of_that_name(shell: InteractiveShell) -> None:
    with ThreadPoolExecutor(1) as pool:
        shell.user_ns["workers"] = pool
        assert checked(shell, "%checkseries monthly --pool workers").options == {"pool": pool}


@pytest.mark.parametrize("more", ["", " --quiet"])
def test_interrupt_keeps_and_shows_what_is_finished(
    shell: InteractiveShell, more: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    stop = KeyboardInterrupt("stopped after 3 of 10 series")
    stop.report = finished = Report(frame(), {})  # type: ignore[attr-defined]

    def interrupted(table: object, **options: object) -> None:
        raise stop

    monkeypatch.setattr(sys.modules["preflight_magic.batch"], "check", interrupted)
    result = shell.run_cell(f"%checkseries monthly --into kept{more}")
    assert isinstance(result.error_in_exec, KeyboardInterrupt)
    assert shell.user_ns["kept"] is finished
    assert ("the report is shown" in capsys.readouterr().out) == (not more)


def test_nothing_in_the_line_is_expanded(shell: InteractiveShell) -> None:
    shell.user_ns.update(passengers="crew overtime", frames={"{passengers}": frame(), "$passengers": frame()})
    assert checked(shell, '%checkseries frames["{passengers}"]').frame is shell.user_ns["frames"]["{passengers}"]
    assert checked(shell, '%checkseries frames["$passengers"]').frame is shell.user_ns["frames"]["$passengers"]


# ------------------------------------------------------------------------------------------------------- usage errors
@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("%checkseries", "name a frame"),
        ("%checkseries --season 12", "name a frame"),
        ("%checkseries month", "there is no variable month; did you mean monthly?"),
        ("%checkseries month[['a']] + 1", "there is no variable month; did you mean monthly?"),
        ("%checkseries 3 +", "3 + is not a Python expression"),
        ("%checkseries [1, 2]", "[1, 2] is a list, not a DataFrame or Series."),
        ("%checkseries None", "None is None, not a DataFrame"),
        ("%checkseries monthly --seasn 12", "there is no option --seasn; did you mean --season?"),
        ("%checkseries monthly --pool workers", "--pool workers: there is no such variable; make an executor"),
        ("%checkseries monthly --pool monthly", "--pool monthly is a DataFrame, not an executor"),
        ("%%checkseries\n   \n", "the cell is empty"),
        ("%%checkseries\n# nothing yet\n", "the cell does not end with an expression"),
        ("%%checkseries\nmonthly\nx = 1\n", "the cell does not end with an expression"),
        ("%%checkseries\nprint(monthly.size)\n", "the last expression of the cell is None, not a DataFrame"),
        ("%%checkseries\nawait fetch()\n", "a %%checkseries cell cannot await"),
        ("%%checkseries\nx = await fetch()\nmonthly\n", "a %%checkseries cell cannot await"),
        ("%%checkseries monthly\nmonthly\n", "monthly is no option; under %%checkseries the frame is the last"),
        ("%%checkseries --sesaon 12\nmonthly\n", "there is no option --sesaon; did you mean --season?"),
        ("%seriescode", "name a report"),
        ("%seriescode monthly", "monthly is a DataFrame, not a report"),
        ("%seriescode report", "there is no variable report; make one with %checkseries FRAME --into NAME."),
    ],
)  # fmt: skip
def test_bad_input_gets_one_sentence(shell: InteractiveShell, text: str, words: str) -> None:
    assert words in refused(shell, text)


def test_options_are_read_before_the_cell_runs(shell: InteractiveShell) -> None:
    refused(shell, "%%checkseries --horizon x\nran = True\nmonthly\n")
    refused(shell, "%%checkseries --pool nobody\nran = True\nmonthly\n")
    refused(shell, "%%checkseries\nran = True\nawait fetch()\n")
    refused(shell, "%%checkseries\nran = True\n")
    assert "ran" not in shell.user_ns


def test_no_frame_is_known_yet(shell: InteractiveShell) -> None:
    del shell.user_ns["monthly"]
    assert refused(shell, "%checkseries ferry").endswith("no variable holds a DataFrame or Series yet.")


def test_usage_error_shows_one_line_and_no_traceback(
    shell: InteractiveShell, capsys: pytest.CaptureFixture[str]
) -> None:
    shell.run_cell("%checkseries monthly --horizon x")
    shown = "".join(capsys.readouterr())
    assert shown == "UsageError: --horizon x is not a whole number; write --horizon N.\n"


def test_complaint_of_the_check_becomes_one_line(shell: InteractiveShell, monkeypatch: pytest.MonkeyPatch) -> None:
    def check(frame: Any, **options: Any) -> None:
        raise CheckError("column 'passengers' has\n  3 values; give it more.")

    monkeypatch.setattr(sys.modules["preflight_magic.batch"], "check", check)
    message = refused(shell, "%checkseries monthly --into kept")
    assert message == "column 'passengers' has 3 values; give it more."
    assert "kept" not in shell.user_ns


# ------------------------------------------------------------------------------------------------------ --against
class Compared(Report):
    """A report that keeps what it was compared with."""

    def keeping(self, earlier: Any) -> Compared:
        self.earlier = earlier
        return self


@pytest.fixture
def comparing(shell: InteractiveShell, monkeypatch: pytest.MonkeyPatch) -> InteractiveShell:
    recorder = sys.modules["preflight_magic.batch"]
    monkeypatch.setattr(recorder, "check", lambda frame, **options: Compared(frame, options))
    return shell


def test_against_takes_a_variable(comparing: InteractiveShell) -> None:
    comparing.user_ns["last"] = last = Report(None, {})
    report = checked(comparing, "%checkseries monthly --against last --into kept")
    assert isinstance(report, Compared)
    assert report.earlier is last
    assert comparing.user_ns["kept"] is report
    assert "against" not in report.options


def test_against_takes_a_file(comparing: InteractiveShell, tmp_path: Path) -> None:
    import preflight_magic as pf
    from preflight_magic.batch import check  # noqa: F401  the recorder stands here

    path = tmp_path / "last month.json"
    saved(path)
    report = checked(comparing, f'%checkseries monthly --against "{path}"')
    assert isinstance(report, Compared)
    assert isinstance(report.earlier, pf.Report)
    assert report.earlier.names == ("harbour",)


def saved(path: Path) -> None:
    """A record of a series that could not be checked: the smallest there is."""
    import preflight_magic as pf
    from preflight_magic.ladder import climb
    from preflight_magic.model import TimeSeries
    from preflight_magic.policy import Settings

    source = TimeSeries("harbour", pd.Series(dtype=float), None, problem="column 'harbour': no values.")
    pf.Report([pf.SeriesReport(source, Settings(), climb(source, Settings()))]).save(path)


@pytest.mark.parametrize(
    ("line", "told"),
    [
        ("--against none.json", "--against none.json: no such file or directory; save a record first"),
        ("--against monthly", "--against monthly is a DataFrame, not a report"),
        ("--against bad.json", "--against bad.json: 'bad.json' is not JSON"),
        ("--against .", "--against .: is a directory"),
        ("--against", "--against needs a value; write --against FILE."),
    ],
)
def test_against_what_is_no_report(
    comparing: InteractiveShell, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, line: str, told: str
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "bad.json").write_text("<html>", encoding="utf-8")
    assert told in refused(comparing, f"%checkseries monthly {line}")
