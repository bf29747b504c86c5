"""The second rung: counts, demand patterns, and values that stand alone."""

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.demo import ferry_line
from preflight_magic.intake import read
from preflight_magic.model import Evidence
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.rungs.contract import Context
from preflight_magic.rungs.values import RUNG, demand_pattern, stands_alone

PLAIN = {
    "n": 144,
    "observed": 144,
    "missing": 0,
    "missing_share": 0.0,
    "longest_gap": 0,
    "longest_gap_at": None,
    "zeros": 0,
    "negatives": 0,
    "distinct": 140,
    "commonest_share": 0.02,
    "minimum": 12.0,
    "maximum": 90.5,
    "whole_numbers": False,
    "unit_interval": False,
    "demand_interval": 1.0,
    "demand_variation": 0.1,
    "outliers": 0,
    "outliers_at": (),
}
GAPS = {"missing": 5, "observed": 139, "missing_share": 5 / 144, "longest_gap": 3, "longest_gap_at": "2014-02"}


@pytest.mark.parametrize(
    ("change", "verdict", "headline", "reason"),
    [
        ({}, "clear", "144 values, none missing", "All values lie between 12 and 90.5, and none stands alone."),
        (GAPS, "clear", "144 values, 5 missing (3.5 %)", "The longest gap is 3 steps from 2014-02."),
        (
            {"outliers": 1, "outliers_at": ("2015-03",)},
            "clear",
            "144 values, none missing, 1 isolated outlier",
            "Values far from their neighbours at 2015-03: they stay in the data, and those that stand alone under the "
            "leading plan are left out of the comparison of plans.",
        ),
        (
            {"outliers": 5, "outliers_at": ("a", "b", "c", "d", "e")},
            "clear",
            "144 values, none missing, 5 isolated outliers",
            "at a, b, c and 2 more: they stay in the data",
        ),
        ({"negatives": 2, "zeros": 1}, "clear", "144 values, none missing", "2 values below zero, so no log."),
        ({"zeros": 1}, "clear", "144 values, none missing", "1 value equal to zero, so no plain log."),
        ({"commonest_share": 0.62}, "clear", "144 values, none missing", "One value makes up 62% of the series."),
        # Bounds by Syntetos, Boylan and Croston (2005): 1.32 and 0.49.
        ({"demand_interval": 1.31, "demand_variation": 0.9}, "clear", "144 values, none missing", "All values"),
        (
            {"demand_interval": 1.32, "demand_variation": 0.48},
            "inconclusive",
            "none missing, intermittent demand",
            "every 1.32 ",
        ),
        (
            {"demand_interval": 1.32, "demand_variation": 0.49},
            "inconclusive",
            "none missing, lumpy demand",
            "No ARMA plan is made for lumpy demand, and steps that other rungs propose are left out",
        ),
        (
            {"whole_numbers": True, "minimum": 0.0, "mean": 3.4},
            "clear",
            "none missing, small counts",
            "Counts with a mean of 3.4 are far from normal: a regression for counts",
        ),
        ({"whole_numbers": True, "minimum": 0.0, "mean": 12.0}, "clear", "144 values, none missing", "All values"),
        (
            {"unit_interval": True, "minimum": 0.1, "maximum": 0.9},
            "clear",
            "none missing, values between 0 and 1",
            "put_in(Logit(0, 1)) keeps forecasts and intervals between the bounds",
        ),
        (
            {"unit_interval": True, "minimum": 0.0, "maximum": 0.9},
            "clear",
            "none missing, values between 0 and 1",
            "put_in(Logit(-0.01, 1.01))",
        ),
        ({"demand_interval": float("nan")}, "clear", "144 values, none missing", "All values"),
        ({"observed": 24}, "clear", "144 values, none missing", "All values"),
        ({"observed": 23}, "inconclusive", "none missing, too short", "Fewer than 24 values are too short"),
        (
            {"incomplete": "2023-12"},
            "inconclusive",
            "none missing, the last value may be an incomplete period",
            "The last value may be an incomplete period: 2023-12 lies far below",
        ),
        (
            {"excluded": ("2020-03 to 2020-08",)},
            "clear",
            "144 values, none missing",
            "Excluded as asked, so treated as missing in every decision: 2020-03 to 2020-08.",
        ),
        ({"observed": 7}, "infeasible", "too few values", "7 values observed, where 8 are needed."),
        ({"distinct": 1}, "infeasible", "one value only", "nothing to decide"),
    ],
)
def test_judgements(change, verdict, headline, reason):
    found = RUNG.judge(Evidence({**PLAIN, **change}), Thresholds())
    assert (found.verdict, found.steps) == (verdict, ())
    assert found.headline.endswith(headline)
    assert reason in found.reason


