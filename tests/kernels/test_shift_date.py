import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.breaks import date_shift
from preflight_magic.kernels.shift_date import (
    broken_trend,
    shift_date_distribution,
    shift_date_quantile,
    shift_interval,
)
from tests.references import seasonal


# The R package strucchange, confint of breakpoints without heterogeneity: last observation of the old level, counted
# from 1, which is the first of the new level counted from 0. `nile` is the flow of the Nile 1871 to 1970.
@pytest.mark.parametrize("name", ["nile", "made"])
@pytest.mark.parametrize(("coverage", "column"), [(0.9, "at90"), (0.95, "at95"), (0.99, "at99")])
def test_intervals_are_those_of_strucchange(name: str, coverage: float, column: str) -> None:
    row = seasonal.record()["shift"][name]
    y = np.array(row["y"], dtype=float)
    dated = date_shift(y, np.ones((y.size, 1)))
    assert dated is not None
    assert dated.position == row["breakpoint"]
    found = shift_interval(y, np.ones((y.size, 1)), dated.position, coverage, "uncorrelated")
    assert found is not None
    assert [found.first, dated.position, found.last] == row[column]
    assert found.size == pytest.approx(y[dated.position :].mean() - y[: dated.position].mean())


def test_quantiles_are_the_published_ones() -> None:
    # Bai (1997), p. 553: 7 at 90 % and 11 at 95 %, rounded; Yao (1987), table 1: 7.7 and 11.0 (both from memory).
    assert shift_date_quantile(0.95) == pytest.approx(7.7, abs=0.05)
    assert shift_date_quantile(0.975) == pytest.approx(11.0, abs=0.05)
    assert shift_date_distribution(0.0) == 0.5
    for x in (0.3, 2.0, 30.0, 300.0):
        assert shift_date_distribution(x) + shift_date_distribution(-x) == pytest.approx(1.0)
    x = np.geomspace(1e-6, 390.0, 400)
    assert (np.diff([shift_date_distribution(float(v)) for v in x]) >= -1e-14).all()


def test_the_distribution_is_that_of_the_highest_point_of_a_motion_with_drift() -> None:
    rng = np.random.default_rng(7)
    step, reach, count = 0.02, 50.0, 1500
    drift = step * np.arange(1, int(reach / step) + 1) / 2.0
    places = []
    for _ in range(count):
        sides = rng.standard_normal((2, drift.size)).cumsum(axis=1) * np.sqrt(step) - drift
        height, place = sides.max(axis=1), sides.argmax(axis=1) + 1
        far = step * place[height.argmax()] * (1 if height.argmax() else -1)
        places.append(far if height.max() > 0.0 else 0.0)
    for x in (-5.0, -1.0, 1.0, 5.0, 11.0):
        p = shift_date_distribution(x)
        assert abs(np.mean(np.array(places) <= x) - p) < 4.0 * np.sqrt(p * (1.0 - p) / count) + 0.01  # of the steps


@pytest.mark.parametrize("coefficient", [0.0, 0.5])
def test_the_interval_covers_the_date(coefficient: float) -> None:
    rng = np.random.default_rng(11)
    n, at, count = 200, 120, 300
    size = 1.2 / (1.0 - coefficient)  # of the long-run standard deviation
    covered = 0
    for _ in range(count):
        errors = lfilter([1.0], [1.0, -coefficient], rng.standard_normal(n + 50))[50:]
        y = errors + size * (np.arange(n) >= at)
        dated = date_shift(y, np.ones((n, 1)))
        assert dated is not None
        found = shift_interval(y, np.ones((n, 1)), dated.position)
        assert found is not None
        assert found.first <= dated.position <= found.last
        covered += found.first <= at <= found.last
    # The dates are whole, so an interval of 95 % covers at least that; dependence costs a little.
    assert covered / count > 0.9


def test_dependence_widens_the_interval() -> None:
    errors = lfilter([1.0], [1.0, -0.7], np.random.default_rng(2).standard_normal(250))[50:]
    y = errors + 4.0 * (np.arange(200) >= 100)
    wide, narrow = (shift_interval(y, np.ones((200, 1)), 100, errors=kind) for kind in ("long-run", "uncorrelated"))
    assert wide is not None
    assert narrow is not None
    assert wide.last - wide.first > 2 * (narrow.last - narrow.first)
    assert wide.size == narrow.size
    assert wide.size_error > narrow.size_error


