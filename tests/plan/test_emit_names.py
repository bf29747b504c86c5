"""Names and sentences that try to leave the literal or the comment they stand in."""

import ast
import datetime

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Difference, Log
from preflight_magic.plan.emit import emit
from preflight_magic.plan.literals import comment, literal, plain
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.prove import prove

PLAN = Plan((), (Log(), Difference(1)))


class Sly(str):
    def __repr__(self):
        return "boom()"

    def __str__(self):
        return "boom()"


class Strange:
    def __repr__(self):
        return "boom()"


HOSTILE = [
    "it's",
    'say "fuel"',
    '"""\nboom()\n"""',
    "'''\nboom()\n'''",
    "'; boom(); '",
    "'): 0}\nboom()\n#",
    "\\",
    "\\'",
    "\\\nboom()",
    "one\ntwo",
    "one\r\ntwo\rboom()",
    "line\u2028boom()\u2029boom()",
    "\x0cboom()\x0b\x1c\x1d\x85boom()",
    "\x00",
    "\ud800",
    "\u202eboom()",
    "{boom()}",
    "%s %(boom)s",
    "# boom()",
    "x" * 300,
    "'" * 150,
    "\u2028" * 150,
    "",
    Sly("boom()"),
    Strange(),
    ("port", 3),
    ("a\n'", ("b", None), pd.Timestamp("2020-01-01")),
    (Strange(),),
    (),
    None,
    3,
    -2.5,
    float("nan"),
    float("inf"),
    True,
    b"\n'",
    np.int64(7),
    np.float64(0.5),
    np.str_("boom()\n"),
    pd.Timestamp("2020-01-01 06:00", tz="Europe/Oslo"),
    pd.Period("2020-03", freq="M"),
    datetime.date(2020, 1, 1),
]


def boom():
    raise AssertionError("a name was executed")


def execute(source):
    namespace = {"boom": boom}
    exec(compile(source, "<generated>", "exec"), namespace)
    return namespace


def assert_only_definitions(source):
    """Nothing but imports, functions and the one mapping, whose keys are literals."""
    for node in ast.parse(source).body:
        if isinstance(node, ast.Assign):
            assert node.targets[0].id == "PLANS"
            calls = [call for key in node.value.keys for call in ast.walk(key) if isinstance(call, ast.Call)]
            assert all(call.func.attr in ("Timestamp", "Period") for call in calls)
        else:
            assert isinstance(node, ast.Import | ast.FunctionDef)
    assert "boom" not in {node.id for node in ast.walk(ast.parse(source)) if isinstance(node, ast.Name)}


@pytest.mark.parametrize("name", HOSTILE, ids=range(len(HOSTILE)))
def test_name_stays_a_literal(name, monthly):
    for plans in (
        {name: (PLAN, {Log(): f"because of {name}"})},
        {"passengers": (PLAN, {}), name: (PLAN, {})},
        {"passengers": (Plan(), {}), name: (PLAN, {Log(): str(name)})},
    ):
        source = emit(plans)
        assert_only_definitions(source)
        assert all(line.isprintable() for line in source.split("\n"))
        assert max(len(line) for line in source.split("\n")) <= 100
        namespace = execute(source)
        if len(plans) == 2:
            assert len(namespace["PLANS"]) == 2
            assert plain(name) in namespace["PLANS"]
        prove(PLAN, source, monthly.rename(name), 6)


@pytest.mark.parametrize("name", HOSTILE, ids=range(len(HOSTILE)))
def test_literal_is_one_line_and_gives_the_name_back(name):
    text = literal(name)
    assert text.isprintable()
    assert eval(text, {"pd": pd, "__builtins__": {}}) == plain(name)


def test_names_that_have_a_literal_are_kept():
    for name in ("freight", ("port", 3), 7, None, 2.5, pd.Timestamp("2020-01-01"), pd.Period("2020Q1", freq="Q")):
        assert plain(name) == name


@pytest.mark.parametrize("text", [name for name in HOSTILE if isinstance(name, str)], ids=repr)
def test_comment_stays_a_comment(text):
    lines = comment(f"before {text} after", 4)
    assert all(line.startswith("    # ") and line.isprintable() for line in lines)
    assert all(len(line) <= 100 for line in lines)
    assert ast.parse("\n".join(line.strip() for line in lines)).body == []
