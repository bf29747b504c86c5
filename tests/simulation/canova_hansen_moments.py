"""Simulate mean and spread of the Canova-Hansen statistics: ``python -m tests.simulation.canova_hansen_moments``.

Written apart from the package, which takes one series and sums over windows: here residuals, autocovariances and
statistics of all series of a chunk are formed at once.
"""

from __future__ import annotations

import numpy as np

from preflight_magic.kernels.canova_hansen_law import COEFFICIENTS, FORMULA, moment_basis
from tests.simulation.surfaces import SEED, TABLES

PERIODS = (2, 3, 4, 5, 7, 12, 24, 36)
CYCLES = (3, 4, 6, 9, 14, 24, 48)
BANDWIDTHS = (0, 1, 3, 6)
LONGEST = 500
REPLICATIONS = 4000
_CHUNK = 2_000_000  # values held at a time
KINDS = ("joint", "pair", "pi")

Cell = tuple[int, int, int, str, bool]
"""Period, length of the regression, bandwidth, terms, whether the regression has the series one step before."""


def cells() -> list[Cell]:
    """Each period with some lengths and bandwidths; every second cell has a line, every third no lag."""
    pairs = [(s, c * s) for s in PERIODS for c in CYCLES if 20 <= c * s <= LONGEST]
    every = [(s, n, b) for s, n in pairs for b in BANDWIDTHS if b * (s - 1) <= n]
    return [(s, n, b, "ct" if k % 2 else "c", k % 3 > 0) for k, (s, n, b) in enumerate(every)]


def draw(cell: Cell, replications: int, seed: int = SEED) -> dict[str, np.ndarray]:
    """Statistics of white noise by kind; those of all pairs follow each other in a second axis."""
    s, n, width, terms, lagged = cell
    rng = np.random.default_rng([seed, s, n])
    rows = max(1, _CHUNK // (n * s))
    parts = [
        statistics(rng.standard_normal((min(rows, replications - start), n + lagged)), s, width, terms, lagged)
        for start in range(0, replications, rows)
    ]
    return {kind: np.concatenate([part[kind] for part in parts]) for kind in parts[0]}


def statistics(y: np.ndarray, s: int, width: int, terms: str, lagged: bool) -> dict[str, np.ndarray]:
    """Joint statistic, those of the pairs and that at frequency pi; rows are series."""
    n = y.shape[1] - lagged
    t = np.arange(n)[:, None]
    angle = 2.0 * np.pi * t * np.arange(1, (s + 1) // 2) / s
    pairs = np.stack([np.cos(angle), np.sin(angle)], axis=2).reshape(n, -1)
    waves = np.hstack([pairs, (-1.0) ** t]) if s % 2 == 0 else pairs
    line = [t - t.mean()] if terms == "ct" else []
    base = np.linalg.qr(np.hstack([np.ones((n, 1)), *line, waves]))[0]
    left = y[:, lagged:] - y[:, lagged:] @ base @ base.T
    if lagged:
        before = y[:, :-1] - y[:, :-1] @ base @ base.T
        left -= before * ((before * left).sum(axis=1) / (before**2).sum(axis=1))[:, None]
    products = left[:, :, None] * waves
    variance = products.transpose(0, 2, 1) @ products
    for lag in range(1, width + 1):
        cross = products[:, lag:].transpose(0, 2, 1) @ products[:, : n - lag]
        variance += (1.0 - lag / (width + 1.0)) * (cross + cross.transpose(0, 2, 1))
    sums = products.cumsum(axis=1)
    moments = sums.transpose(0, 2, 1) @ sums / n
    found = {"joint": trace(variance, moments)}
    parts = [slice(2 * k, 2 * k + 2) for k in range(pairs.shape[1] // 2)]
    if parts:
        found["pair"] = np.column_stack([trace(variance[:, p, p], moments[:, p, p]) for p in parts])
    if s % 2 == 0:
        found["pi"] = moments[:, -1, -1] / variance[:, -1, -1]
    return found


def trace(variance: np.ndarray, moments: np.ndarray) -> np.ndarray:
    """Of the inverse variance times the moments."""
    return np.trace(np.linalg.solve(variance, moments), axis1=1, axis2=2)


def main() -> None:
    """Write the table."""
    found: dict[str, list[tuple[np.ndarray, float, float]]] = {kind: [] for kind in KINDS}
    for cell in cells():
        s, n, width, terms, lagged = cell
        columns = s + (terms == "ct") + lagged
        for kind, values in draw(cell, REPLICATIONS).items():
            if kind == "joint" and s < 4:
                continue  # the statistic at pi, or of the one pair
            degrees = {"joint": s - 1, "pair": 2, "pi": 1}[kind]
            mean, spread = values.mean() / (degrees / 6.0), values.std(axis=0).mean() / (degrees / 45.0) ** 0.5
            found[kind].append((moment_basis(degrees, n, columns, width), float(np.log(mean)), float(np.log(spread))))
    lines = [
        "# Mean and spread of Canova-Hansen statistics of white noise over those of their limits.",
        f"# Logarithm of each = {FORMULA},",
        "# m degrees of freedom, n observations, k columns of the regression, l bandwidth; limits m / 6, sqrt(m / 45).",
        "# Source: simulated, method of Canova and Hansen (1995), Journal of Business and Economic Statistics 13.",
        f"# Seed {SEED}, {REPLICATIONS} replications a cell.",
        "# Command: python -m tests.simulation.canova_hansen_moments",
        f"kind,moment,{','.join(COEFFICIENTS)}",
    ]
    for kind, rows in found.items():
        basis = np.array([row[0] for row in rows])
        for place, moment in ((1, "mean"), (2, "spread")):
            wanted = np.array([row[place] for row in rows])
            coefficients = np.linalg.lstsq(basis, wanted, rcond=None)[0]
            far = np.abs(basis @ coefficients - wanted)
            print(kind, moment, f"misfit: root mean square {np.sqrt((far**2).mean()):.3f}, largest {far.max():.3f}")
            lines.append(",".join([kind, moment, *(f"{value:.6g}" for value in coefficients)]))
    (TABLES / "canova_hansen.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
