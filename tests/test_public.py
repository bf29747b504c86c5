"""The names that a person may rely on."""

from __future__ import annotations

import inspect
import re
import subprocess
import sys

import pytest

import preflight_magic as pf

STEPS = ("PerDay", "Log", "Power", "Logit", "Difference", "RemoveTrend", "RemoveShift", "RemovePattern")
CHECK = {
    "season": None,
    "horizon": None,
    "time": None,
    "series": None,
    "value": None,
    "significance": 0.05,
    "only": None,
    "exclude": None,
    "repair": True,
    "cache": True,
    "pool": None,
    "progress": None,
}
SERIES_REPORT = ["name", "series", "findings", "verdict", "plan", "code", "leave_out", "put_in"]
REPORT = ["names", "overview", "code", "save", "__getitem__", "__iter__", "__len__"]


def test_every_public_name_is_there():
    for name in (*pf.__all__, *STEPS, "load_ipython_extension", "unload_ipython_extension"):
        assert getattr(pf, name) is not None
    assert {"check", "stream", "demo", "Report", "SeriesReport", "Plan", "CheckError"} <= set(pf.__all__)


def test_unknown_name_is_an_attribute_error():
    with pytest.raises(AttributeError, match="'forecast'"):
        pf.forecast  # noqa: B018


def test_options_of_check():
    given = inspect.signature(pf.check).parameters
    options = {name: one.default for name, one in given.items() if one.kind is one.KEYWORD_ONLY}
    assert options.items() >= CHECK.items()
    assert next(iter(given)) == "frame"
    for name, default in options.items():
        if name not in CHECK:
            assert default is None


def test_stream_takes_the_options_of_check():
    frame = pf.demo.ferry_line(months=30)[["freight"]]
    found = next(pf.stream(frame, **CHECK))
    assert found.name == "freight"


def test_members():
    assert all(hasattr(pf.SeriesReport, name) for name in SERIES_REPORT)
    assert all(hasattr(pf.Report, name) for name in REPORT)
    assert all(hasattr(pf.Plan, name) for name in ("apply", "back_transform", "__bool__", "__str__", "__eq__"))
    for owner in (pf.SeriesReport, pf.Report, pf.Plan):
        for name, member in inspect.getmembers(owner):
            if not name.startswith("_") and (callable(member) or isinstance(member, property)):
                assert inspect.getdoc(member), f"{owner.__name__}.{name} says nothing about itself"


def test_error_is_a_value_error():
    assert issubclass(pf.CheckError, ValueError)
    assert pf.CheckError.__name__ == "CheckError"


def test_version():
    assert re.fullmatch(r"\d+\.\d+\.\d+", pf.__version__)


def test_import_costs_next_to_nothing():
    # The extension is loaded at the start of many notebooks; what is heavy waits until it is needed.
    source = "import sys, preflight_magic; print(*sys.modules)"
    found = subprocess.run([sys.executable, "-c", source], capture_output=True, text=True, check=True)
    loaded = set(found.stdout.split())
    assert "preflight_magic" in loaded
    assert loaded.isdisjoint({"scipy", "statsmodels", "matplotlib", "ipywidgets", "preflight_magic.batch"})


def test_steps_are_the_classes_of_the_plans():
    plan = pf.Plan((), (pf.Difference(1), pf.Log()))
    assert plan.steps == (pf.Log(), pf.Difference(1))
    assert plan == pf.Plan((), (pf.Log(), pf.Difference(1)))
    assert str(plan) == "log, difference 1"
    assert bool(plan)
    assert not pf.Plan()
