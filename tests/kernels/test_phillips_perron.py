import numpy as np
import pytest
from scipy.signal import lfilter

from preflight_magic.kernels.distributions import dickey_fuller_critical_values, dickey_fuller_p_value
from preflight_magic.kernels.phillips_perron import phillips_perron
from preflight_magic.kernels.unit_root import adf
from tests.references.records import of, unit_root_series

SERIES = unit_root_series()


def walk(n: int) -> np.ndarray:
    return np.random.default_rng(n).standard_normal(n).cumsum()


def named(row: dict[str, str]) -> str:
    return " ".join(row[key] for key in ("series", "terms", "lags"))


@pytest.mark.parametrize("row", of("unit_root_arch", "PhillipsPerron"), ids=named)
def test_statistic_is_that_of_arch(row: dict[str, str]) -> None:
    wanted = "schwert" if row["rule"] == "default" else int(row["lags"])
    found = phillips_perron(SERIES[row["series"]], row["terms"], wanted)
    assert found is not None
    assert found.bandwidth == int(row["lags"])
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_r", "stats::PP.test"), ids=named)
def test_statistic_is_that_of_r_but_for_its_time_index(row: dict[str, str]) -> None:
    # R writes the spread of the level about its line as a determinant and divides by n**2 where the exact factor is
    # n sqrt(n**2 - 1): its correction is larger by n / sqrt(n**2 - 1), a change in the fifth digit at n = 100.
    y, width = SERIES[row["series"]], int(row["lags"])
    found, plain = phillips_perron(y, "ct", width), adf(y, "ct", lags=0)
    assert found is not None
    assert plain is not None
    n = found.nobs
    short, long = variances(y, width)
    scaled = np.sqrt(short / long) * plain.statistic
    in_r = scaled + (found.statistic - scaled) * n / np.sqrt(n**2 - 1.0)
    assert in_r == pytest.approx(float(row["statistic"]), rel=1e-6)
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=5e-4)


def variances(y: np.ndarray, width: int) -> tuple[float, float]:
    """Short- and long-run variance of the residuals, by the sums of Phillips and Perron (1988)."""
    x = np.column_stack([np.ones(y.size - 1), np.arange(y.size - 1), y[:-1]])
    u = y[1:] - x @ np.linalg.lstsq(x, y[1:], rcond=None)[0]
    sums = [u[j:] @ u[: u.size - j] / u.size for j in range(width + 1)]
    return sums[0], sums[0] + 2.0 * sum((1.0 - j / (width + 1.0)) * sums[j] for j in range(1, width + 1))


@pytest.mark.parametrize("terms", ["n", "c", "ct", "ctt"])
def test_without_bandwidth_it_is_the_test_of_dickey_and_fuller(terms: str) -> None:
    y = walk(80)
    found, plain = phillips_perron(y, terms, 0), adf(y, terms, lags=0)
    assert found is not None
    assert plain is not None
    assert found.statistic == pytest.approx(plain.statistic, rel=1e-10)


@pytest.mark.parametrize("terms", ["n", "c", "ct", "ctt"])
@pytest.mark.parametrize("n", [30, 80, 300])
def test_without_bandwidth_the_critical_values_are_those_of_mackinnon(terms: str, n: int) -> None:
    found = phillips_perron(walk(n), terms, 0)
    assert found is not None
    published = dickey_fuller_critical_values(terms, n - 1)  # MacKinnon (2010), working paper 1227
    for level, allowed in (("1%", 0.06), ("5%", 0.03), ("10%", 0.03)):
        assert found.critical_values[level] == pytest.approx(published[level], abs=allowed)


def test_in_a_long_series_the_p_value_is_that_of_mackinnon() -> None:
    for seed in range(20):
        y = np.random.default_rng(seed).standard_normal(4000).cumsum()
        for width in (0, "newey-west"):
            found = phillips_perron(y, "ct", width)
            assert found is not None
            # MacKinnon (1994), Journal of Business and Economic Statistics 12; in the middle both err by a hundredth
            assert found.p_value == pytest.approx(dickey_fuller_p_value(found.statistic, "ct")[0], abs=0.02)


@pytest.mark.parametrize("terms", ["n", "c", "ct", "ctt"])
@pytest.mark.parametrize("width", [0, 3, "schwert", "newey-west"])
def test_p_value_and_critical_values_never_contradict_each_other(terms: str, width: int | str) -> None:
    for seed in range(40):
        y = np.random.default_rng(seed).standard_normal(45).cumsum()
        found = phillips_perron(y, terms, width)
        assert found is not None
        for level, value in found.critical_values.items():
            assert (found.statistic <= value) == (found.p_value <= float(level[:-1]) / 100.0 + 1e-12)


@pytest.mark.parametrize(
    ("terms", "scale", "constant"),
    [
        *((terms, scale, 0.0) for terms in ("n", "c", "ct", "ctt") for scale in (1e-6, 1e6)),
        *((terms, 1.0, constant) for terms in ("c", "ct", "ctt") for constant in (1e4, -3.0)),
    ],
)
def test_sees_neither_unit_nor_origin(terms: str, scale: float, constant: float) -> None:
    y = walk(120)
    plain, other = phillips_perron(y, terms), phillips_perron(scale * y + constant, terms)
    assert plain is not None
    assert other is not None
    assert other.bandwidth == plain.bandwidth
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-9)


def test_the_correction_answers_dependent_errors() -> None:
    # Differences that alternate: without correction the test rejects far too often. The correction takes only part of
    # that away, as Schwert (1989), Journal of Business and Economic Statistics 7, found for moving averages.
    rng = np.random.default_rng(3)
    rejected = {0: 0, "newey-west": 0}
    for _ in range(300):
        y = lfilter([1.0], [1.0, 0.6], rng.standard_normal(300)).cumsum()
        for width in rejected:
            found = phillips_perron(y, "c", width)
            assert found is not None
            rejected[width] += found.p_value < 0.05
    assert rejected["newey-west"] < 0.7 * rejected[0]


def test_refuses_what_cannot_carry_it() -> None:
    assert phillips_perron(np.full(50, 2.5)) is None
    assert phillips_perron(np.array([1.0, 3.0, 2.0])) is None
    assert phillips_perron(np.array([])) is None
    assert phillips_perron(0.1 * np.arange(60.0)) is None  # fitted without error
    assert phillips_perron(np.resize([1.0, -1.0], 60), "n") is None
    with pytest.raises(ValueError, match="finite"):
        phillips_perron(np.array([1.0, np.nan, 2.0, 3.0, 1.0, 4.0]))
    with pytest.raises(ValueError, match="deterministic"):
        phillips_perron(walk(20), "cc")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="bandwidth"):
        phillips_perron(walk(20), "c", 19)
    with pytest.raises(ValueError, match="bandwidth"):
        phillips_perron(walk(20), "c", -1)
    with pytest.raises(ValueError, match="bandwidth"):
        phillips_perron(walk(20), "c", "auto")  # type: ignore[arg-type]


def test_does_not_change_its_input() -> None:
    y = walk(50)
    kept = y.copy()
    phillips_perron(y)
    assert np.array_equal(y, kept)
