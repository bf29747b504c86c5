"""The first rung: calendar, span and season in one line."""

import numpy as np
import pandas as pd
import pytest

from preflight_magic.intake import read
from preflight_magic.model import Evidence, TimeSeries
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.time_index import RUNG

MONTHLY = {
    "kind": "monthly",
    "freq": "M",
    "start": "1990-01",
    "end": "1999-12",
    "n": 120,
    "season": (12,),
    "season_asked": False,
    "repairs": (),
    "notes": (),
}
NOTE = "20 values show no season of 12, which takes 30; the series is read without one, unless season=12 is given."


@pytest.mark.parametrize(
    ("change", "headline", "reason"),
    [
        ({}, "monthly, 1990-01 to 1999-12, 120 values, season 12", "The seasonal period is the one of the calendar."),
        ({"season_asked": True, "season": (6,)}, "season 6", "The seasonal period is the one asked for."),
        (
            {"kind": "hourly", "season": (24, 168)},
            "season 24 and 168",
            "The seasonal periods are those of the calendar.",
        ),
        ({"season": (1,), "notes": (NOTE,)}, "no season", NOTE),
        ({"season": (1,), "kind": "yearly"}, "no season", "This calendar has no season of its own."),
        ({"season": (1,), "season_asked": True}, "no season", "No season was asked for."),
        (
            {"kind": "counter", "start": "0", "end": "119", "season": (4,), "season_asked": True},
            "numbered steps, 0 to 119, 120 values, season 4",
            "asked for",
        ),
    ],
)
def test_a_regular_index_is_clear(change, headline, reason):
    found = RUNG.judge(Evidence({**MONTHLY, **change}), Thresholds())
    assert (found.verdict, found.steps) == ("clear", ())
    assert found.headline.endswith(headline)
    assert reason in found.reason


def test_a_problem_is_infeasible():
    found = RUNG.judge(Evidence(problem="series 'a': the index is not sorted."), Thresholds())
    assert (found.verdict, found.reason) == ("infeasible", "series 'a': the index is not sorted.")


def test_examine_describes_what_was_read():
    values = np.random.default_rng(0).normal(size=120)
    values[[4, 7]] = np.nan
    index = pd.date_range("1990-01-31", periods=120, freq="ME")
    (series,) = read(pd.Series(values, index=index, name="freight"))
    found = RUNG.examine(series, Context()).measures
    assert found == MONTHLY | {"freq": "ME", "repairs": ("fill gaps along the mean pattern of 12",)}
    asked = RUNG.examine(series, Context(Settings(season=(12,))))
    assert asked.measures["season_asked"] is True


def test_examine_without_a_calendar_or_without_values():
    nothing = pd.Series([], dtype=float)
    bare = RUNG.examine(TimeSeries("a", nothing, None, problem="series 'a': unsorted."), Context())
    assert bare.problem == "series 'a': unsorted."
    frame = pd.DataFrame({"a": range(20), "b": "x"}, index=pd.period_range("2012-01", periods=20, freq="M"))
    text = read(frame)[1]
    found = RUNG.judge(RUNG.examine(text, Context()), Thresholds())
    assert (found.verdict, found.headline) == ("clear", "monthly")
