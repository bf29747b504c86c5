import numpy as np
import pytest

from preflight_magic.kernels.guerrero import HIGHEST, LOWEST, guerrero


def growing(exponent: float, n: int = 240, seed: int = 1) -> np.ndarray:
    """A series whose spread within a year is proportional to its level to the power 1 - exponent."""
    rng = np.random.default_rng(seed)
    level = np.exp(np.repeat(np.linspace(2.0, 5.0, n // 12), 12))
    calmest = level.max() if exponent < 0.0 else level.min()
    return level * (1.0 + 0.1 * (level / calmest) ** -exponent * rng.standard_normal(n))


@pytest.mark.parametrize("exponent", [-0.5, 0.0, 0.5, 1.0])
def test_it_finds_the_power_of_the_level(exponent: float) -> None:
    found = guerrero(growing(exponent), 12)
    assert found == pytest.approx(exponent, abs=0.15)


@pytest.mark.parametrize("period", [1, 4, 12])
@pytest.mark.parametrize("n", [97, 240])
def test_it_is_the_least_coefficient_of_variation(period: int, n: int) -> None:
    y = growing(0.4)[:n]
    length = max(period, 2)
    blocks = [y[end - length : end] for end in range(n, length - 1, -length)]  # whole blocks, from the end
    grid = np.linspace(-1.0, 2.0, 3001)
    spread, level = np.array([block.std(ddof=1) for block in blocks]), np.array([block.mean() for block in blocks])
    ratios = spread / level ** (1.0 - grid[:, None])
    heights = ratios.std(axis=1, ddof=1) / ratios.mean(axis=1)
    assert guerrero(y, period) == pytest.approx(grid[int(np.argmin(heights))], abs=1.1e-3)


def test_it_stays_within_its_search() -> None:
    assert guerrero(growing(-3.0, 120), 12) == pytest.approx(LOWEST, abs=1e-3)
    falling = np.random.default_rng(1).standard_normal(120) / np.repeat(np.arange(1.0, 11.0), 12) ** 3
    assert guerrero(np.repeat(np.arange(10.0, 20.0), 12) + falling, 12) == pytest.approx(HIGHEST, abs=1e-3)


@pytest.mark.parametrize("scale", [1e-6, 1e6])
def test_the_unit_is_not_seen(scale: float) -> None:
    y = growing(0.5)
    assert guerrero(scale * y, 12) == pytest.approx(guerrero(y, 12), abs=1e-5)


def test_blocks_with_gaps_are_left_out() -> None:
    y = growing(0.5)
    spoilt = y.copy()
    spoilt[[30, 31]] = np.nan
    assert guerrero(spoilt, 12) == pytest.approx(guerrero(np.delete(y, np.s_[24:36]), 12), abs=1e-5)


def test_what_cannot_carry_it_is_none() -> None:
    y = growing(0.5)
    assert guerrero(np.where(np.arange(240) == 9, 0.0, y), 12) is None
    assert guerrero(y[:35], 12) is None
    assert guerrero(np.full(60, 3.0), 12) is None
    assert guerrero(np.repeat(np.arange(1.0, 6.0), 12), 12) is None  # no block varies
    assert guerrero(np.full(60, np.nan), 12) is None
    assert guerrero(np.array([]), 12) is None
