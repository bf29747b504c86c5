"""Measures as labels and values."""

import math

import numpy as np
import pandas as pd
import pytest

from preflight_magic.present.measures import measure_rows


@pytest.mark.parametrize(
    ("key", "value", "row"),
    [
        ("n", 144, ("observations", "144")),
        ("presence_p", 4.7e-90, ("p-value of a season", "< 0.001")),
        ("missing_share", 1 / 144, ("missing share", "0.69 %")),
        (
            "trend_shares",
            {"no trend": 0.9976, "trend": 0.002, "second": 0.0},
            ("evidence for a trend", "no trend: over 99 %, trend: under 1 %, second difference: under 1 %"),
        ),
        (
            "season_shares",
            {"difference": 0.999, "fixed": 0.001},
            ("evidence by kind of season", "wandering: over 99 %, fixed pattern: under 1 %"),
        ),
        ("share_less", 1.86e-11, ("evidence for fewer differences than taken", "under 1 %")),
        ("presence_standardised", 1.85e-96, ("p-value of a season, standardised to 100 values", "< 0.001")),
        ("d_shares", {1: 0.74, 0: 0.26}, ("evidence by number of differences", "1: 74 %, 0: 26 %")),
        ("half_life", 1.0, ("half-life", "1 month")),
        ("shift_at", pd.Period("2019-04", "M"), ("shift at", "2019-04")),
        ("whole_numbers", np.True_, ("whole numbers", "yes")),
    ],
)
def test_rows(key: str, value: object, row: tuple[str, str]) -> None:
    assert list(measure_rows({key: value}, "month")) == [row]


@pytest.mark.parametrize("value", [None, (), "", math.nan, object(), pd.NaT, {}])
def test_what_says_nothing_is_left_out(value: object) -> None:
    assert list(measure_rows({"outliers_at": value}, "month")) == []
