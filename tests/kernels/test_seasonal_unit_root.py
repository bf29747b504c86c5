import time

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from preflight_magic.kernels.distributions import dickey_fuller_p_value
from preflight_magic.kernels.seasonal_unit_root import HegyResult, hegy
from preflight_magic.kernels.seasonal_unit_root_surfaces import hegy_p_values, hegy_quantiles
from tests.references import seasonal
from tests.simulation.seasonal_unit_root_draws import KINDS, TERMS, draw, statistics

SCORES = np.arange(-13, 14) / 4.0


def walk(n: int, period: int, seed: int = 1) -> np.ndarray:
    steps = np.random.default_rng(seed).standard_normal((-(-n // period), period))
    return steps.cumsum(axis=0).ravel()[:n]


def pattern(n: int, period: int, seed: int = 1) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return np.resize(3.0 * rng.standard_normal(period), n) + rng.standard_normal(n)


def values(found: HegyResult) -> list[float]:
    return [one.statistic for one in (*found.roots, found.seasonal, found.all)]


# The R package uroot, function hegy.test; its deterministic terms are constant, line, dummies as 0 or 1.
@pytest.mark.parametrize("row", seasonal.record()["hegy"], ids=lambda row: f"{row['series']}-{row['terms']}")
def test_statistics_and_lags_are_those_of_uroot(row: dict) -> None:
    y, period = seasonal.series(row["series"])
    how, lags = row["choice"].split()
    options = {"lags": int(lags)} if how == "fixed" else {"max_lags": int(lags), "criterion": how}
    found = hegy(y, period, "ct" if row["terms"][1] == "1" else "c", dummies=row["terms"][2] == "1", **options)
    assert found is not None
    assert (found.lags, found.nobs) == (row["lags"], row["nobs"])
    np.testing.assert_allclose(values(found), row["statistics"], rtol=1e-8)
    kinds = ["zero"] + ["pi"] * (period % 2 == 0) + ["pair"] * ((period - 1) // 2)
    assert [one.kind for one in found.roots] == kinds
    cycles = [np.inf] + [2.0] * (period % 2 == 0) + [period / k for k in range(1, (period + 1) // 2)]
    assert [one.cycle for one in found.roots] == cycles


@pytest.mark.parametrize(("s", "n", "lags"), [(2, 40, 0), (4, 50, 3), (5, 61, 1), (12, 120, 5), (52, 300, 0)])
def test_the_simulated_statistics_are_those_of_the_test(s: int, n: int, lags: int) -> None:
    y = walk(n, s, n)
    drawn = statistics(y[None], s, lags)
    for terms in TERMS:
        found = hegy(y, s, terms.rstrip("D"), dummies="D" in terms, lags=lags)  # type: ignore[arg-type]
        assert found is not None
        expected = {kind: drawn[terms, kind] for kind in KINDS if (terms, kind) in drawn}
        assert found.seasonal.statistic == pytest.approx(expected["seasonal"][0], rel=1e-6)
        assert found.all.statistic == pytest.approx(expected["all"][0], rel=1e-6)
        for kind in ("zero", "pi", "pair"):
            ours = [one.statistic for one in found.roots if one.kind == kind]
            np.testing.assert_allclose(ours, expected.get(kind, []), rtol=1e-6)


def quantile(kind: str, terms: str, s: int, n: int, level: float) -> float:
    return float(np.interp(ndtri(level), SCORES, hegy_quantiles(kind, terms, s, n, 0)))  # type: ignore[arg-type]


def spread(kind: str, terms: str, s: int, n: int, level: float) -> float:
    """Standard error of a quantile simulated 24,000 times, as HEGY (1990) did (from memory)."""
    step = 0.2 * min(level, 1.0 - level)
    slope = (quantile(kind, terms, s, n, level + step) - quantile(kind, terms, s, n, level - step)) / (2.0 * step)
    return slope * float(np.sqrt(level * (1.0 - level) / 24_000))


# Hylleberg, Engle, Granger and Yoo (1990), Journal of Econometrics 44, tables 1a and 1b; Beaulieu and Miron (1993),
# Journal of Econometrics 55, table A.1; both as the package uroot carries them.
@pytest.mark.parametrize(
    ("name", "s", "lengths"), [("hegy", 4, ("48", "100", "136", "200")), ("monthly", 12, ("240", "480"))]
)
@pytest.mark.parametrize("terms", TERMS)
def test_published_critical_values_agree(name: str, s: int, lengths: tuple[str, ...], terms: str) -> None:
    (cases, sizes, levels, kinds), table = seasonal.table(name)
    case = cases.index({"n": "000", "c": "100", "ct": "110", "cD": "101", "ctD": "111"}[terms])
    width = {"n": 0, "c": 1, "ct": 2, "cD": s, "ctD": s + 1}[terms]
    far = []
    for length in lengths:
        n = int(length)
        # The quarterly t-ratios, and F without any terms, are larger, as if the residual variance were divided by the
        # observations and not by the degrees of freedom; the article does not say (from memory), so all that lies
        # between the two is let pass. The other F statistics and the monthly table follow the degrees of freedom.
        stretch = np.sqrt((n - s) / (n - 2 * s - width)) if name == "hegy" else 1.0
        for kind in kinds:
            for column, text in enumerate(levels):
                level = float(text) if kind != "pair" else 1.0 - float(text)
                published = table[case, sizes.index(length), column, kinds.index(kind)]
                exact = quantile(kind, terms, s, n, level)
                other = exact * (stretch if kind != "pair" else stretch**2 if terms == "n" else 1.0)
                error = 4.0 * spread(kind, terms, s, n, level) + 0.005
                far.append(max(min(exact, other) - published, published - max(exact, other)) / error)
    assert len(far) == 12 * len(lengths)
    assert np.isfinite(far).all()
    assert max(far) < 1.0


@pytest.mark.parametrize("terms", ["n", "c", "ct"])
@pytest.mark.parametrize("level", [0.01, 0.05, 0.1, 0.5, 0.9])
def test_limit_at_frequency_zero_is_dickey_and_fuller(terms: str, level: float) -> None:
    for kind, case in (("zero", terms), ("zero", f"{terms}D" if terms != "n" else "n")):
        p_value, _ = dickey_fuller_p_value(quantile(kind, case, 4, 10**9, level), terms)  # type: ignore[arg-type]
        assert p_value == pytest.approx(level, abs=0.006)


@pytest.mark.parametrize(("case", "terms"), [("n", "n"), ("ct", "n"), ("cD", "c"), ("ctD", "c")])
def test_limit_at_frequency_pi_knows_only_dummies(case: str, terms: str) -> None:
    for level in (0.01, 0.05, 0.5, 0.9):
        p_value, _ = dickey_fuller_p_value(quantile("pi", case, 4, 10**9, level), terms)  # type: ignore[arg-type]
        assert p_value == pytest.approx(level, abs=0.006)


# Cells that the table was not fitted to, with a seed of their own.
@pytest.mark.parametrize(
    ("s", "n", "lags"), [(2, 61, 1), (4, 70, 2), (6, 100, 4), (12, 145, 3), (24, 200, 0), (3, 90, 0)]
)
def test_simulated_again_the_table_holds(s: int, n: int, lags: int) -> None:
    draws = 3000
    found = draw(s, n, lags, draws, np.random.default_rng([77, s, n]))
    for (terms, kind), drawn in found.items():
        for level in (0.01, 0.05, 0.1, 0.5, 0.9, 0.95, 0.99):
            place = np.interp(ndtri(level), SCORES, hegy_quantiles(kind, terms, s, n, lags))  # type: ignore[arg-type]
            share = float(np.mean(drawn <= place))
            # four standard errors, and what the surfaces miss in the middle of a short series
            assert abs(share - level) < 4.0 * np.sqrt(level * (1.0 - level) / draws) + 0.012, (terms, kind, level)


@pytest.mark.parametrize("s", [2, 3, 4, 7, 12, 52, 168])
@pytest.mark.parametrize("terms", TERMS)
def test_quantiles_rise_at_every_period(s: int, terms: str) -> None:
    for cycles in (6, 10, 40, 1000):
        for kind in KINDS:
            if (kind == "pi" and s % 2) or (kind == "pair" and s == 2):
                continue
            found = hegy_quantiles(kind, terms, s, s * cycles, 0)  # type: ignore[arg-type]
            assert np.isfinite(found).all()
            assert (np.diff(found) >= 0.0).all()
            assert found[-1] > found[0]


def test_p_values_fall_with_the_evidence_and_tell_their_bounds() -> None:
    for kind, sign in (("zero", -1.0), ("pi", -1.0), ("pair", 1.0), ("seasonal", 1.0), ("all", 1.0)):
        asked = [(kind, sign * x) for x in (-30.0, 0.5, 1.5, 3.0, 6.0, 60.0)]
        found = hegy_p_values(asked, "c", True, 12, 144, 2)  # type: ignore[arg-type]
        p_values = [p for p, _ in found]
        assert p_values == sorted(p_values, reverse=True)
        assert found[0] == (pytest.approx(float(ndtr(3.25))), "at least")
        assert found[-1] == (pytest.approx(float(ndtr(-3.25))), "at most")


@pytest.mark.parametrize("period", [4, 12])
def test_a_fixed_pattern_is_told_from_a_wandering_one(period: int) -> None:
    rejected = {"fixed": 0, "wandering": 0}
    for seed in range(40):
        for name, y in (("fixed", pattern(15 * period, period, seed)), ("wandering", walk(15 * period, period, seed))):
            found = hegy(y, period, lags=0)
            assert found is not None
            rejected[name] += found.seasonal.p_value < 0.05
    assert rejected["fixed"] == 40
    assert rejected["wandering"] <= 7  # 2 expected; more than 7 has a probability of 0.001


@pytest.mark.parametrize("terms", ["c", "ct"])
@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e4), (1.0, -3.0)])
def test_neither_unit_nor_origin_is_seen(terms: str, scale: float, constant: float) -> None:
    y = walk(120, 12)
    plain, other = hegy(y, 12, terms), hegy(scale * y + constant, 12, terms)  # type: ignore[arg-type]
    assert plain is not None
    assert other is not None
    assert other.lags == plain.lags
    np.testing.assert_allclose(values(other), values(plain), rtol=1e-7)


def test_a_fixed_pattern_is_not_seen_beside_dummies() -> None:
    y = walk(96, 12)
    plain, other = hegy(y, 12), hegy(y + np.resize(10.0 * np.arange(12.0), 96), 12)
    assert plain is not None
    assert other is not None
    np.testing.assert_allclose(values(other), values(plain), rtol=1e-7)


def test_what_cannot_carry_the_test_is_none() -> None:
    assert hegy(np.full(60, 0.1), 4) is None
    assert hegy(np.array([]), 4) is None
    assert hegy(walk(15, 4), 4) is None  # 15 - 2 * 4 - 4 leaves 3 degrees of freedom
    assert hegy(walk(16, 4), 4) is not None
    assert hegy(walk(40, 4), 4, lags=13) is None
    assert hegy(np.resize([1.0, 5.0, 2.0, 7.0], 60), 4) is None  # seasonal differences are zero
    assert hegy(0.1 * np.arange(60.0), 4, "ct") is None


def test_wrong_input_is_refused() -> None:
    y = walk(60, 4)
    with pytest.raises(ValueError, match="finite"):
        hegy(np.where(np.arange(60) == 5, np.inf, y), 4)
    with pytest.raises(ValueError, match="terms"):
        hegy(y, 4, "ctt")  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="dummies"):
        hegy(y, 4, "n")
    with pytest.raises(ValueError, match="period"):
        hegy(y, 1, "n", dummies=False)
    with pytest.raises(ValueError, match="negative"):
        hegy(y, 4, lags=-1)
    with pytest.raises(ValueError, match="lag choice"):
        hegy(y, 4, criterion="HQ")  # type: ignore[arg-type]


def test_input_is_not_changed() -> None:
    y = walk(60, 4)
    kept = y.copy()
    hegy(y, 4, "n", dummies=False)
    hegy(y, 4, "ct")
    assert np.array_equal(y, kept)


def test_it_takes_little_time() -> None:
    y = walk(120, 12)
    taken = []
    for _ in range(60):
        start = time.perf_counter()
        hegy(y, 12, "ct", lags=0)
        taken.append(time.perf_counter() - start)
    assert min(taken) < 1.5e-3
