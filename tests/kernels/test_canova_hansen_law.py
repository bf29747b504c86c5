import numpy as np
import pytest

from preflight_magic.kernels.canova_hansen_law import Kind, canova_hansen_p_value, moment_basis
from preflight_magic.kernels.quadratic_forms import cramer_von_mises_p_value
from preflight_magic.kernels.tables import read
from tests.simulation import surfaces
from tests.simulation.canova_hansen_moments import REPLICATIONS, Cell, draw

CASES: list[tuple[Kind, int]] = [("joint", 11), ("pair", 2), ("pi", 1)]


@pytest.mark.parametrize(("kind", "degrees"), CASES)
@pytest.mark.parametrize("level", [0.9, 0.5, 0.05, 1e-6])
def test_in_a_long_series_it_is_the_limit(kind: Kind, degrees: int, level: float) -> None:
    low, high = 0.0, 100.0
    for _ in range(80):
        middle = (low + high) / 2.0
        low, high = (middle, high) if cramer_von_mises_p_value(middle, degrees) > level else (low, middle)
    assert canova_hansen_p_value(low, kind, degrees, 10**7, degrees + 1, 0) == pytest.approx(level, rel=1e-3)


@pytest.mark.parametrize(("kind", "degrees"), CASES)
@pytest.mark.parametrize("bandwidth", [0, 2, 40])
def test_p_values_fall_with_the_statistic(kind: Kind, degrees: int, bandwidth: int) -> None:
    found = [canova_hansen_p_value(x, kind, degrees, 60, degrees + 3, bandwidth) for x in np.linspace(0.0, 30.0, 400)]
    assert found[0] == 1.0
    assert (np.diff(found) <= 0.0).all()
    assert 0.0 <= found[-1] < 1e-6


def test_with_nothing_to_join_the_joint_law_is_that_of_the_part() -> None:
    for value in (0.1, 0.5, 1.2):
        assert canova_hansen_p_value(value, "joint", 1, 50, 3, 2) == canova_hansen_p_value(value, "pi", 1, 50, 3, 2)
        assert canova_hansen_p_value(value, "joint", 2, 50, 4, 2) == canova_hansen_p_value(value, "pair", 2, 50, 4, 2)


SAMPLE: list[Cell] = [(4, 40, 0, "c", True), (4, 130, 2, "ct", True), (7, 70, 1, "ct", False), (12, 60, 0, "ct", True)]


@pytest.mark.parametrize("cell", [*SAMPLE, (12, 240, 0, "c", True), (24, 120, 1, "c", True)])
def test_a_cell_simulated_again_has_uniform_p_values(cell: Cell) -> None:
    s, n, width, terms, lagged = cell
    columns = s + (terms == "ct") + lagged
    for kind, values in draw(cell, 1500, 4711).items():
        degrees = {"joint": s - 1, "pair": 2, "pi": 1}[kind]
        one = values if values.ndim == 1 else values[:, 0]
        p = np.array([canova_hansen_p_value(float(x), kind, degrees, n, columns, width) for x in one])  # type: ignore[arg-type]
        for level in (0.05, 0.1, 0.25, 0.5, 0.75):
            error = np.sqrt(level * (1.0 - level) / 1500)
            # Two moments do not make the whole law: in the middle of it a few points are left in a short series.
            assert abs(np.mean(p <= level) - level) < 3.5 * error + (0.01 if level <= 0.1 else 0.05), (kind, level)


def test_the_header_says_how_to_make_the_table_again() -> None:
    told = (surfaces.TABLES / "canova_hansen.csv").read_text(encoding="utf-8")
    assert f"Seed {surfaces.SEED}, {REPLICATIONS} replications" in told
    assert "python -m tests.simulation.canova_hansen_moments" in told
    assert {(row["kind"], row["moment"]) for row in read("canova_hansen")} == {
        (kind, moment) for kind in ("joint", "pair", "pi") for moment in ("mean", "spread")
    }


def test_shares_stop_where_the_table_does() -> None:
    assert np.array_equal(moment_basis(11, 50, 20, 10), moment_basis(11, 50, 30, 40))