def test_a_problem_is_infeasible():
    found = RUNG.judge(Evidence(problem="column 'freight': no value is observed; drop the column."), Thresholds())
    assert found.verdict == "infeasible"
    assert found.reason == "column 'freight': no value is observed; drop the column."


def examined(values, **options):
    index = pd.period_range("2012-01", periods=len(values), freq="M")
    (series,) = read(pd.Series(values, index=index, name="freight"), **options)
    return RUNG.examine(series, Context(Settings())).measures


def test_counts():
    values = np.tile([0.0, 2.0, -1.0, 2.0, 5.0], 12)
    values[[3, 8, 9, 20]] = np.nan
    found = examined(values)
    assert (found["n"], found["observed"], found["missing"], found["missing_share"]) == (
        60,
        56,
        4,
        pytest.approx(4 / 60),
    )
    assert (found["longest_gap"], found["longest_gap_at"]) == (2, "2012-09")
    assert (found["zeros"], found["negatives"], found["distinct"]) == (11, 12, 4)
    assert found["commonest_share"] == pytest.approx(22 / 56)
    assert (found["minimum"], found["maximum"]) == (-1.0, 5.0)
    assert (found["whole_numbers"], found["unit_interval"]) == (True, False)
    assert examined(np.tile([0.0, 0.25, 1.0], 10))["unit_interval"] is True


def test_demand_pattern_by_hand():
    interval, variation = demand_pattern(np.array([0.0, 2.0, 0.0, np.nan, 4.0, 0.0, 6.0]))
    assert interval == pytest.approx(6 / 3)
    # Sizes 2, 4, 6: mean 4, variance 8/3.
    assert variation == pytest.approx((8 / 3) / 16)
    assert np.isnan(demand_pattern(np.array([1.0, -1.0]))).all()
    assert np.isnan(demand_pattern(np.zeros(3))).all()


def simulated(kind, rng, n=144):
    noise = rng.normal(size=n)
    match kind:
        case "noise":
            return noise
        case "random walk":
            return noise.cumsum()
        case "fixed pattern":
            return 10 * rng.normal(size=12)[np.arange(n) % 12] + noise
        case "growing pattern":
            t = np.arange(n)
            return np.exp(6 + 0.01 * t + 0.6 * np.sin(2 * np.pi * t / 12) + 0.05 * noise)
    raise AssertionError(kind)


@pytest.mark.parametrize("kind", ["noise", "random walk", "fixed pattern", "growing pattern"])
def test_clean_series_have_no_outliers_and_spoiled_ones_have_the_one(kind):
    rng = np.random.default_rng(20)
    clean = [stands_alone(simulated(kind, rng), 12, 6.0) for _ in range(200)]
    assert np.mean([flags.any() for flags in clean]) <= 0.02
    hits = []
    for _ in range(100):
        y = simulated(kind, rng)
        row = int(rng.integers(12, len(y) - 12))
        y[row] = y[row] * 2.5 if kind == "growing pattern" else y[row] + 14.0
        flags = stands_alone(y, 12, 6.0)
        hits.append(flags[row] and flags.sum() == 1)
    assert np.mean(hits) >= 0.95


def test_a_step_is_no_outlier():
    y = np.random.default_rng(1).normal(size=120) + 20.0 * (np.arange(120) >= 60)
    assert not stands_alone(y, 12, 6.0).any()


def test_outliers_do_not_depend_on_the_unit_nor_on_missing_values():
    rng = np.random.default_rng(4)
    y = 50 + rng.normal(size=120)
    y[70] += 15
    for factor in (1e-9, 1.0, 1e9):
        assert np.flatnonzero(stands_alone(factor * y, 12, 6.0)).tolist() == [70]
    y[[3, 4, 5, 6, 7, 8, 9, 10, 71, 82]] = np.nan
    assert np.flatnonzero(stands_alone(y, 12, 6.0)).tolist() == [70]


def test_a_single_spike_in_a_flat_series():
    y = np.full(60, 3.0)
    y[20] = 9.0
    assert np.flatnonzero(stands_alone(y, 1, 6.0)).tolist() == [20]
    assert not stands_alone(np.full(60, 3.0), 1, 6.0).any()


