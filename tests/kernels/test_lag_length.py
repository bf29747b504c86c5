import numpy as np
import pytest

from preflight_magic.kernels.lag_length import schwert, searched_lags, smallest_criterion
from preflight_magic.kernels.least_squares import triangle


def test_schwert_length() -> None:
    # 12 (n / 100)**(1/4), Schwert (1989), Journal of Business and Economic Statistics 7, here rounded up
    assert [schwert(n) for n in (24, 100, 101, 240, 1600)] == [9, 12, 13, 15, 24]


def test_criterion_weighs_fit_against_lags() -> None:
    n = 100
    gain_of_three = np.exp(-3.0 / n)  # lowers n log(rss) by 3: more than AIC's 2, less than BIC's log(100) = 4.6
    rss = np.array([1.0, gain_of_three, gain_of_three * np.exp(-1.0 / n)])
    assert smallest_criterion(rss, n, 2, "AIC") == 1
    assert smallest_criterion(rss, n, 2, "BIC") == 0


def test_criterion_does_not_see_the_unit() -> None:
    rss = np.random.default_rng(1).uniform(0.5, 1.0, 12)
    for criterion in ("AIC", "BIC"):
        assert len({smallest_criterion(rss * scale, 50, 2, criterion) for scale in (1e-12, 1.0, 1e12)}) == 1


def test_perfect_fit_wins_without_warning() -> None:
    assert smallest_criterion(np.array([1.0, 0.5, 0.0]), 30, 2, "AIC") == 2


def regression(seed: int, deterministic: int, lags: int, nobs: int = 90) -> np.ndarray:
    """Columns in the order of a Dickey-Fuller regression; later lags matter less."""
    rng = np.random.default_rng(seed)
    columns = rng.standard_normal((nobs, deterministic + 1 + lags))
    columns[:, :deterministic] = np.vander(np.linspace(-1.0, 1.0, nobs), deterministic, increasing=True)
    columns[:, deterministic] = columns[:, deterministic].cumsum()
    weights = rng.standard_normal(columns.shape[1]) * 0.7 ** np.arange(columns.shape[1])
    weights[deterministic] = -0.05
    return np.column_stack([columns, columns @ weights + rng.standard_normal(nobs)])


def brute(columns: np.ndarray, fixed: int, criterion: str) -> int:
    """Lag length by refitting every length and writing the definition out."""
    nobs, y = columns.shape[0], columns[:, -1]
    deterministic = columns[:, : fixed - 1]
    level = columns[:, fixed - 1]
    if fixed > 1:
        level = level - deterministic @ np.linalg.lstsq(deterministic, level, rcond=None)[0]
    values, significant = [], 0
    for k in range(columns.shape[1] - fixed):
        x = columns[:, : fixed + k]
        beta, rss = np.linalg.lstsq(x, y, rcond=None)[:2]
        variance = float(rss[0]) / nobs
        penalty = {
            "AIC": 2.0 * k,
            "BIC": np.log(nobs) * k,
            # Ng and Perron (2001): log variance + 2 (tau + k) / nobs, tau = b0**2 sum(level**2) / variance
            "MAIC": 2.0 * (beta[fixed - 1] ** 2 * (level @ level) / variance + k),
        }.get(criterion, 0.0)
        values.append(np.log(variance) + penalty / nobs)
        error = np.sqrt(float(rss[0]) / (nobs - fixed - k) * np.linalg.inv(x.T @ x)[-1, -1])
        if k and abs(beta[-1] / error) >= 1.6448536:
            significant = k
    return significant if criterion == "t-stat" else int(np.argmin(values))


@pytest.mark.parametrize("criterion", ["AIC", "BIC", "t-stat", "MAIC"])
@pytest.mark.parametrize("deterministic", [0, 1, 2])
def test_search_from_one_factor_is_that_of_refitting_every_length(criterion: str, deterministic: int) -> None:
    found = []
    for seed in range(40):
        columns = regression(seed, deterministic, 7)
        expected = brute(columns, deterministic + 1, criterion)
        found.append(searched_lags(triangle(columns.copy(order="F")), deterministic + 1, 90, criterion))
        assert found[-1] == expected
    assert len(set(found)) > 2


@pytest.mark.parametrize("criterion", ["AIC", "BIC", "t-stat", "MAIC"])
def test_search_with_several_levels_is_that_of_refitting_every_length(criterion: str) -> None:
    """Three levels, as in a HEGY regression of period 3."""
    chosen = set()
    for seed in range(40):
        rng = np.random.default_rng(seed)
        terms, levels = np.column_stack([np.ones(80), np.arange(80.0)]), rng.standard_normal((80, 3)).cumsum(axis=0)
        lags = rng.standard_normal((80, 6))
        y = 0.3 * lags @ 0.6 ** np.arange(6) - 0.05 * levels.sum(axis=1) + rng.standard_normal(80)
        around = levels - terms @ np.linalg.lstsq(terms, levels, rcond=None)[0]
        values, significant = [], 0
        for k in range(7):
            x = np.column_stack([terms, levels, lags[:, :k]])
            beta, rss = np.linalg.lstsq(x, y, rcond=None)[:2]
            variance = float(rss[0]) / 80
            explained = float(np.sum((around @ beta[2:5]) ** 2))
            penalty = {"AIC": 2.0 * k, "BIC": np.log(80) * k, "MAIC": 2.0 * (explained / variance + k)}
            values.append(np.log(variance) + penalty.get(criterion, 0.0) / 80)
            error = np.sqrt(float(rss[0]) / (80 - 5 - k) * np.linalg.inv(x.T @ x)[-1, -1])
            if k and abs(beta[-1] / error) >= 1.6448536:
                significant = k
        expected = significant if criterion == "t-stat" else int(np.argmin(values))
        factor = triangle(np.asfortranarray(np.column_stack([terms, levels, lags, y])))
        assert searched_lags(factor, 5, 80, criterion, levels=3) == expected  # type: ignore[arg-type]
        chosen.add(expected)
    assert len(chosen) > 2


def test_search_leaves_out_lags_that_depend_on_others() -> None:
    for criterion in ("AIC", "BIC", "t-stat", "MAIC"):
        columns = regression(1, 1, 5)
        columns[:, 5] = columns[:, 3] + columns[:, 4]
        lags = searched_lags(triangle(columns.copy(order="F")), 2, 90, criterion)
        assert lags is not None
        assert lags <= 3
        columns[:, 1] = 1.0  # the level repeats the constant
        assert searched_lags(triangle(columns.copy(order="F")), 2, 90, criterion) is None


def test_search_refuses_an_unknown_rule() -> None:
    with pytest.raises(ValueError, match="lag choice"):
        searched_lags(triangle(regression(1, 1, 5)), 2, 90, "HQ")  # type: ignore[arg-type]
