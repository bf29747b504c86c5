import numpy as np

from preflight_magic.kernels.lag_length import schwert, smallest_criterion


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
