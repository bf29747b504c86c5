"""Simulate the table of HEGY response surfaces.

Run ``OPENBLAS_NUM_THREADS=1 python tests/simulation/seasonal_unit_root_surfaces.py`` from the root of the project.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
from scipy.special import ndtr

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT), str(Path(__file__).parent)]

from seasonal_unit_root_draws import TERMS, Array, draw  # noqa: E402

from preflight_magic.kernels.seasonal_unit_root_surfaces import _surface, joint_limit, surface_basis  # noqa: E402
from preflight_magic.kernels.tables import read  # noqa: E402

TABLE = ROOT / "preflight_magic" / "kernels" / "tables" / "seasonal_unit_root.csv"

SEED = 1990
_SMOOTH = 6  # terms of the polynomial in the score
SCORES = np.arange(-13, 14) / 4.0
"""Normal scores of the probabilities whose quantiles are tabulated: 0.0006 to 0.9994."""

# (s, cycles, lags): short and long series, with and without lags.
CELLS = (
    *((2, cycles, 0) for cycles in (10, 20, 50, 200)),
    *((2, 30, 4), (2, 60, 12)),
    *((3, cycles, 0) for cycles in (8, 15, 40, 150)),
    *((4, cycles, 0) for cycles in (6, 8, 10, 15, 20, 30, 60, 120, 250)),
    *((4, 10, 2), (4, 10, 6), (4, 15, 4), (4, 15, 10), (4, 30, 4), (4, 30, 12), (4, 60, 12)),
    *((5, 8, 0), (5, 30, 0)),
    *((7, cycles, 0) for cycles in (6, 10, 20, 60)),
    (7, 15, 7),
    *((12, cycles, 0) for cycles in (5, 6, 8, 10, 15, 20, 40, 80)),
    *((12, 8, 6), (12, 8, 12), (12, 10, 12), (12, 10, 24), (12, 20, 4), (12, 20, 12), (12, 20, 24), (12, 40, 24)),
    *((24, cycles, 0) for cycles in (5, 8, 12, 25)),
    *((24, 8, 12), (24, 12, 24)),
    *((52, 5, 0), (52, 8, 0)),
)


def replications(s: int, cycles: int) -> int:
    """Series in a cell: fewer where each costs more."""
    return 40_000 if s * cycles <= 300 else 20_000 if s < 50 else 8_000


def cell(s: int, cycles: int, lags: int, count: int, seed: int = SEED) -> dict[tuple[str, str], Array]:
    """Quantiles of every statistic at `SCORES`."""
    found = draw(s, s * cycles, lags, count, np.random.default_rng([seed, s, cycles, lags]))
    return {key: np.quantile(values, ndtr(SCORES)) for key, values in found.items()}


def fitted(cells: dict[tuple[int, int, int], dict[tuple[str, str], Array]]) -> list[tuple[str, str, Array]]:
    """(kind, terms, rows of limit and coefficients) by weighted least squares on the quantiles of all cells."""
    rows: list[tuple[str, str, Array]] = []
    for kind in ("zero", "pi", "pair"):
        for terms in TERMS:
            basis, quantiles, weights = _stacked(cells, kind, terms, joint=False)
            design = np.column_stack([np.ones(len(basis)), basis]) * weights[:, None]
            rows.append((kind, terms, np.linalg.lstsq(design, quantiles * weights[:, None], rcond=None)[0].T))
    _write(rows)
    for kind in ("seasonal", "all"):
        for terms in TERMS:
            basis, quantiles, weights = _stacked(cells, kind, terms, joint=True)
            periods = [s for (s, _, _), found in cells.items() if _informs(s, terms, kind, found)]
            limits = np.stack([joint_limit(kind, terms, s) for s in periods])
            design, excess = basis * weights[:, None], (quantiles / limits - 1.0) * weights[:, None]
            # Coefficients smooth in the score: long periods, which few cells hold, have levels close to each other.
            powers = np.vander(SCORES / SCORES[-1], _SMOOTH)
            found = powers @ np.linalg.lstsq(powers, np.linalg.lstsq(design, excess, rcond=None)[0].T, rcond=None)[0]
            rows.append((kind, terms, np.column_stack([np.full(len(found), np.nan), found])))
    _write(rows)
    return rows


def _informs(s: int, terms: str, kind: str, found: dict[tuple[str, str], Array]) -> bool:
    """Whether a cell has a statistic of its own: below four seasons the seasonal one is that of pi or the pair."""
    return (terms, kind) in found and (kind != "seasonal" or s > 3)


def _stacked(
    cells: dict[tuple[int, int, int], dict[tuple[str, str], Array]], kind: str, terms: str, joint: bool
) -> tuple[Array, Array, Array]:
    """Regressors, quantiles and weights of the cells that have a statistic."""
    used = [(one, found[terms, kind]) for one, found in cells.items() if _informs(one[0], terms, kind, found)]
    s, cycles, lags = np.array([one for one, _ in used], dtype=float).T
    pairs = (s - 1) // 2 if kind == "pair" else 1.0
    counts = np.array([replications(*one[:2]) for one, _ in used]) * pairs
    # The square root of the count, but no cell may outweigh the others: a surface has an error of its own.
    weights = 1.0 / np.sqrt(1.0 / counts + 1.0 / 200_000)
    return surface_basis(s, s * cycles, lags, joint), np.stack([q for _, q in used]), weights


def _write(rows: list[tuple[str, str, Array]]) -> None:
    lines = [
        "# Quantile of a HEGY statistic in a series of n values, period s, p lagged seasonal differences, at the level",
        "# whose normal score is `score`, is limit + x for the kinds zero, pi and pair and limit (1 + x) for the joint",
        "# kinds, whose limit is a convolution of the others. With r = s / n and q = p / n:",
        "# x = a r + b r^2 + c / n + d q + e q^2 + f q r + (g r + h r^2 + i q) / sqrt(s), g, h and i for joint kinds.",
        "# Terms: none, constant, constant and line; D adds seasonal dummies.",
        f"# Source: own simulation of seasonal random walks, seed {SEED}, 8000 to 40000 replications in each of "
        f"{len(CELLS)} cells.",
        "# Command: python tests/simulation/seasonal_unit_root_surfaces.py",
        "kind,terms,score,limit,a,b,c,d,e,f,g,h,i",
    ]
    for kind, terms, table in rows:
        for score, (limit, *others) in zip(SCORES, table.tolist(), strict=True):
            numbers = ["" if np.isnan(limit) else f"{limit:.4f}", *(f"{x:.4g}" for x in others)]
            lines.append(",".join([kind, terms, f"{score:g}", *numbers]))
    TABLE.write_text("\n".join(lines) + "\n", encoding="utf-8")
    read.cache_clear()
    _surface.cache_clear()
    joint_limit.cache_clear()


if __name__ == "__main__":
    fitted({one: cell(*one, replications(*one[:2])) for one in CELLS})
