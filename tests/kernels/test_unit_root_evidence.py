"""What a finding shows of the tests of a unit root."""

import numpy as np
import pytest

from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import kpss
from preflight_magic.kernels.unit_root_evidence import level_tests, root_tests
from preflight_magic.kernels.zivot_andrews import zivot_andrews


def test_a_runaway_bandwidth_of_kpss_is_stopped() -> None:
    stopped = 0
    for seed in range(60):
        y = np.random.default_rng(seed).standard_normal(40)
        shown = next(one for one in root_tests(y, "as given") if (one.test, one.terms) == ("KPSS", "ct"))
        plain = kpss(y, "ct")
        assert plain is not None
        again = kpss(y, "ct", min(plain.bandwidth, 8))
        assert again is not None
        assert (shown.lags, shown.statistic, shown.p_value) == (again.bandwidth, again.statistic, again.p_value)
        stopped += plain.bandwidth > 8
    assert stopped > 0


def test_the_level_has_all_tests_and_a_difference_the_first_four() -> None:
    y = np.random.default_rng(4).standard_normal(100).cumsum()
    level, others = level_tests(y, "log", lambda at: f"month {at}"), root_tests(y, "log")
    assert level[: len(others)] == others
    assert [(one.test, one.terms) for one in level] == [
        *((test, terms) for test in ("ADF", "KPSS", "DF-GLS", "Phillips-Perron") for terms in ("c", "ct")),
        ("Zivot-Andrews", "ct"),
        ("union of rejections", "ct"),
    ]
    broken, union = zivot_andrews(y, criterion="MAIC"), union_of_rejections(y)
    assert broken is not None
    assert union is not None
    assert (level[-2].statistic, level[-2].lags) == (broken.statistic, broken.lags)
    assert level[-2].options["break"] == f"month {broken.break_at}"
    assert level[-1].statistic == pytest.approx(union.statistic, rel=1e-9)


def test_a_series_that_carries_nothing_has_no_tests() -> None:
    assert level_tests(np.full(60, 2.0), "as given", str) == []