def test_the_ferry_line_is_clean():
    for series in read(ferry_line()):
        found = RUNG.judge(RUNG.examine(series, Context()), Thresholds())
        assert found.verdict == "clear"
        assert found.headline == "144 values, none missing"


def test_outliers_are_dated():
    values = np.random.default_rng(6).normal(size=60)
    values[26] += 30
    assert examined(values)["outliers_at"] == ("2014-03",)


def cut(kind, seed, share):
    """A series of totals at some level whose last value is only a part of itself."""
    rng = np.random.default_rng(seed)
    y = simulated(kind, rng)
    y = y + 40.0 if kind != "growing pattern" else y
    y[-1] *= share
    return y


@pytest.mark.parametrize("kind", ["noise", "fixed pattern", "growing pattern"])
def test_an_incomplete_last_period_is_noted(kind):
    found = [examined(np.abs(cut(kind, seed, 0.3)), season=12) for seed in range(40)]
    assert sum(one["incomplete"] == "2023-12" for one in found) >= 36
    # It is told once, not as an outlier as well.
    assert all("2023-12" not in one["outliers_at"] for one in found if one["incomplete"])


@pytest.mark.parametrize("kind", ["noise", "random walk", "fixed pattern", "growing pattern"])
def test_a_whole_last_period_is_not(kind):
    found = [examined(np.abs(cut(kind, seed, 1.0)), season=12)["incomplete"] for seed in range(150)]
    assert sum(one is not None for one in found) <= 1


def test_only_a_low_last_value_of_a_calendar_may_be_incomplete():
    y = 100.0 + np.random.default_rng(1).normal(size=60)
    high, low = y.copy(), y.copy()
    high[-1], low[-1] = 160.0, 30.0
    assert (examined(high)["incomplete"], examined(high)["outliers"]) == (None, 1)
    assert (examined(low)["incomplete"], examined(low)["outliers"]) == ("2016-12", 0)
    assert examined(low - 110.0)["incomplete"] is None
    (numbered,) = read(pd.Series(low, name="freight"), season=1)
    assert RUNG.examine(numbered, Context(Settings())).measures["incomplete"] is None
    gap = low.copy()
    gap[-5:-1] = np.nan
    assert examined(gap)["incomplete"] in (None, "2016-12")


def test_excluded_spans_are_named():
    spans = (("2013-01", "2013-03"), (pd.Period("2014-02", "M"), pd.Period("2014-02", "M")))
    (series,) = read(ferry_line()[["freight"]], exclude=list(spans))
    found = RUNG.examine(series, Context(Settings(exclude=spans)))
    assert found.measures["excluded"] == ("2013-01 to 2013-03", "2014-02 to 2014-02")
    assert "2013-01 to 2013-03, 2014-02 to 2014-02." in RUNG.judge(found, Thresholds()).reason


@pytest.mark.parametrize(("share", "k"), [(0.7, 2), (0.5, 3), (0.2, 7), (0.05, 28)])
def test_sums_over_enough_steps_are_intermittent_no_longer(share, k):
    found = {**PLAIN, "demand_interval": 1 / share, "demand_variation": 0.2}
    assert f"// {k}).sum()" in RUNG.judge(Evidence(found), Thresholds()).reason
    # Independent demands: a sum of k steps is empty with probability (1 - share)^k. Bound by Syntetos, Boylan and
    # Croston (2005).
    assert 1 / (1 - (1 - share) ** k) < 1.32
    assert k == 2 or 1 / (1 - (1 - share) ** (k - 1)) >= 1.32


def test_intermittent_demand_gets_no_forced_plan_and_its_sums_run():
    rng = np.random.default_rng(11)
    y = pd.Series(
        np.where(rng.random(120) < 0.35, rng.integers(1, 9, 120) + np.arange(120) // 20, 0),
        index=pd.period_range("2014-01", periods=120, freq="M"),
        name="spare anchors",
    )
    report = pf.check(y, progress=False)
    one = report["spare anchors"]
    assert one.plan.steps == ()
    assert "not an ARMA plan" in one.answer
    assert "demand" in report.overview.loc["spare anchors", "note"]
    reason = one.findings["values"].reason
    code = reason[reason.index("y.groupby(") : reason.index(".sum()") + len(".sum()")]
    sums = eval(code, {"np": np, "y": y})
    assert sums.sum() == y.sum()
    assert (sums > 0).mean() > (y > 0).mean()
    # The last sum is over as many steps as the others.
    assert sums.iloc[-1] == y.iloc[-int(code.split("// ")[1].split(")")[0]) :].sum()
