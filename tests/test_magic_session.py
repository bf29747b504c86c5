"""How the magics live in a session: tracebacks, code in the next cell, help, completion, loading and unloading."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path

import pytest
from IPython.core.completer import provisionalcompleter
from IPython.core.interactiveshell import InteractiveShell

from preflight_magic import magic
from preflight_magic.command_line import OPTIONS, read_line
from preflight_magic.model import CheckError
from tests.shells import Report, checked, refused, running_shell


@pytest.fixture
def shell(tmp_path: Path) -> Iterator[InteractiveShell]:
    with running_shell(tmp_path) as made:
        yield made


# ----------------------------------------------------------------------------------------------- errors of the person
def test_error_of_the_cell_shows_its_own_lines(shell: InteractiveShell, capsys: pytest.CaptureFixture[str]) -> None:
    shell.run_cell("ahead = 0", store_history=True)
    text = "%%checkseries --season 12\n\n\ndef share():\n    return 1 / ahead\nmonthly * share()\n"
    result = shell.run_cell(text, store_history=True)
    assert isinstance(result.error_in_exec, ZeroDivisionError)
    assert not result.success
    shown = "".join(capsys.readouterr())
    # lines are counted with that of the magic, as the person sees the cell
    assert re.findall(r"Cell In\[(\d+)\], line (\d+)", shown) == [("2", "1"), ("2", "6"), ("2", "5")]
    assert "monthly * share()" in shown
    assert "return 1 / ahead" in shown
    assert "check_series" not in shown
    assert "magic.py" not in shown


def test_syntax_error_of_the_cell_is_pointed_at(shell: InteractiveShell, capsys: pytest.CaptureFixture[str]) -> None:
    result = shell.run_cell("%%checkseries\nx = 1\nmonthly[[\n")
    assert isinstance(result.error_in_exec, SyntaxError)
    shown = "".join(capsys.readouterr())
    assert "line 3" in shown
    assert "monthly[[" in shown


def test_statements_before_the_error_stay_done(shell: InteractiveShell) -> None:
    shell.run_cell("%%checkseries\ndone = 1\nmonthly.nothing\n")
    assert shell.user_ns["done"] == 1


def test_missing_name_inside_a_function_keeps_its_traceback(
    shell: InteractiveShell, capsys: pytest.CaptureFixture[str]
) -> None:
    shell.run_cell("def build():\n    return not_there\n")
    assert isinstance(shell.run_cell("%checkseries build() --season 12").error_in_exec, NameError)
    shown = "".join(capsys.readouterr())
    assert "----> 1 build()" in shown
    assert "line 2, in build" in shown
    assert "magic.py" not in shown


def test_futures_of_the_session_hold_in_the_cell(shell: InteractiveShell) -> None:
    shell.run_cell("from __future__ import annotations")
    checked(shell, "%%checkseries\ndef f(x: not_there): ...\nmonthly")
    assert shell.user_ns["f"].__annotations__ == {"x": "not_there"}


# --------------------------------------------------------------------------------------------------------------- code
@pytest.mark.parametrize(
    ("line", "code"),
    [
        ("kept", "# code of None"),
        ("kept passengers", "# code of ['passengers']"),
        ("kept 'crew overtime' passengers", "# code of ['crew overtime', 'passengers']"),
        ("kept passengers, 2020", "# code of ['passengers', 2020]"),
    ],
)
def test_code_goes_to_the_next_cell(shell: InteractiveShell, line: str, code: str) -> None:
    checked(shell, "%checkseries monthly --into kept")
    result = shell.run_cell(f"%seriescode {line}")
    result.raise_error()
    assert result.result is None
    assert shell.rl_next_input == code


def test_unknown_series_and_reports_are_named(shell: InteractiveShell) -> None:
    checked(shell, "%checkseries monthly --into kept")
    assert refused(shell, "%seriescode kept passenger") == "kept has no series passenger; did you mean passengers?"
    assert refused(shell, "%seriescode kept zebra").endswith("there are passengers, crew overtime, 2020.")
    assert refused(shell, "%seriescode kep") == "there is no variable kep; did you mean kept?"


def test_complaint_of_the_code_becomes_one_line(shell: InteractiveShell, monkeypatch: pytest.MonkeyPatch) -> None:
    def code(self: Report, names: object = None) -> str:
        raise CheckError("no series\nhas code.")

    monkeypatch.setattr(Report, "code", code)
    checked(shell, "%checkseries monthly --into kept")
    assert refused(shell, "%seriescode kept") == "no series has code."


# --------------------------------------------------------------------------------------------------- help, completion
@pytest.mark.parametrize("name", ["%checkseries", "%%checkseries"])
def test_help_shows_every_option(shell: InteractiveShell, name: str) -> None:
    text = shell.object_inspect(name)["docstring"]
    for option in OPTIONS:
        assert f"{option.name} {option.form}".rstrip() in text
        assert option.about in text
    assert "%%checkseries --season 12 --horizon 12 --into report" in text


def test_examples_in_the_help_can_be_read(shell: InteractiveShell) -> None:
    lines = [line.strip() for line in magic._CHECK_HELP.splitlines() if line.startswith("    %")]
    read = [read_line(line.partition("checkseries")[2]) for line in lines if "[options]" not in line]
    assert [one.options for one in read] == [
        {"--season": 12, "--horizon": 12, "--into": "report"},
        {"--only": ["passengers", "crew overtime"], "--exclude": [("2020-03", "2020-06")]},
        {"--against": "last_month.json", "--into": "report"},
    ]


def completions(shell: InteractiveShell, text: str) -> list[str]:
    """What the shell offers at the end of a text, as the whole word that would then stand there."""
    with provisionalcompleter():
        found = list(shell.Completer.completions(text, len(text)))
    return [text[: one.start] + one.text for one in found]


def test_the_shell_completes_the_line_of_a_magic(shell: InteractiveShell) -> None:
    shell.user_ns["month"] = 3
    assert completions(shell, "%checkseries monthly --se") == [
        "%checkseries monthly --season",
        "%checkseries monthly --series",
    ]
    assert completions(shell, "%%checkseries --in") == ["%%checkseries --into"]
    assert completions(shell, "x = %checkseries mon") == ["x = %checkseries monthly"]
    assert completions(shell, "%checkseries monthly --only pa, cr") == [
        '%checkseries monthly --only pa, "crew overtime"'
    ]


def test_completion_is_silent_elsewhere(shell: InteractiveShell) -> None:
    for text in ("--se", "x = 1\n%%checkseries --se", "%%checkseries\nmonthly --se"):
        assert not [one for one in completions(shell, text) if one.endswith(("--season", "--series"))]


# ------------------------------------------------------------------------------------------------- loading, unloading
def state(shell: InteractiveShell) -> tuple[object, ...]:
    manager = shell.magics_manager
    return (
        {kind: dict(known) for kind, known in manager.magics.items()},
        set(vars(manager.user_magics)),
        list(shell.Completer.custom_matchers),
        list(shell.configurables),
        set(shell.user_ns),
    )


def test_unloading_leaves_the_shell_as_it_was(shell: InteractiveShell) -> None:
    magic.unload(shell)
    before = state(shell)
    magic.load(shell)
    assert state(shell) != before
    magic.unload(shell)
    assert state(shell) == before
    magic.unload(shell)
    assert state(shell) == before


def test_loading_twice_is_loading_once(shell: InteractiveShell) -> None:
    magic.load(shell)
    assert len(shell.Completer.custom_matchers) == 1
    checked(shell, "%checkseries monthly")
