"""Stamps and counts as sentences show them."""

import pandas as pd
import pytest

from preflight_magic.stamps import counted, stamp_text


@pytest.mark.parametrize(
    ("stamp", "kind", "text"),
    [
        (pd.Period("2019-04", "M"), "monthly", "2019-04"),
        (pd.Period("2019Q2", "Q"), "quarterly", "2019Q2"),
        (pd.Period("2019-04-03", "W"), "weekly", "2019-04-01"),
        (pd.Timestamp("2019-04-30"), "monthly", "2019-04"),
        (pd.Timestamp("2019-04-30"), "yearly", "2019"),
        (pd.Timestamp("2019-04-30"), None, "2019-04-30"),
        (pd.Timestamp("2019-04-30"), "hourly", "2019-04-30 00:00"),
        (pd.Timestamp("2019-04-30 13:30", tz="Europe/Berlin"), None, "2019-04-30 13:30"),
        (pd.Timestamp("2019-04-30 13:30:05"), None, "2019-04-30 13:30:05"),
        (pd.Timestamp("2019-04-30 13:30:05.25"), None, "2019-04-30 13:30:05.250000"),
        (17, "counter", "17"),
        ("north", None, "north"),
    ],
)
def test_a_stamp_is_as_brief_as_its_calendar(stamp, kind, text):
    assert stamp_text(stamp, kind) == text


def test_counts_agree_with_their_noun():
    assert (counted(1, "value"), counted(3, "value"), counted(0, "row")) == ("1 value", "3 values", "0 rows")