def test_intervals_see_neither_unit_nor_origin_and_skip_gaps() -> None:
    y = np.random.default_rng(3).standard_normal(100) + 3.0 * (np.arange(100) >= 40)
    y[[5, 41, 70]] = np.nan
    plain = shift_interval(y, np.ones((100, 1)), 40)
    other = shift_interval(1e-6 * y + 5.0, np.ones((100, 1)), 40)
    assert plain is not None
    assert other is not None
    assert (other.first, other.last) == (plain.first, plain.last)
    assert other.size == pytest.approx(1e-6 * plain.size, rel=1e-6)


def test_no_interval_where_nothing_is_left() -> None:
    step = (np.arange(40) >= 20).astype(float)
    assert shift_interval(step, np.ones((40, 1)), 20) is None
    assert shift_interval(np.full(40, 2.0), np.ones((40, 1)), 20) is None
    assert shift_interval(step + np.resize([0.1, -0.1], 40), np.column_stack([np.ones(40), step]), 20) is None
    assert shift_interval(np.array([1.0, 2.0, 1.5, 4.0]), np.ones((4, 1)), 2) is None
    for position, coverage in ((0, 0.9), (40, 0.9), (20, 1.0)):
        with pytest.raises(ValueError, match="interval"):
            shift_interval(step, np.ones((40, 1)), position, coverage)


@pytest.mark.parametrize("gaps", [(), (3, 30, 31, 77)])
def test_the_corner_is_where_the_squares_are_least(gaps: tuple[int, ...]) -> None:
    n = 110
    time = np.arange(n, dtype=float)
    pattern = np.resize([1.0, -2.0, 0.5, 0.5], n)
    y = 0.1 * time + 0.2 * np.maximum(time - 64, 0.0) + np.random.default_rng(5).standard_normal(n) + pattern
    y[list(gaps)] = np.nan
    found = broken_trend(y, pattern[:, None])
    assert found is not None
    seen = np.isfinite(y)
    sums, effects = [], []
    for corner in range(16, n - 16):
        design = np.column_stack([np.ones(n), time, pattern, np.maximum(time - corner, 0.0)])[seen]
        one, rest, _, _ = np.linalg.lstsq(design, y[seen], rcond=None)
        sums.append(float(rest[0]))
        effects.append(one)
    best = int(np.argmin(sums))
    line = np.column_stack([np.ones(n), time, pattern])[seen]
    without = float(np.linalg.lstsq(line, y[seen], rcond=None)[1][0])
    assert found.position == 16 + best
    assert found.before == pytest.approx(effects[best][1], rel=1e-8)
    assert found.change == pytest.approx(effects[best][3], rel=1e-8)
    assert found.statistic == pytest.approx((without - sums[best]) / (sums[best] / (seen.sum() - 4)), rel=1e-8)


def test_a_broken_trend_has_a_ratio_for_each_kind_of_error() -> None:
    rng = np.random.default_rng(6)
    time = np.arange(200, dtype=float)
    bend = np.maximum(time - 120, 0.0)
    stationary, walks = [], []
    for _ in range(60):
        noise = rng.standard_normal(200)
        stationary.append(broken_trend(0.1 * bend + noise))
        walks.append(broken_trend(noise.cumsum()))
    assert np.mean([one is not None and one.t_levels > 4.0 for one in stationary]) > 0.95
    assert np.median([abs(one.position - 120) for one in stationary if one is not None]) <= 5
    # A random walk bends by itself: the levels take that for a corner, the differences hardly do.
    assert np.mean([one is not None and abs(one.t_levels) > 4.0 for one in walks]) > 0.15
    assert np.mean([one is not None and abs(one.t_differences) > 4.0 for one in walks]) < 0.1


def test_broken_trends_see_neither_unit_nor_origin() -> None:
    y = np.random.default_rng(8).standard_normal(120).cumsum()
    plain, other = broken_trend(y), broken_trend(1e-6 * y + 7.0)
    assert plain is not None
    assert other is not None
    assert other.position == plain.position
    assert other.after == pytest.approx(1e-6 * plain.after, rel=1e-5)
    assert other.t_levels == pytest.approx(plain.t_levels, rel=1e-5)
    assert other.t_differences == pytest.approx(plain.t_differences, rel=1e-5)


def test_no_corner_where_nothing_is_left() -> None:
    assert broken_trend(0.1 * np.arange(60.0)) is None
    assert broken_trend(np.full(60, 3.0)) is None
    assert broken_trend(np.arange(8.0)) is None
    assert broken_trend(np.full(60, np.nan)) is None
