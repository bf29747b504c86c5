"""What belongs to the caller is as it was: settings, filters, random states, figures, loggers, also after an error."""

from __future__ import annotations

import logging
import random
import threading
import warnings

import matplotlib as mpl
import matplotlib.pyplot as plt
import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.present.html import page
from preflight_magic.present.widgets import bundle
from tests.small_table import small_table

STRANGE_PICTURES = {
    "text.usetex": True,
    "font.family": ["no such font"],
    "path.sketch": (1.0, 100.0, 2.0),
    "lines.linewidth": 30.0,
    "text.color": "red",
    "figure.dpi": 7.0,
}


def state():
    """Everything of the process that a library has no business to change."""
    loggers = {name: one for name, one in logging.root.manager.loggerDict.items() if isinstance(one, logging.Logger)}
    return {
        "filters": list(warnings.filters),
        "numpy errors": np.geterr(),
        "numpy printing": np.get_printoptions(),
        "numpy random": np.random.get_state()[1].tobytes(),  # noqa: NPY002
        "random": random.getstate(),
        "pandas": {key: pd.get_option(key) for key in ("display.max_rows", "display.precision", "display.width")},
        "pictures": dict(mpl.rcParams),
        "backend": mpl.get_backend(),
        "figures": plt.get_fignums(),
        "levels": {name: (one.level, one.handlers[:], one.disabled) for name, one in loggers.items()},
        "root logger": (logging.root.level, logging.root.handlers[:]),
        "threads": threading.active_count(),
    }


def differences(before, after):
    changed = {key for key in before if key != "levels" and before[key] != after[key]}
    # Modules loaded on the way bring loggers of their own.
    changed |= {name for name, told in before["levels"].items() if after["levels"][name] != told}
    return changed


def everything(frame):
    report = pf.check(frame, cache=False, progress=False)
    shown = page(report) + bundle(report)["text/html"] + bundle(report[report.names[0]])["text/html"]
    report.code()
    for one in report:
        if one.problem is None:
            one.reference_forecast(3)
            one.put_in(pf.Difference(2))
    return report, shown


def test_nothing_of_the_caller_changes():
    everything(small_table(bad=True))
    before = state()
    everything(small_table(bad=True))
    assert differences(before, state()) == set()


def test_strange_settings_of_the_caller_change_nothing_and_stay():
    _, usual = everything(small_table())
    with (
        warnings.catch_warnings(),
        np.errstate(all="raise"),
        mpl.rc_context(),
        pd.option_context("display.max_rows", 1),
    ):
        warnings.simplefilter("error")
        mpl.rcParams.update(STRANGE_PICTURES)
        before = state()
        report, shown = everything(small_table())
        assert differences(before, state()) == set()
    assert all(one.problem is None for one in report)
    assert shown == usual


@pytest.mark.parametrize("error", [KeyboardInterrupt, MemoryError, RuntimeError])
@pytest.mark.parametrize("after", [1, 2])
def test_nothing_changes_after_an_interrupt(error, after):
    def stop(done, total):
        if done == after:
            raise error

    everything(small_table())
    frame = small_table()
    kept = frame.copy(deep=True)
    before = state()
    with pytest.raises(error):
        pf.check(frame, cache=False, progress=stop)
    assert differences(before, state()) == set()
    pd.testing.assert_frame_equal(frame, kept)


def test_an_interrupt_inside_the_numbers_leaves_the_error_state(monkeypatch):
    from preflight_magic import ladder

    def interrupted(*arguments):
        np.seterr(all="ignore")
        raise KeyboardInterrupt

    monkeypatch.setattr(ladder, "compare", interrupted)
    before = state()
    with pytest.raises(KeyboardInterrupt):
        pf.check(small_table(), cache=False, progress=False)
    assert differences(before, state()) == set()


def test_read_only_views_are_read():
    values = small_table().to_numpy(copy=True)
    values.setflags(write=False)
    frame = pd.DataFrame(values, index=small_table().index, columns=list("abc"), copy=False)
    report = pf.check(frame.iloc[::1], cache=False, progress=False)
    assert [one.problem for one in report] == [None] * 3
    assert not values.flags.writeable


def test_the_series_of_a_report_is_a_copy():
    frame = small_table()
    report = pf.check(frame, cache=False, progress=False)
    given, transformed = report["cargo"].series, report["cargo"].transformed
    given.iloc[:] = 0.0
    transformed.iloc[:] = 0.0
    assert (report["cargo"].series == frame["cargo"]).all()
    assert report["cargo"].transformed.abs().max() > 0


@pytest.mark.parametrize(
    ("options", "told"),
    [
        ({"pool": 3}, "pool is 3, not an executor"),
        ({"progress": "yes"}, "progress is 'yes'; give True"),
        ({"significance": 1e-300}, "significance is 1e-300; give a number between"),
    ],
)
def test_wrong_tools_are_refused(options, told):
    with pytest.raises(pf.CheckError, match=told):
        pf.check(small_table(), **options)
    with pytest.raises(pf.CheckError, match=told):
        list(pf.stream(small_table(), **options))


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        ({"horizon": 0}, "horizon is 0"),
        ({"horizon": "x"}, "horizon is 'x'"),
        ({"horizon": 2.5}, "horizon is 2.5"),
        ({"horizon": 10**12}, "from 1 to 10,000"),
        ({"coverage": float("nan")}, "coverage is nan"),
        ({"coverage": "much"}, "coverage is 'much'"),
        ({"coverage": 1.0}, "coverage is 1.0"),
    ],
)
def test_forecasts_out_of_range_are_refused(arguments, told):
    one = pf.check(small_table(), progress=False)["cargo"]
    with pytest.raises(pf.CheckError, match=told):
        one.reference_forecast(**arguments)


def test_forecasts_past_the_last_date_are_refused():
    years = pd.date_range("1990-01-01", periods=30, freq="YS", unit="ns")
    one = pf.check(small_table().set_axis(years)["cargo"], progress=False)["cargo"]
    assert len(one.reference_forecast(200)) == 200
    with pytest.raises(pf.CheckError, match="horizon is 300, and pandas has not so many stamps after 2019-01-01"):
        one.reference_forecast(300)
