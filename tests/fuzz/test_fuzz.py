"""Tables, options and plans of every kind: refused in a sentence, or checked with numbers that are numbers."""

from __future__ import annotations

import os

import pytest
from hypothesis import HealthCheck, given, settings

from tests.fuzz.cases import cases
from tests.fuzz.hold import hold

CASES = int(os.environ.get("PREFLIGHT_CASES", "20000"))
QUICK = settings(
    max_examples=10, deadline=None, database=None, derandomize=True, suppress_health_check=list(HealthCheck)
)
LONG = settings(QUICK, max_examples=CASES, derandomize=False, print_blob=True)


@given(cases())
@QUICK
def test_any_table_and_any_options(case):
    hold(case)


@pytest.mark.nightly
@given(cases())
@LONG
def test_many_tables_and_options(case):
    hold(case)
