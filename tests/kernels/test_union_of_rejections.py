import numpy as np
import pytest

from preflight_magic.kernels.df_gls import df_gls
from preflight_magic.kernels.union_of_rejections import union_of_rejections
from preflight_magic.kernels.unit_root import adf


def walk(n: int) -> np.ndarray:
    return np.random.default_rng(n).standard_normal(n).cumsum()


@pytest.mark.parametrize("lags", [None, 0, 3])
def test_statistic_is_the_largest_of_four_ratios(lags: int | None) -> None:
    y = walk(90)
    found = union_of_rejections(y, lags)
    assert found is not None
    expected = {}
    for terms in ("c", "ct"):
        efficient = df_gls(y, terms, lags=lags)
        assert efficient is not None
        ordinary = adf(y, terms, lags=efficient.lags)
        assert ordinary is not None
        assert found.lags[terms] == efficient.lags
        expected["DF-GLS", terms] = efficient.statistic / efficient.critical_values["5%"]
        expected["ADF", terms] = ordinary.statistic / ordinary.critical_values["5%"]
    assert found.ratios == pytest.approx(expected)
    assert found.statistic == max(expected.values())
    assert found.ratios[found.foremost] == found.statistic


@pytest.mark.parametrize("seed", range(8))
def test_fits_made_before_change_nothing(seed: int) -> None:
    y = np.random.default_rng(seed).standard_normal(120).cumsum()
    efficient = [df_gls(y, terms) for terms in ("c", "ct")]
    ordinary = [adf(y, terms, criterion="MAIC") for terms in ("c", "ct")]
    other = [adf(y, terms, lags=9) for terms in ("c", "ct")]  # of no use, unless the search took as many
    made = [one for one in (*efficient, *other, *ordinary) if one is not None]
    alone, shared = union_of_rejections(y), union_of_rejections(y, made=made)
    assert alone is not None
    assert shared is not None
    assert shared.ratios == pytest.approx(alone.ratios, rel=1e-9)
    assert (shared.lags, shared.nobs, shared.foremost) == (alone.lags, alone.nobs, alone.foremost)
    fixed, reused = union_of_rejections(y, 9), union_of_rejections(y, 9, made=made)
    assert fixed is not None
    assert reused is not None
    assert reused.ratios == pytest.approx(fixed.ratios, rel=1e-9)


def test_critical_values_stretch_those_of_the_four() -> None:
    # Four correlated tests at 5 % each reject more often than 5 %: each critical value has to be stretched.
    for n in (30, 100, 400):
        found = union_of_rejections(walk(n))
        assert found is not None
        assert 1.03 < found.critical_values["5%"] < 1.25
        assert found.critical_values["1%"] > found.critical_values["5%"] > found.critical_values["10%"]


def test_p_value_meets_the_critical_values() -> None:
    rng = np.random.default_rng(5)
    for _ in range(40):
        found = union_of_rejections(rng.standard_normal(80).cumsum())
        assert found is not None
        for level, value in found.critical_values.items():
            assert (found.statistic > value) == (found.p_value < float(level[:-1]) / 100.0)


def test_it_keeps_power_where_one_of_the_four_has_none() -> None:
    # A stationary series about a line (terms c never reject), and one that starts far from its mean (DF-GLS does not).
    rng = np.random.default_rng(9)
    sloped = rng.standard_normal(100) + 0.2 * np.arange(100)
    far = rng.standard_normal(100) + 40.0 * 0.85 ** np.arange(100)
    for y, blind in ((sloped, ("DF-GLS", "c")), (far, ("DF-GLS", "ct"))):
        found = union_of_rejections(y, lags=0)
        assert found is not None
        assert found.ratios[blind] < 1.0
        assert found.p_value < 0.05


@pytest.mark.parametrize(("scale", "constant"), [(1e-6, 0.0), (1e6, 0.0), (1.0, 1e4), (1.0, -3.0)])
def test_sees_neither_unit_nor_origin(scale: float, constant: float) -> None:
    y = walk(120)
    plain, other = union_of_rejections(y), union_of_rejections(scale * y + constant)
    assert plain is not None
    assert other is not None
    assert (other.lags, other.foremost) == (plain.lags, plain.foremost)
    assert other.statistic == pytest.approx(plain.statistic, rel=1e-9)


def test_refuses_what_cannot_carry_it() -> None:
    assert union_of_rejections(np.full(50, 2.5)) is None
    assert union_of_rejections(np.array([1.0, 3.0, 2.0])) is None
    assert union_of_rejections(0.1 * np.arange(60.0)) is None
    with pytest.raises(ValueError, match="finite"):
        union_of_rejections(np.array([1.0, np.nan, 2.0]))
    with pytest.raises(ValueError, match="negative"):
        union_of_rejections(walk(20), lags=-1)
