"""How often a plan changes from month to month, with and without the odds that an earlier plan is granted.

``python -m tests.bench.plan_changes [series a process]`` prints a table. Each simulated series of known truth is
checked with 72 months, then again with each of the next 24.
"""

from __future__ import annotations

import math
import sys
from collections.abc import Callable

import numpy as np

from preflight_magic.kernels.plan_likelihood import Comparison, compare
from preflight_magic.kernels.plan_standing import NEAR, PlanForm, below_best
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.shares import prior_of

SEED = 20260501
START, MONTHS = 72, 24
ODDS = (1.0, 3.0, 20.0, 150.0)
Draw = Callable[[np.random.Generator, int], np.ndarray]


def _ar(rng: np.random.Generator, n: int, root: float) -> np.ndarray:
    errors = rng.standard_normal(n + 100)
    for t in range(1, n + 100):
        errors[t] += root * errors[t - 1]
    return errors[100:]


def _pattern(n: int, size: float) -> np.ndarray:
    return size * np.sin(2 * np.pi * np.arange(n) / 12 + 0.4) + 0.5 * size * np.cos(4 * np.pi * np.arange(n) / 12)


def _airline(rng: np.random.Generator, n: int) -> np.ndarray:
    errors = rng.standard_normal(n + 13)
    changes = errors[13:] - 0.4 * errors[12:-1] - 0.6 * errors[1:-12] + 0.24 * errors[:-13]
    y = np.zeros(n + 13)
    y[:13] = rng.standard_normal(13) * 3
    for t in range(n):
        y[t + 13] = y[t + 12] + y[t + 1] - y[t] + changes[t]
    return y[13:]


PROCESSES: dict[str, tuple[Draw, PlanForm]] = {
    "returns to a mean, root 0.8": (lambda r, n: _ar(r, n, 0.8), PlanForm(False, 0, 0, False, False, None, 1)),
    "random walk": (lambda r, n: np.cumsum(r.standard_normal(n)), PlanForm(False, 1, 0, False, False, None, 1)),
    "random walk with drift": (
        lambda r, n: np.cumsum(0.3 + r.standard_normal(n)), PlanForm(False, 1, 0, False, False, None, 1),
    ),
    "line and root 0.6": (
        lambda r, n: 0.08 * np.arange(n) + _ar(r, n, 0.6), PlanForm(False, 0, 0, True, False, None, 1),
    ),
    "fixed pattern and root 0.6": (
        lambda r, n: _pattern(n, 1.2) + _ar(r, n, 0.6), PlanForm(False, 0, 0, False, True, None, 12),
    ),
    "weak pattern": (lambda r, n: _pattern(n, 0.45) + _ar(r, n, 0.3), PlanForm(False, 0, 0, False, True, None, 12)),
    "airline model": (_airline, PlanForm(False, 1, 1, False, False, None, 12)),
    "log of a random walk": (
        lambda r, n: np.exp(5 + np.cumsum(0.01 + 0.06 * r.standard_normal(n))),
        PlanForm(True, 1, 0, False, False, None, 1),
    ),
    "level shift": (
        lambda r, n: 3.0 * (np.arange(n) >= 40) + _ar(r, n, 0.3), PlanForm(False, 0, 0, False, False, 40, 1),
    ),
}  # fmt: skip


def form_of(comparison: Comparison) -> PlanForm:
    """The leading plan."""
    best = comparison.best
    free = best.d + best.D == 0
    period = comparison.period if best.pattern or best.D else 1
    return PlanForm(comparison.log, best.d, best.D, best.trend and free, best.pattern, best.shift, period)


def alike(one: PlanForm, other: PlanForm) -> bool:
    """Whether two plans are the same but for a step or two in the date of a shift."""
    if (one.shift is None) != (other.shift is None):
        return False
    moved = abs((one.shift or 0) - (other.shift or 0))
    return moved <= NEAR and (one.log, one.d, one.D, one.trend, one.pattern) == (
        other.log, other.d, other.D, other.trend, other.pattern,
    )  # fmt: skip


def follow(y: np.ndarray, truth: PlanForm) -> dict[float, tuple[int, int]]:
    """For each odds the number of months in which the plan changed, and in which it was right."""
    prior = prior_of(Thresholds())
    force: dict[float, PlanForm] = {}
    found = {odds: [0, 0] for odds in ODDS}
    for n in range(START, START + MONTHS + 1):
        comparison = compare(y[:n], 12, prior)
        assert comparison is not None
        best = form_of(comparison)
        for odds in ODDS:
            old = force.setdefault(odds, best)
            against = below_best(y[:n], (12,), comparison, prior, old, 20.0)
            keep = alike(old, best) if odds == 1.0 else against <= math.log(odds)
            if not keep:
                found[odds][0] += 1
            # without odds the newest plan is taken as it is
            force[odds] = old if keep and odds > 1.0 else best
            found[odds][1] += alike(force[odds], truth) if n > START else 0
    return {odds: (changes, right) for odds, (changes, right) in found.items()}


def main(replications: int) -> None:
    rng = np.random.default_rng(SEED)
    print("| process | " + " | ".join(f"{odds:g} to 1" for odds in ODDS) + " |\n|" + " --- |" * (len(ODDS) + 1))
    every: dict[float, list[tuple[int, int]]] = {odds: [] for odds in ODDS}
    for name, (draw, truth) in PROCESSES.items():
        here = [follow(draw(rng, START + MONTHS), truth) for _ in range(replications)]
        for odds in ODDS:
            every[odds] += [one[odds] for one in here]
        rates = [np.mean([one[odds][0] for one in here]) / MONTHS for odds in ODDS]
        print(f"| {name} | " + " | ".join(f"{rate:.3f}" for rate in rates) + " |", flush=True)
    for title, place in (("all", 0), ("plan right", 1)):
        told = [np.array([one[place] for one in every[odds]]) / MONTHS for odds in ODDS]
        error = [values.std(ddof=1) / math.sqrt(len(values)) for values in told]
        cells = [f"{values.mean():.3f} ({e:.3f})" for values, e in zip(told, error, strict=True)]
        print(f"| {title} | " + " | ".join(cells) + " |")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 8)
