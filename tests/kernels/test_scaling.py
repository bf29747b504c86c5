import numpy as np
import pytest

from preflight_magic.kernels.scaling import does_not_vary, to_unit_size


@pytest.mark.parametrize("unit", [1e-300, 1e-6, 1.0, 3e150])
def test_no_digit_is_lost(unit: float) -> None:
    y = unit * np.random.default_rng(1).standard_normal(30)
    scaled, scale = to_unit_size(y)
    assert np.array_equal(scaled * scale, y)
    assert 0.5 <= np.abs(scaled).max() < 1.0


def test_zeros_stay() -> None:
    scaled, scale = to_unit_size(np.zeros(4))
    assert np.array_equal(scaled, np.zeros(4))
    assert scale == 1.0


def test_constant_up_to_rounding_does_not_vary() -> None:
    assert does_not_vary(np.array([0.1 + 0.2, 0.3, 0.3]))
    assert not does_not_vary(np.array([1e6, 1e6 + 1e-6]))
    assert not does_not_vary(1e-12 * np.array([0.1, 0.2]))
