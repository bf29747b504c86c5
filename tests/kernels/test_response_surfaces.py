import numpy as np
import pytest

from preflight_magic.kernels.response_surfaces import critical_values, lower_tail, surface_basis
from preflight_magic.kernels.tables import read

CASES = [
    ("df_gls", "c"),
    ("df_gls", "ct"),
    ("zivot_andrews", "level"),
    ("zivot_andrews", "trend"),
    ("zivot_andrews", "both"),
    ("union_of_rejections", "four tests"),
]


@pytest.mark.parametrize(("table", "case"), CASES)
@pytest.mark.parametrize("n", [20, 23, 40, 100, 1000, 100_000])
def test_surfaces_of_neighbouring_levels_do_not_cross(table: str, case: str, n: int) -> None:
    rows = [row for row in read(table) if row["case"] == case]
    coefficients = np.array([[float(row[name]) for name in "abcdefgh"] for row in rows])
    for lags in (0, 1, 3, min(n // 4, 20)) if table == "df_gls" else (0,):
        assert (np.diff(coefficients @ surface_basis(n, lags)) > 0.0).all()


@pytest.mark.parametrize(("table", "case"), CASES)
def test_p_value_at_a_critical_value_is_its_level(table: str, case: str) -> None:
    for name, value in critical_values(table, case, 77, 0).items():
        p_value, bound = lower_tail(value, table, case, 77, 0)
        assert bound == "exact"
        assert p_value == pytest.approx(float(name[:-1]) / 100.0, rel=1e-9)


@pytest.mark.parametrize(("table", "case"), CASES)
def test_p_value_rises_with_the_statistic_up_to_its_bounds(table: str, case: str) -> None:
    found = [lower_tail(float(x), table, case, 60, 0) for x in np.linspace(-12.0, 8.0, 400)]
    p_values = [p for p, _ in found]
    assert p_values == sorted(p_values)
    assert found[0] == (0.001, "at most")
    assert found[-1] == (0.999, "at least")
    assert {bound for p, bound in found if 0.001 < p < 0.999} == {"exact"}


def test_short_series_and_many_lags_are_read_at_the_edge_of_the_table() -> None:
    assert critical_values("df_gls", "c", 12) == critical_values("df_gls", "c", 20)
    assert critical_values("df_gls", "c", 40, 15) == critical_values("df_gls", "c", 40, 10)
