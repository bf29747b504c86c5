"""Simulate the union of rejections for a random walk: ``python -m tests.simulation.union_of_rejections_table``.

Needs the table of DF-GLS, whose critical values stand below the ratios.
"""

from __future__ import annotations

import numpy as np

from preflight_magic.kernels.distributions import dickey_fuller_critical_values
from preflight_magic.kernels.response_surfaces import critical_values
from tests.simulation.df_gls_table import LENGTHS, detrended, t_ratios
from tests.simulation.surfaces import SEED, Cell, fit_surfaces, misfit, quantiles_of, random_walks, write_table

CASE = "four tests"
CELLS: list[Cell] = [(n, 0) for n in LENGTHS]


def ordinary(y: np.ndarray, terms: str) -> np.ndarray:
    """Dickey-Fuller t-ratios with deterministic terms, no lags; rows are series."""
    nobs = y.shape[1] - 1
    base = np.linalg.qr(np.vander(np.arange(nobs), 2 if terms == "ct" else 1, increasing=True))[0]
    level, difference = (x - x @ base @ base.T for x in (y[:, :-1], np.diff(y, axis=1)))
    ll, rr, lr = ((a * b).sum(axis=1) for a, b in ((level, level), (difference, difference), (level, difference)))
    return lr / np.sqrt((ll * rr - lr**2) / (nobs - 1 - base.shape[1]))


def draw_ratios(n: int, replications: int, seed: int = SEED) -> np.ndarray:
    """Statistics over their 5 % critical values, shape (replications, 4): DF-GLS c and ct, ADF c and ct."""
    gls = {terms: critical_values("df_gls", terms, n)["5%"] for terms in ("c", "ct")}
    ols = {terms: dickey_fuller_critical_values(terms, n - 1)["5%"] for terms in ("c", "ct")}
    found = []
    for y in random_walks(n, replications, seed):
        efficient = [t_ratios(detrended(y, terms), 0) / gls[terms] for terms in ("c", "ct")]
        found.append(np.column_stack([*efficient, *(ordinary(y, terms) / ols[terms] for terms in ("c", "ct"))]))
    return np.concatenate(found)


def draw(case: str, n: int, lags: int, replications: int, seed: int = SEED) -> np.ndarray:
    """Largest ratio with its sign turned."""
    assert case == CASE
    assert lags == 0
    return -draw_ratios(n, replications, seed).max(axis=1)


def main() -> None:
    """Write the table."""
    quantiles = quantiles_of(lambda n, lags, count: draw(CASE, n, lags, count), CELLS)
    coefficients = fit_surfaces(CELLS, quantiles, with_lags=False)
    print(misfit(CELLS, quantiles, coefficients))
    what = "Quantiles of minus the largest of DF-GLS c, DF-GLS ct, ADF c and ADF ct over their 5 % critical values."
    source = "method of Harvey, Leybourne and Taylor (2009), Econometric Theory 25; random walk, no lags"
    write_table("union_of_rejections", what, source, {CASE: coefficients})


if __name__ == "__main__":
    main()
