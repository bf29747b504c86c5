"""What the generators of the simulated tables share: levels, seeds, response surfaces, and the file itself."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from pathlib import Path

import numpy as np

from preflight_magic.kernels.response_surfaces import COEFFICIENTS, FORMULA, surface_basis

TABLES = Path(__file__).resolve().parents[2] / "preflight_magic" / "kernels" / "tables"
LEVELS = (
    *(0.001, 0.0025, 0.005, 0.01, 0.015, 0.02, 0.025, 0.035, 0.05, 0.075, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5),
    *(0.6, 0.7, 0.8, 0.85, 0.9, 0.925, 0.95, 0.975, 0.99, 0.995, 0.999),
)
SEED = 20240611
REPLICATIONS = 50_000
_CHUNK = 400_000  # values held at a time

Cell = tuple[int, int]
"""Length of the series and lagged differences."""


def random_walks(n: int, replications: int, seed: int) -> Iterator[np.ndarray]:
    """Gaussian random walks in chunks, shape (rows, n); the same for every table and case of one length and seed."""
    rng = np.random.default_rng([seed, n])
    rows = max(1, _CHUNK // n)
    for start in range(0, replications, rows):
        yield rng.standard_normal((min(rows, replications - start), n)).cumsum(axis=1)


def fit_surfaces(cells: list[Cell], quantiles: np.ndarray, with_lags: bool) -> np.ndarray:
    """Coefficients, shape (levels, 8), by least squares over the cells, `quantiles` of shape (cells, levels).

    Below 50 values a surface is less exact than the simulation; such cells weigh less.
    """
    n, lags = np.array(cells, dtype=float).T
    basis = surface_basis(n, lags)
    width = basis.shape[1] if with_lags else 4
    weight = np.minimum(n / 50.0, 1.0)[:, None]
    coefficients = np.zeros((quantiles.shape[1], basis.shape[1]))
    coefficients[:, :width] = np.linalg.lstsq(weight * basis[:, :width], weight * quantiles, rcond=None)[0].T
    return coefficients


def write_table(name: str, what: str, source: str, cases: Mapping[str, np.ndarray]) -> None:
    """Write one table with its header."""
    lines = [
        f"# {what}",
        f"# Quantile = {FORMULA},",
        "# n the length of the series, lags the lagged differences in the regression.",
        f"# Source: simulated, {source}.",
        f"# Seed {SEED}, {REPLICATIONS} replications a cell.",
        f"# Command: python -m tests.simulation.{name}_table",
        f"case,level,{','.join(COEFFICIENTS)}",
    ]
    for case, coefficients in cases.items():
        for level, row in zip(LEVELS, coefficients, strict=True):
            lines.append(",".join([case, f"{level:g}", *(f"{value:.6g}" for value in row)]))
    (TABLES / f"{name}.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


def misfit(cells: list[Cell], quantiles: np.ndarray, coefficients: np.ndarray) -> str:
    """Largest distance of a simulated quantile from its surface at a few levels, for the one who runs a generator."""
    n, lags = np.array(cells, dtype=float).T
    far = np.abs(surface_basis(n, lags) @ coefficients.T - quantiles)
    told = [f"{level:g}: {far[:, k].max():.3f}" for k, level in enumerate(LEVELS) if level in (0.01, 0.05, 0.1, 0.5)]
    return "largest misfit at level " + ", ".join(told)


def quantiles_of(draw: Callable[[int, int, int], np.ndarray], cells: list[Cell]) -> np.ndarray:
    """Simulated quantiles, shape (cells, levels); `draw` takes length, lags and replications."""
    return np.array([np.quantile(draw(n, lags, REPLICATIONS), LEVELS) for n, lags in cells])
