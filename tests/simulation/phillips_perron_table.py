"""Simulate the Phillips-Perron statistic of a random walk: ``python -m tests.simulation.phillips_perron_table``.

Written apart from the package, which factorises one series: here products and autocovariances of all series of a chunk
are formed at once.
"""

from __future__ import annotations

import numpy as np

from preflight_magic.kernels.phillips_perron import table_lags
from tests.simulation import df_gls_table
from tests.simulation.surfaces import SEED, Cell, fit_surfaces, misfit, quantiles_of, random_walks, write_table

LENGTHS = (*df_gls_table.LENGTHS, 1000)
TERMS = {"n": 0, "c": 1, "ct": 2, "ctt": 3}
AUTOMATIC = "automatic"
GIVEN: list[Cell] = [(n, width) for n in LENGTHS for width in df_gls_table.lag_lengths(n)]
SEARCHED: list[Cell] = [(n, 0) for n in LENGTHS]


def corrected(y: np.ndarray, columns: int, width: int | None) -> np.ndarray:
    """Z of the t-ratio; rows are series, `columns` the deterministic terms, `width` None for that of Newey and West."""
    nobs = y.shape[1] - 1
    level, difference = y[:, :-1], np.diff(y, axis=1)
    if columns:
        base = np.linalg.qr(np.vander(np.linspace(-1.0, 1.0, nobs), columns, increasing=True))[0]
        level, difference = (x - x @ base @ base.T for x in (level, difference))
    ll, lr = (level**2).sum(axis=1), (level * difference).sum(axis=1)
    residual = difference - (lr / ll)[:, None] * level
    short = (residual**2).sum(axis=1) / nobs
    widths = newey_west(residual) if width is None else np.full(len(y), float(width))
    long = short.copy()
    for lag in range(1, int(widths.max()) + 1):
        rows = widths >= lag  # ever fewer
        weight = 2.0 * (1.0 - lag / (widths[rows] + 1.0))
        long[rows] += weight * autocovariance(residual[rows], lag)
    ratio = lr / np.sqrt(ll * short * nobs / (nobs - columns - 1))
    return np.sqrt(short / long) * ratio - 0.5 * (long - short) / np.sqrt(long) * nobs / np.sqrt(ll)


def autocovariance(residual: np.ndarray, lag: int) -> np.ndarray:
    """At one lag; rows are series."""
    products: np.ndarray = np.einsum("ij,ij->i", residual[:, lag:], residual[:, : residual.shape[1] - lag])
    return products / residual.shape[1]


def newey_west(residual: np.ndarray) -> np.ndarray:
    """Automatic bandwidth of Newey and West (1994), Review of Economic Studies 61, for the Bartlett kernel."""
    nobs = residual.shape[1]
    pilot = int(4.0 * (nobs / 100.0) ** (2.0 / 9.0))
    few = np.column_stack([autocovariance(residual, lag) for lag in range(pilot + 1)])
    ratio = 2.0 * few @ np.arange(pilot + 1) / (few[:, 0] + 2.0 * few[:, 1:].sum(axis=1))
    return np.minimum(np.floor(1.1447 * (ratio**2 * nobs) ** (1.0 / 3.0)), nobs - 1.0)


def draw(case: str, n: int, lags: int, replications: int, seed: int = SEED) -> np.ndarray:
    """Statistics of one cell; `lags` is the bandwidth, which a case named automatic searches."""
    terms, _, rule = case.partition(" ")
    width = None if rule == AUTOMATIC else lags
    return np.concatenate([corrected(y, TERMS[terms], width) for y in random_walks(n, replications, seed)])


def main() -> None:
    """Write the table."""
    cases = {}
    for terms in TERMS:
        for case, cells in ((terms, GIVEN), (f"{terms} {AUTOMATIC}", SEARCHED)):
            quantiles = quantiles_of(lambda n, lags, count, case=case: draw(case, n, lags, count), cells)
            places = [(n, table_lags(width, n)) for n, width in cells]
            cases[case] = fit_surfaces(places, quantiles, with_lags=cells is GIVEN)
            print(case, misfit(places, quantiles, cases[case]), flush=True)
    what = "Quantiles of the Phillips-Perron Z of the t-ratio under a random walk; lags: see `table_lags`."
    source = "method of Phillips and Perron (1988), Biometrika 75, bandwidth given or of Newey and West (1994)"
    write_table("phillips_perron", what, source, cases)


if __name__ == "__main__":
    main()
