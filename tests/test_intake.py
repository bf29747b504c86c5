"""Intake: what counts as numbers, what a series is, and one clear sentence for everything else."""

import datetime
import decimal
import warnings

import numpy as np
import pandas as pd
import pytest

from preflight_magic.intake import read
from preflight_magic.intake.columns import FEWEST_VALUES
from preflight_magic.model import CheckError, FillGaps
from preflight_magic.policy import Thresholds

MONTHS = pd.period_range("2012-01", periods=60, freq="M", name="month")
RNG = np.random.default_rng(11)


def ferry(n=60):
    values = np.random.default_rng(3).normal(100.0, 9.0, size=(n, 3)).round(2)
    return pd.DataFrame(values, index=MONTHS[:n], columns=["passengers", "freight", "fuel_price"])


def one(frame, **options):
    (series,) = read(frame, **options)
    return series


def problem(column, **options):
    """Problem of a column beside one that is fine."""
    frame = pd.DataFrame({"fine": RNG.normal(size=len(column)), "freight": column}, index=MONTHS[: len(column)])
    return read(frame, **options)[1].problem


# -------------------------------------------------------------------------------------------------------- shapes
def test_a_wide_frame_gives_a_series_a_column():
    frame = ferry()
    found = read(frame)
    assert [series.name for series in found] == ["passengers", "freight", "fuel_price"]
    for series in found:
        pd.testing.assert_series_equal(series.values, frame[series.name])
        assert (series.season, series.repairs, series.problem, series.notes) == ((12,), (), None, ())


def test_the_frame_is_never_changed_nor_shared():
    frame = ferry()
    frame.loc["2013-01":"2013-03", "freight"] = np.nan
    before = frame.copy(deep=True)
    found = read(frame, exclude=[("2012-05", "2012-06")])
    pd.testing.assert_frame_equal(frame, before)
    kept = found[0].values.iloc[0]
    frame.iloc[0, 0] = -1.0
    assert found[0].values.iloc[0] == kept


def test_a_series_with_and_without_a_name():
    frame = ferry()
    assert one(frame["freight"]).name == "freight"
    assert one(frame["freight"].rename(None)).name == "series"


def test_names_may_be_anything_hashable():
    frame = ferry().set_axis([("ferry", 1), 7, datetime.date(2020, 1, 1)], axis=1)
    assert [series.name for series in read(frame)] == [("ferry", 1), 7, datetime.date(2020, 1, 1)]
    (nameless, *_) = read(ferry().set_axis([np.nan, "a", "b"], axis=1))
    assert nameless.problem is None
    levels = ferry().set_axis(pd.MultiIndex.from_tuples([("a", "x"), ("a", "y"), ("b", "x")]), axis=1)
    assert [series.name for series in read(levels)] == [("a", "x"), ("a", "y"), ("b", "x")]
    assert one(levels, only=("a", "y")).name == ("a", "y")


def test_only_chooses_and_orders():
    assert [series.name for series in read(ferry(), only=["fuel_price", "passengers"])] == ["fuel_price", "passengers"]
    assert one(ferry(), only="freight").name == "freight"


def test_a_column_may_hold_the_time():
    frame = ferry().to_timestamp().reset_index()
    found = read(frame, time="month")
    assert [series.name for series in found] == ["passengers", "freight", "fuel_price"]
    assert found[0].calendar.freq == "MS"
    assert one(frame, time="month", value="freight").name == "freight"


def test_tables_of_other_libraries():
    pl = pytest.importorskip("polars")
    frame = ferry().to_timestamp().reset_index()
    with warnings.catch_warnings():
        # Another library's own notices are no concern here.
        warnings.simplefilter("ignore")
        table = pl.from_pandas(frame)
    found = read(table, time="month")
    assert found[1].values.tolist() == frame["freight"].tolist()
    with pytest.raises(CheckError, match="column 'month' holds the dates; pass time='month'"):
        read(table)


def long(frame):
    return frame.melt(ignore_index=False, var_name="line", value_name="tonnes").reset_index()


