"""Values written as JSON and read back."""

from __future__ import annotations

import datetime
import json
import math
from decimal import Decimal
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Root
from preflight_magic.record.tags import BadTagError, CannotTagError, decode, encode


def through_json(value: object) -> object:
    return decode(json.loads(json.dumps(encode(value), allow_nan=False)))


@pytest.mark.parametrize(
    "value",
    [
        None, True, False, 0, -7, 2**62, 0.1, -0.0, 1e300, 5e-324, "", "f\u00e4hre", "\ud800", "\u2028</script>",
        (), (1,),
        ("a", (2, None)), ["x", 1.5], {"a": 1}, {0: 0.9, 1: 0.1}, {("a", 1): "b"},
        pd.Period("2021-03", "M"), pd.Period("2021-03-05", "W-SUN"), pd.Period("1021", "Y"),
        pd.Period("2021Q1", "Q-MAR"),
        pd.Period("2021-03-01 05:00", "h"), pd.Timestamp("2021-03-01"),
        pd.Timestamp("2021-03-01 01:02:03.123456789"), pd.Timestamp("2021-10-31 02:30+02:00"),
        pd.Timestamp("2021-07-01", tz="Europe/Oslo"), pd.Timestamp("2021-07-01", tz="UTC"),
        datetime.date(2021, 3, 1), Root("MA", 0.95, math.inf, 0.02, True), (Root("AR", 0.5, 2.0, 0.1),),
    ],
    ids=repr,
)  # fmt: skip
def test_comes_back_as_it_was(value: object) -> None:
    back = through_json(value)
    assert back == value
    assert type(back) is type(value)


@pytest.mark.parametrize(
    ("value", "plain"),
    [(np.float64(0.5), 0.5), (np.int32(3), 3), (np.bool_(True), True),
     (np.datetime64("2021-03"), pd.Timestamp("2021-03")),
     (datetime.datetime(2021, 3, 1, 5), pd.Timestamp("2021-03-01 05:00"))],
)  # fmt: skip
def test_numpy_and_datetime_come_back_plain(value: object, plain: object) -> None:
    assert through_json(value) == plain


def test_both_hours_of_the_autumn_night_stay_apart() -> None:
    zone = ZoneInfo("Europe/Oslo")
    hours = [pd.Timestamp(datetime.datetime(2021, 10, 31, 2, 30, fold=fold, tzinfo=zone)) for fold in (0, 1)]
    first, second = (through_json(hour) for hour in hours)
    assert second - first == pd.Timedelta("1h")  # type: ignore[operator]


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_is_valid_json(value: float) -> None:
    back = through_json(value)
    assert isinstance(back, float)
    assert back == value or (math.isnan(back) and math.isnan(value))


@pytest.mark.parametrize(
    "value",
    [object(), b"x", {1, 2}, Decimal(1), 1j, np.zeros(2), pd.NaT, pd.NA, 2**70, datetime.time(5), pd.Interval(0, 1)],
)
def test_other_kinds_are_refused(value: object) -> None:
    with pytest.raises(CannotTagError):
        encode(value)


@pytest.mark.parametrize(
    "told",
    [
        {}, {"x": 1}, {"tuple": 1}, {"tuple": [], "more": 1}, {"mapping": [[1]]}, {"mapping": [[[], 1]]},
        {"float": "1"},
        {"period": "a", "freq": "M"}, {"period": True, "freq": "M"}, {"period": 1, "freq": "os.system"},
        {"period": 1, "freq": "M" * 1000}, {"period": 2**62, "freq": "Y"}, {"period": -(2**62), "freq": "D"},
        {"timestamp": "now", "zone": None}, {"timestamp": "2021-13-01T00:00:00", "zone": None},
        {"timestamp": "2021-01-01T00:00:00", "zone": "../../etc/passwd"},
        {"timestamp": "2021-01-01T00:00:00", "zone": "dateutil//etc/passwd"},
        {"timestamp": "2021-01-01T00:00:00", "zone": "Nowhere/Land"}, {"date": "2021-02-30"}, {"date": "today"},
        {"root": {}}, {"root": {"part": "XX", "modulus": 1.0, "period": 2.0, "standard_error": 0.1, "seasonal": True}},
        {"root": {"part": "AR", "modulus": "1", "period": 2.0, "standard_error": 0.1, "seasonal": True}},
        [[[[[[[[[[[1]]]]]]]]]]],
    ],
    ids=repr,
)  # fmt: skip
def test_what_stands_for_nothing_is_refused(told: object) -> None:
    with pytest.raises(BadTagError):
        decode(told)
