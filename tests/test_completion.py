from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import pandas as pd
import pytest

from preflight_magic.command_line import OPTIONS
from preflight_magic.completion import offers


class Report:
    names = ("passengers", "crew overtime", 2020)

    def code(self) -> str:
        return ""


@pytest.fixture
def variables() -> dict[str, Any]:
    monthly = pd.DataFrame({"passengers": [1], "crew overtime": [2], 2020: [3]})
    with ThreadPoolExecutor(1) as workers:
        return {
            "monthly": monthly,
            "_": monthly,
            "kept": Report(),
            "workers": workers,
            "month": 3,
            "Frame": pd.DataFrame,
        }


@pytest.mark.parametrize(
    ("rest", "fragment", "words"),
    [
        ("mon", "mon", ["monthly"]),
        ("monthly --se", "--se", ["--season", "--series"]),
        ("monthly --only pas", "pas", ["passengers"]),
        ("monthly --only passengers,20", "20", ["2020"]),
        ("monthly --only passengers, cr", "cr", ['"crew overtime"']),
        ('monthly --only "crew ov', '"crew ov', ['"crew overtime"']),
        ("monthly --only 'cr", "'cr", ["'crew overtime'"]),
        ("--value pa", "pa", []),
        ("monthly --value ", "", ["passengers", '"crew overtime"', "2020"]),
        ("monthly --pool ", "", ["workers"]),
        ("monthly --horizon ", "", []),
        ("monthly[['pas", "monthly[['pas", []),
    ],
)
def test_line_of_a_check(variables: dict[str, Any], rest: str, fragment: str, words: list[str]) -> None:
    found, offered = offers("checkseries", False, rest, variables)
    assert found == fragment
    assert [text for text, _ in offered] == words


def test_records_are_offered_for_a_comparison(
    variables: dict[str, Any], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    for name in ("last.json", "last month.json", "kept.csv", ".hidden.json"):
        (tmp_path / name).touch()
    (tmp_path / "years").mkdir()
    (tmp_path / "years" / "a.json").touch()
    found = {rest: [text for text, _ in offers("checkseries", False, f"monthly --against {rest}", variables)[1]]
             for rest in ("", "la", '"la', "years/", "none/", "ke")}  # fmt: skip
    assert found == {
        "": ["kept", '"last month.json"', "last.json", "years/"],
        "la": ['"last month.json"', "last.json"],
        '"la': ['"last month.json"', '"last.json"'],
        "years/": ["years/a.json"],
        "none/": [],
        "ke": ["kept"],
    }


def test_options_given_are_left_out_unless_they_may_be_repeated(variables: dict[str, Any]) -> None:
    _, offered = offers("checkseries", False, "monthly --season 12 --only passengers ", variables)
    assert [text for text, _ in offered] == [one.name for one in OPTIONS if one.name != "--season"]


def test_cell_form_offers_options_alone(variables: dict[str, Any]) -> None:
    _, offered = offers("checkseries", True, "", variables)
    assert [text for text, _ in offered] == [one.name for one in OPTIONS]


@pytest.mark.parametrize(
    ("rest", "words"),
    [("", ["kept"]), ("kept pas", ["passengers"]), ("kept passengers cr", ['"crew overtime"']), ("monthly ", [])],
)
def test_line_of_the_code(variables: dict[str, Any], rest: str, words: list[str]) -> None:
    assert [text for text, _ in offers("seriescode", False, rest, variables)[1]] == words