def test_a_long_table_is_grouped():
    frame = ferry()
    for options in ({"value": "tonnes"}, {}):
        found = read(long(frame), time="month", series="line", **options)
        assert [series.name for series in found] == list(frame.columns)
        for series in found:
            pd.testing.assert_series_equal(series.values, frame[series.name])


def test_groups_of_a_long_table_may_interleave_and_have_their_own_spans_and_problems():
    table = long(ferry()).sort_values("month", kind="stable")
    late = (table["line"] == "freight") & (table["month"] < pd.Period("2013-01", "M"))
    hole = (table["line"] == "fuel_price") & (table["month"] == pd.Period("2014-02", "M"))
    table = table[~late & ~hole].reset_index(drop=True)
    found = read(table, time="month", series="line", repair="fill gaps")
    assert [series.name for series in found] == ["passengers", "fuel_price", "freight"]
    passengers, fuel, freight = found
    assert passengers.values.index[0] == pd.Period("2012-01", "M")
    assert (freight.values.index[0], len(freight.values), freight.problem) == (pd.Period("2013-01", "M"), 48, None)
    assert fuel.problem.startswith("series 'fuel_price': the index is monthly, but after 2014-01 comes 2014-03")
    assert "frame.pivot(index='month', columns='line', values='tonnes').reindex(" in fuel.problem


def test_long_tables_out_of_order():
    table = long(ferry())
    with pytest.raises(CheckError, match=r"frame = frame.sort_values\(\['line', 'month'\]\)"):
        read(table[::-1], time="month", series="line", repair=False)
    twice = pd.concat([table, table.iloc[[0]]]).sort_values(["line", "month"])
    assert "frame.drop_duplicates(['line', 'month'])" in " ".join(
        series.problem or "" for series in read(twice, time="month", series="line", repair=False)
    )


def test_long_tables_with_too_little_told():
    table = long(ferry()).assign(rate=1.5)
    with pytest.raises(CheckError, match="2 columns could hold the values of the series; pass value= and"):
        read(table, time="month", series="line")
    with pytest.raises(CheckError, match="names no series in 1 row, the first in row 4"):
        read(table.assign(line=table["line"].where(table.index != 3)), time="month", series="line", value="tonnes")
    with pytest.raises(CheckError, match=r"time='moth', but no column has that name; did you mean 'month'\?$"):
        read(table, time="moth", series="line", value="tonnes")
    text = table.assign(month=table["month"].astype(str))
    with pytest.raises(CheckError, match=r"frame\['month'\] = pd.to_datetime\(frame\['month'\], format='ISO8601'\)"):
        read(text, time="month", series="line", value="tonnes", repair=["sort"])


# ------------------------------------------------------------------------------------------------------- numbers
@pytest.mark.parametrize(
    "dtype",
    ["float32", "int8", "uint16", "bool", "Int64", "Float64", "boolean", "int32[pyarrow]", "double[pyarrow]", "object"],
)
def test_numbers_of_any_dtype(dtype):
    if "pyarrow" in dtype:
        pytest.importorskip("pyarrow")
    plain = np.tile([0, 1, 1], 20)
    series = one(pd.Series(plain, index=MONTHS, name="freight").astype(dtype))
    assert series.problem is None
    assert series.values.dtype == np.float64
    assert series.values.tolist() == plain.tolist()


def test_missing_values_of_nullable_columns():
    for dtype in ("Int64", "Float64"):
        column = pd.Series(range(60), index=MONTHS, dtype=dtype)
        column.iloc[5] = pd.NA
        series = one(column)
        assert np.flatnonzero(series.values.isna()).tolist() == [5]
        assert series.repairs == (FillGaps(12),)


def test_decimals_and_mixed_numbers_are_numbers():
    pa = pytest.importorskip("pyarrow")
    column = pd.Series([decimal.Decimal(i) / 4 for i in range(59)] + [None], index=MONTHS, dtype=object)
    assert one(column).values.tolist() == [i / 4 for i in range(59)]
    arrow = column.astype(pd.ArrowDtype(pa.decimal128(9, 2)))
    assert one(arrow).values.tolist() == [i / 4 for i in range(59)]


