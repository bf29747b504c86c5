"""Simulate the DF-GLS statistic of a random walk: ``python -m tests.simulation.df_gls_table`` writes the table.

Written apart from the package, which factorises one series: here products of all series of a chunk are formed by
running sums and their Cholesky factors give the t-ratios.
"""

from __future__ import annotations

import numpy as np

from preflight_magic.kernels.lag_length import schwert
from preflight_magic.kernels.response_surfaces import LAG_SHARE
from tests.simulation.surfaces import SEED, Cell, fit_surfaces, misfit, quantiles_of, random_walks, write_table

LENGTHS = (20, 25, 30, 40, 50, 75, 100, 150, 250, 500)
_LOCAL = {"c": -7.0, "ct": -13.5}  # Elliott, Rothenberg and Stock (1996)


def lag_lengths(n: int) -> tuple[int, ...]:
    """None, some, and the longest that a search would try, up to the share of the series that tables cover."""
    longest = min(schwert(n), n // LAG_SHARE)
    return tuple(sorted({0, longest // 4, longest // 2, longest}))


CELLS: list[Cell] = [(n, lags) for n in LENGTHS for lags in lag_lengths(n)]


def detrended(y: np.ndarray, terms: str) -> np.ndarray:
    """Residuals from terms fitted to quasi-differences; rows are series."""
    n = y.shape[1]
    root = 1.0 + _LOCAL[terms] / n
    z = np.vander(np.arange(1.0, n + 1.0), 2 if terms == "ct" else 1, increasing=True)
    quasi_z = np.vstack([z[:1], z[1:] - root * z[:-1]])
    quasi_y = np.hstack([y[:, :1], y[:, 1:] - root * y[:, :-1]])
    return y - quasi_y @ np.linalg.pinv(quasi_z).T @ z.T


def t_ratios(y: np.ndarray, lags: int) -> np.ndarray:
    """t-ratio of the lagged level without deterministic terms; rows are series."""
    d = np.diff(y, axis=1)
    t = np.arange(lags, d.shape[1])
    columns = [*(d[:, t - lag] for lag in range(1, lags + 1)), y[:, t], d[:, t]]
    stacked = np.stack(columns, axis=1)
    factor = np.linalg.cholesky(stacked @ stacked.transpose(0, 2, 1))
    return factor[:, -1, -2] / factor[:, -1, -1] * np.sqrt(t.size - lags - 1)


def draw(terms: str, n: int, lags: int, replications: int, seed: int = SEED) -> np.ndarray:
    """Statistics of one cell."""
    return np.concatenate([t_ratios(detrended(y, terms), lags) for y in random_walks(n, replications, seed)])


def main() -> None:
    """Write the table."""
    cases = {}
    for terms in ("c", "ct"):
        quantiles = quantiles_of(lambda n, lags, count, terms=terms: draw(terms, n, lags, count), CELLS)
        cases[terms] = fit_surfaces(CELLS, quantiles, with_lags=True)
        print(terms, misfit(CELLS, quantiles, cases[terms]))
    what = "Quantiles of the DF-GLS statistic with constant (c) or constant and line (ct) under a random walk."
    source = "method of Elliott, Rothenberg and Stock (1996), Econometrica 64, lags as in Cheung and Lai (1995)"
    write_table("df_gls", what, source, cases)


if __name__ == "__main__":
    main()
