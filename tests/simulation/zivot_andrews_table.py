"""Simulate the Zivot-Andrews statistic of a random walk: ``python -m tests.simulation.zivot_andrews_table``.

Written apart from the package, which keeps running sums of one series: here the breaks of all dates are orthogonal
columns and all series of a chunk are multiplied by them.
"""

from __future__ import annotations

import numpy as np

from tests.simulation.surfaces import SEED, Cell, fit_surfaces, misfit, quantiles_of, random_walks, write_table

LENGTHS = (20, 25, 30, 40, 50, 75, 100, 150, 250, 500, 1000)
MODELS = ("level", "trend", "both")
CELLS: list[Cell] = [(n, 0) for n in LENGTHS]
TRIMMING = 0.15


def break_columns(n: int, model: str, trimming: float = TRIMMING) -> tuple[np.ndarray, np.ndarray]:
    """Orthonormal constant and line, shape (n - 1, 2), and what each break adds, shape (dates, n - 1, 1 or 2)."""
    t = np.arange(1, n)
    base = np.linalg.qr(np.column_stack([np.ones(n - 1), t]))[0]
    cut = int(n * trimming)
    breaks = []
    for at in range(max(cut + 1, 2), min(n - cut, n - 1) + 1):
        step, slope = (t >= at).astype(float), np.maximum(t - at + 1.0, 0.0)
        broken = {"level": [step], "trend": [slope], "both": [step, slope]}[model]
        together = np.linalg.qr(np.column_stack([base, *broken]))[0]
        breaks.append(together[:, 2:])
    return base, np.array(breaks)


def draw(model: str, n: int, lags: int, replications: int, seed: int = SEED) -> np.ndarray:
    """Statistics of one cell; only without lags."""
    assert lags == 0
    base, breaks = break_columns(n, model)
    dates, _, width = breaks.shape
    flat = breaks.transpose(1, 0, 2).reshape(n - 1, dates * width)
    freedom = n - 1 - 3 - width
    found = []
    for y in random_walks(n, replications, seed):
        level, difference = (x - x @ base @ base.T for x in (y[:, :-1], np.diff(y, axis=1)))
        a, b = ((x @ flat).reshape(len(y), dates, width) for x in (level, difference))
        ll = (level**2).sum(axis=1)[:, None] - (a**2).sum(axis=2)
        rr = (difference**2).sum(axis=1)[:, None] - (b**2).sum(axis=2)
        lr = (level * difference).sum(axis=1)[:, None] - (a * b).sum(axis=2)
        found.append((lr * np.sqrt(freedom) / np.sqrt(ll * rr - lr**2)).min(axis=1))
    return np.concatenate(found)


def main() -> None:
    """Write the table."""
    cases = {}
    for model in MODELS:
        quantiles = quantiles_of(lambda n, lags, count, model=model: draw(model, n, lags, count), CELLS)
        cases[model] = fit_surfaces(CELLS, quantiles, with_lags=False)
        print(model, misfit(CELLS, quantiles, cases[model]))
    what = "Quantiles of the Zivot-Andrews statistic, no lags, breaks from 15 % to 85 % of the series, random walk."
    source = "method of Zivot and Andrews (1992), Journal of Business and Economic Statistics 10"
    write_table("zivot_andrews", what, source, cases)


if __name__ == "__main__":
    main()