def test_sparse_numbers():
    column = pd.Series(pd.arrays.SparseArray(np.tile([0.0, 0.0, 2.0], 20)), index=MONTHS)
    assert one(column).values.tolist() == [0.0, 0.0, 2.0] * 20


@pytest.mark.parametrize(
    ("column", "told"),
    [
        (
            ["calm"] * 60,
            "column 'freight': text, for example 'calm'; drop the column, or pass it as `series` if it names the "
            "series.",
        ),
        (
            ["1", "2", "3"] * 20,
            "text, for example '1'; convert it with `frame['freight'] = pd.to_numeric(",
        ),
        (
            ["20.50 €", "1,021 €"] * 30,
            "convert it with `frame['freight'] = pd.to_numeric(frame['freight'].str.replace(",
        ),
        (
            ["EUR 20.50", "EUR 7"] * 30,
            "convert it with `frame['freight'] = pd.to_numeric(frame['freight'].str.replace(",
        ),
        (["4,50 €", "5,20 €"] * 30, "drop the column, or pass it as `series`"),
        (["berth 1", "berth 2"] * 30, "drop the column, or pass it as `series`"),
        (["20 h", "3 d"] * 30, "drop the column, or pass it as `series`"),
        (pd.Categorical(["a", "b"] * 30), "column 'freight': categories, for example 'a'"),
        (pd.date_range("2020-01-01", periods=60), "column 'freight': dates, not numbers"),
        (pd.period_range("2020-01-01", periods=60, freq="D"), "column 'freight': periods, not numbers"),
        (pd.to_timedelta(range(60), unit="D"), "column 'freight': lengths of time, not numbers"),
        (np.arange(60) * 1j, "column 'freight': complex numbers; take the real part or the modulus"),
        ([[1]] * 60, "column 'freight': values of type list, for example [1]"),
        ([np.nan] * 60, "column 'freight': no value is observed; drop the column."),
        ([np.nan, *[1.0, 2.0] * 3, *[np.nan] * 53], "only 6 values, from 2012-02 to 2012-07, where at least 8 are"),
        ([np.nan, 4.0, *[np.nan] * 58], "only 1 value, at 2012-02, where at least 8 are needed"),
        ([5.5] * 60, "one value only, 5.5 from 2012-01 to 2016-12, so there is nothing to decide; drop the column."),
        ([5.5, np.nan, *[5.5] * 58], "one value only, 5.5"),
        (
            [*range(57), np.inf, -np.inf, np.inf],
            "column 'freight': 3 infinite values, the first at 2016-10; replace them with missing values (NaN) or drop",
        ),
        ([np.inf, *range(59)], "column 'freight': 1 infinite value, the first at 2012-01; replace it with a missing"),
    ],
)
def test_columns_that_cannot_be_checked_say_why(column, told):
    found = problem(column)
    assert told in found
    assert found.endswith(".")
    assert found.count(". ") == 0


def test_a_repeated_column_name_is_refused_alone():
    frame = ferry().set_axis(["passengers", "freight", "freight"], axis=1)
    passengers, freight = read(frame)
    assert passengers.problem is None
    assert freight.problem.startswith("column 'freight': 2 columns have this name; rename them")


# ------------------------------------------------------------------------------------------- gaps and exclusions
def test_values_run_from_the_first_to_the_last_observed():
    frame = ferry()
    frame.loc["2012-01":"2012-02", "freight"] = np.nan
    frame.loc["2016-11":, "freight"] = np.nan
    frame.loc["2013-07":"2013-08", "freight"] = np.nan
    series = one(frame, only="freight")
    assert (str(series.values.index[0]), str(series.values.index[-1])) == ("2012-03", "2016-10")
    assert series.repairs == (FillGaps(12),)
    assert series.values.isna().sum() == 2


