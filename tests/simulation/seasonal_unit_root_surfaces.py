"""Simulate the table of HEGY response surfaces.

Run ``OPENBLAS_NUM_THREADS=1 python tests/simulation/seasonal_unit_root_surfaces.py`` from the root of the project.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent))
from seasonal_unit_root_draws import KINDS, TERMS, Array, draw  # noqa: E402

SEED = 1990
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


def cell(s: int, cycles: int, lags: int, count: int, seed: int) -> dict[tuple[str, str], Array]:
    """Quantiles of every statistic at `SCORES`."""
    from scipy.special import ndtr

    found = draw(s, s * cycles, lags, count, np.random.default_rng([seed, s, cycles, lags]))
    return {key: np.quantile(values, ndtr(SCORES)) for key, values in found.items()}


if __name__ == "__main__":
    import time
    raw = {}
    for one in CELLS:
        t = time.process_time()
        for (terms, kind), q in cell(*one, replications(*one[:2]), SEED).items():
            raw["_".join(map(str, (*one, terms, kind)))] = q
        print(one, round(time.process_time() - t, 1), flush=True)
    np.savez(sys.argv[1], **raw)
