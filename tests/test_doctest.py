"""Examples in docstrings do what they show."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import pytest

import preflight_magic

MODULES = sorted(
    one.name
    for one in pkgutil.walk_packages(preflight_magic.__path__, "preflight_magic.")
    if not one.name.endswith("__main__")
)


@pytest.mark.parametrize("name", ["preflight_magic", *MODULES])
def test_examples(name):
    module = importlib.import_module(name)
    found = doctest.testmod(module, optionflags=doctest.NORMALIZE_WHITESPACE | doctest.ELLIPSIS)
    assert found.failed == 0


def test_package_shows_an_example_that_runs():
    finder = doctest.DocTestFinder(recurse=False)
    (examples,) = finder.find(preflight_magic, "preflight_magic")
    run = [one for one in examples.examples if not one.options.get(doctest.SKIP)]
    assert len(run) >= 2