def test_gaps_without_repair():
    column = [*range(30), np.nan, *range(29)]
    assert "1 value missing, the first at 2014-07, and repair does not allow filling" in problem(column, repair=False)
    assert "repair does not allow filling" in problem(column, repair=[])
    assert problem(column, repair="fill gaps") is None
    with pytest.raises(CheckError, match="repair names 'sorting', which is none of the repairs 'read dates', 'sort'"):
        read(ferry(), repair=["sorting"])


SPANS = [
    ("2013-02", "2013-04"),
    (pd.Period("2013-02", "M"), pd.Period("2013-04", "M")),
    (pd.Timestamp("2013-02-01"), pd.Timestamp("2013-04-30")),
    (datetime.date(2013, 2, 1), datetime.date(2013, 4, 30)),
    (np.datetime64("2013-02"), datetime.datetime(2013, 4, 30, 12)),
]


@pytest.mark.parametrize("span", SPANS)
@pytest.mark.parametrize("index", [MONTHS, MONTHS.to_timestamp(), MONTHS.to_timestamp().tz_localize("Europe/Berlin")])
def test_excluded_spans_become_missing(index, span):
    frame = ferry().set_axis(index, axis=0)
    for exclude in ([span], span):
        series = one(frame, only="freight", exclude=exclude)
        assert np.flatnonzero(series.values.isna()).tolist() == [13, 14, 15]
        assert series.repairs == (FillGaps(12),)


def test_excluded_numbers_on_a_counter():
    frame = ferry().reset_index(drop=True)
    assert np.flatnonzero(one(frame["freight"], season=12, exclude=[(3, 5)]).values.isna()).tolist() == [3, 4, 5]


def test_what_is_excluded_may_be_infinite():
    column = ferry()["freight"]
    column.iloc[4] = np.inf
    assert one(column, exclude=[("2012-05", "2012-05")]).problem is None


@pytest.mark.parametrize(
    ("exclude", "told"),
    [
        ([("2030-01", "2030-02")], r"exclude holds \(2030-01, 2030-02\), and no row lies in it"),
        ([("2013-04", "2013-02")], "no row lies in it"),
        (["2013-04"], r"exclude holds '2013-04' where a pair \(start, end\) is needed"),
        ([("2013-04", None)], "where a pair"),
        ([("spring", "summer")], "cannot be laid on an index from 2012-01 to 2016-12"),
        ([(3, 5)], "cannot be laid on an index"),
        (5, "where a pair"),
    ],
)
def test_exclusions_that_make_no_sense(exclude, told):
    with pytest.raises(CheckError, match=told):
        read(ferry(), exclude=exclude)


def test_exclusions_need_the_right_to_fill():
    with pytest.raises(CheckError, match="exclude leaves gaps, and repair does not allow filling them"):
        read(ferry(), exclude=[("2013-01", "2013-02")], repair=False)


# ------------------------------------------------------------------------------------------------------- seasons
@pytest.mark.parametrize(
    ("season", "expected"),
    [(12, (12,)), ((24, 12), (12, 24)), ([1], (1,)), (1, (1,)), (np.int64(6), (6,)), ((1, 4), (4,))],
)
def test_a_season_that_was_asked_for(season, expected):
    assert one(ferry()["freight"], season=season).season == expected


@pytest.mark.parametrize("season", [0, -12, 12.0, "12", True, (), (12, 365.25), [None]])
def test_seasons_that_are_none(season):
    with pytest.raises(CheckError, match="is not a whole number of steps from 1 up"):
        read(ferry(), season=season)


def test_a_season_longer_than_the_series():
    # Less than two cycles: kept as asked, and the rung of the season says that none can be shown.
    assert one(ferry()["freight"], season=31).season == (31,)
    with pytest.raises(CheckError, match="60 values do not hold one cycle of season=61; give at least 122 values"):
        read(ferry()["freight"], season=61)
    frame = ferry()
    frame.loc[:"2014-12", "freight"] = np.nan
    passengers, freight, _ = read(frame, season=30)
    assert passengers.problem is None
    assert "24 values do not hold one cycle of season=30" in freight.problem


