"""Long tables of many series that differ in span: read group by group, never spread out."""

from __future__ import annotations

import tracemalloc

import numpy as np
import pandas as pd

from preflight_magic.intake import read

SERIES, DAYS = 500, 40


def staggered() -> pd.DataFrame:
    """Each series begins when the one before it has ended; rows of one day stand together, as in a ledger."""
    days = pd.date_range("1950-01-01", periods=SERIES * DAYS, freq="D")
    names = np.repeat([f"trip {i}" for i in range(SERIES)], DAYS)
    frame = pd.DataFrame({"day": days, "trip": names, "cars": np.random.default_rng(2).poisson(40.0, len(days))})
    return frame.sample(frac=1.0, random_state=1).sort_values("day", kind="stable")


def test_series_of_other_spans_are_read_as_they_are() -> None:
    frame = staggered()
    found = read(frame, time="day", series="trip", value="cars", season=7)
    assert [one.name for one in found] == [f"trip {i}" for i in range(SERIES)]
    assert all(one.problem is None and len(one.values) == DAYS for one in found)
    expected = frame.loc[frame["trip"] == "trip 321"].set_index("day")["cars"]
    np.testing.assert_array_equal(found[321].values, expected)
    assert found[321].values.index.equals(pd.DatetimeIndex(expected.index))


def test_memory_grows_with_the_rows_and_not_with_the_spans() -> None:
    frame = staggered()
    read(frame.head(10 * DAYS), time="day", series="trip", value="cars", season=7)
    tracemalloc.start()
    found = read(frame, time="day", series="trip", value="cars", season=7)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert len(found) == SERIES
    # A column a series and a row a day would take 80 MB.
    dense = 8 * SERIES * SERIES * DAYS
    assert peak < dense / 8