@pytest.mark.parametrize(
    ("freq", "n", "expected"),
    [
        ("YS", 60, (1,)),
        ("QS", 10, (4,)),
        ("QS", 9, (1,)),
        ("MS", 30, (12,)),
        ("MS", 29, (1,)),
        ("W", 130, (52,)),
        ("D", 18, (7,)),
        ("B", 13, (5,)),
        ("h", 60, (24,)),
        ("h", 24 * 28 - 1, (24,)),
        ("h", 24 * 28, (24, 168)),
    ],
)
def test_the_season_of_the_calendar_needs_a_series_that_can_show_it(freq, n, expected):
    values = pd.Series(np.random.default_rng(0).normal(size=n), index=pd.date_range("2019-01-01", periods=n, freq=freq))
    series = one(values)
    assert series.season == expected
    assert bool(series.notes) == (expected == (1,) and freq != "YS")


def test_a_counter_needs_a_season():
    frame = ferry().reset_index(drop=True)
    with pytest.raises(CheckError, match="the rows are numbered from 0, which tells no calendar; give the season"):
        read(frame)
    assert one(frame["freight"], season=4).season == (4,)
    assert one(frame["freight"], season=1).calendar.kind == "counter"


# ------------------------------------------------------------------------------------- refusals of the whole frame
@pytest.mark.parametrize(
    ("frame", "told"),
    [
        ([1.0, 2.0], "found 'list' where a DataFrame or Series is needed"),
        (ferry()[:0], "the table has no rows"),
        (ferry()[[]], "the table has no columns"),
        (ferry(5), "the table has 5 rows, where at least 8 are needed"),
        (ferry()[::-1], r"not sorted: 2016-11 in row 2 follows 2016-12; sort it with `frame = frame.sort_index\(\)`"),
        (ferry()["freight"][::-1], "sort it with `series = series.sort_index"),
        (ferry().drop(MONTHS[3]), "after 2012-03 comes 2012-05 where 2012-04 is expected"),
        (ferry().astype(str), "none of the 3 series can be checked: column 'passengers': text, .*; column 'freight'"),
        (ferry()[["freight"]] * np.nan, "^column 'freight': no value is observed; drop the column.$"),
    ],
)
def test_frames_that_cannot_be_checked(frame, told):
    with pytest.raises(CheckError, match=told):
        read(frame, repair=False)


def test_only_the_first_problems_of_a_wide_frame_are_told():
    frame = pd.DataFrame({f"line {i}": 1.0 for i in range(9)}, index=MONTHS)
    with pytest.raises(CheckError, match=r"and 6 more\.$"):
        read(frame)


def test_options_that_name_nothing():
    with pytest.raises(CheckError, match=r"only names 'frieght', which is not there; did you mean 'freight'\?$"):
        read(ferry(), only="frieght")
    with pytest.raises(CheckError, match="name one of 'passengers', 'freight', 'fuel_price'"):
        read(ferry(), only=["xyz"])
    with pytest.raises(CheckError, match="only is empty"):
        read(ferry(), only=[])
    with pytest.raises(CheckError, match="holds what cannot be a name; name one of"):
        read(ferry(), only=[["freight"]])
    with pytest.raises(CheckError, match="a Series has no columns"):
        read(ferry()["freight"], time="month")
    with pytest.raises(CheckError, match="a Series holds one series"):
        read(ferry()["freight"], series="line")


def test_the_fewest_values_are_those_of_the_thresholds():
    assert Thresholds().minimum_observations == FEWEST_VALUES


@pytest.mark.parametrize(
    ("write", "code"),
    [
        (str, "pd.to_numeric(frame['freight'])"),
        (lambda value: f"{value * 1000:,.1f}", ".str.replace(r'[^0-9.+-]', '', regex=True)"),
        (lambda value: f"{value * 1000:,}".replace(",", "\u202f"), ".str.replace(r'[^0-9.+-]', '', regex=True)"),
        (lambda value: f"{value},5", ".str.replace(',', '.')"),
        (lambda value: f"{value} %", ".str.rstrip('% ')"),
        (lambda value: "n/a" if value == 3 else str(value), "errors='coerce'"),
    ],
)
@pytest.mark.parametrize("dtype", ["object", "string"])
def test_numbers_written_as_text_come_with_the_code_that_reads_them(write, code, dtype):
    numbers = np.arange(60) % 7 + 1
    frame = pd.DataFrame({"freight": pd.array([write(int(value)) for value in numbers], dtype=dtype)}, index=MONTHS)
    with pytest.raises(CheckError) as caught:
        read(frame)
    statement = str(caught.value).split("`")[1]
    assert code in statement
    space = {"frame": frame.copy(), "pd": pd}
    exec(statement, space)
    (series,) = read(space["frame"])
    assert series.values.corr(pd.Series(numbers, index=MONTHS).where(series.values.notna())) > 0.99


def test_a_long_row_of_digits_is_no_trap():
    column = pd.Series(["1" * 200_000 + "x"] * 60, index=MONTHS)
    assert "text, for example" in problem(column)


def test_categories_of_numbers_become_numbers():
    frame = pd.DataFrame({"freight": pd.Categorical(np.arange(60) % 7)}, index=MONTHS)
    with pytest.raises(CheckError, match="categories, for example 0; read them as numbers") as caught:
        read(frame)
    space = {"frame": frame.copy()}
    exec(str(caught.value).split("`")[1], space)
    assert read(space["frame"])[0].problem is None


@pytest.mark.parametrize(
    ("values", "told"),
    [
        ([10**400, *range(59)], "1 infinite value, the first at 2012-01"),
        ([-(10**400), *range(59)], "1 infinite value, the first at 2012-01"),
        ([decimal.Decimal("sNaN"), *map(decimal.Decimal, range(59))], None),
        ([decimal.Decimal("NaN"), *map(decimal.Decimal, range(59))], None),
        ([pd.NaT, pd.NA, None, *range(57)], None),
        ([-0.0] * 60, "one value only, 0 from"),
        ([pd.DataFrame()] * 60, "values of type DataFrame, for example Empty DataFrame"),
        ([b"1"] * 60, "values of type bytes"),
    ],
)
def test_objects_at_the_edge_of_what_is_a_number(values, told):
    found = problem(pd.Series(values, index=MONTHS, dtype=object))
    assert found is None if told is None else told in found
    assert "\n" not in (found or "")


def test_bools_of_arrow_are_numbers():
    pytest.importorskip("pyarrow")
    column = pd.Series(np.arange(60) % 3 == 0, index=MONTHS).astype("bool[pyarrow]")
    column.iloc[4] = None
    assert one(column).values.sum() == 20.0


class Foreign:
    """Stands for a table of another library."""

    def __init__(self, made):
        self.made = made

    def to_pandas(self):
        if isinstance(self.made, Exception):
            raise self.made
        return self.made


def test_tables_that_do_not_become_frames():
    assert [series.name for series in read(Foreign(ferry()))] == ["passengers", "freight", "fuel_price"]
    with pytest.raises(CheckError, match="to_pandas of the Foreign failed with OSError, 'no memory left'; convert it"):
        read(Foreign(OSError("no\nmemory left")))
    with pytest.raises(CheckError, match="found 'NoneType' where"):
        read(Foreign(None))
    polars = pytest.importorskip("polars")
    with pytest.raises(CheckError, match=r"found 'LazyFrame', which is not computed yet; pass `frame.collect\(\)`"):
        read(polars.DataFrame({"freight": range(60)}).lazy(), season=12)


@pytest.mark.parametrize(
    "season", [np.array([12, 4]), {4, 12}, [12, 4], (n for n in (4, 12)), np.array(12), range(4, 13, 8)]
)
def test_seasons_in_any_container(season):
    assert read(ferry(), season=season)[0].season in ((4, 12), (12,))
