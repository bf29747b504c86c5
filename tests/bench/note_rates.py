"""How often the rungs after the plan add a note: where nothing is wrong, and where something is.

Run ``OPENBLAS_NUM_THREADS=1 python -m tests.bench.note_rates [series] [seed]`` from the root of the project.

The first table counts notes on series of known processes whose recommended plan is that of the process: each is a
false alarm, and about one in twenty is what a test at 5 % gives. The second counts notes on series with a fault: the
plan is that of the fault (a difference too many is put in by hand), so each note there is a hit.
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
import pandas as pd
from scipy.signal import lfilter

import preflight_magic as pf
from preflight_magic.model import Difference, Log, RemovePattern, RemoveShift, RemoveTrend, Step

LENGTHS = (60, 120, 240)
RUNGS = ("roots", "halves", "residuals")
Draw = Callable[[np.random.Generator, int], np.ndarray]


@dataclass(frozen=True)
class Process:
    """How a series is drawn, its seasonal period, the steps of its plan or their kinds, and the level it is put on."""

    draw: Draw
    period: int = 12
    plan: tuple[type[Step] | Step, ...] = ()
    level: float = 200.0


def arma(rng: np.random.Generator, n: int, ar: tuple[float, ...] = (), ma: tuple[float, ...] = ()) -> np.ndarray:
    """ARMA series with unit innovations: ``1 - c B`` on the left, ``1 + c B`` on the right."""
    noise = rng.standard_normal(n + 200)
    return np.asarray(lfilter(np.r_[1.0, ma], np.r_[1.0, -np.array(ar)], noise)[200:])


def pattern(rng: np.random.Generator, n: int, period: int) -> np.ndarray:
    """A fixed pattern, three standard deviations of the noise in size."""
    return np.resize(3.0 * rng.standard_normal(period), n)


def airline(rng: np.random.Generator, n: int) -> np.ndarray:
    """Airline model of Box and Jenkins, coefficients 0.4 and 0.5, from a fixed pattern."""
    y = np.zeros(n + 13)
    y[:13] = pattern(rng, 13, 12)
    e = rng.standard_normal(n + 13)
    for t in range(13, n + 13):
        y[t] = y[t - 1] + y[t - 12] - y[t - 13] + e[t] - 0.4 * e[t - 1] - 0.5 * e[t - 12] + 0.2 * e[t - 13]
    return y[13:]


def seasonal_walk(rng: np.random.Generator, n: int) -> np.ndarray:
    """A random walk for each month."""
    return 3.0 * np.resize(rng.standard_normal(12), n) + rng.standard_normal((-(-n // 12), 12)).cumsum(0).ravel()[:n]


def line(n: int) -> np.ndarray:
    """A line that rises 12 over the series."""
    return 12.0 * np.arange(n) / n


def late(n: int) -> np.ndarray:
    """Zero, then one from the middle on."""
    return (np.arange(n) >= n // 2) * 1.0


RIGHT: dict[str, Process] = {
    "white noise": Process(lambda rng, n: rng.standard_normal(n)),
    "AR 0.5": Process(lambda rng, n: arma(rng, n, (0.5,)), 1),
    "AR 0.8": Process(lambda rng, n: arma(rng, n, (0.8,)), 1),
    "cycle of 9": Process(lambda rng, n: arma(rng, n, (1.23, -0.64))),
    "MA -0.5": Process(lambda rng, n: arma(rng, n, (), (-0.5,)), 4),
    "line, AR 0.5": Process(lambda rng, n: line(n) + arma(rng, n, (0.5,)), 12, (RemoveTrend,)),
    "shift, AR 0.3": Process(lambda rng, n: 5.0 * late(n) + arma(rng, n, (0.3,)), 1, (RemoveShift,)),
    "random walk": Process(lambda rng, n: rng.standard_normal(n).cumsum(), 12, (Difference(1),)),
    "ARIMA(1,1,0) 0.5": Process(lambda rng, n: arma(rng, n, (0.5,)).cumsum(), 1, (Difference(1),)),
    "ARIMA(0,1,1) -0.4": Process(lambda rng, n: arma(rng, n, (), (-0.4,)).cumsum(), 4, (Difference(1),)),
    "pattern, noise": Process(lambda rng, n: pattern(rng, n, 12) + rng.standard_normal(n), 12, (RemovePattern,)),
    "pattern, AR 0.5": Process(lambda rng, n: pattern(rng, n, 4) + arma(rng, n, (0.5,)), 4, (RemovePattern,)),
    "pattern, walk": Process(
        lambda rng, n: pattern(rng, n, 12) + rng.standard_normal(n).cumsum(), 12, (Difference(1), RemovePattern)
    ),
    "airline": Process(airline, 12, (Difference(12), Difference(1))),
    "airline, log": Process(
        lambda rng, n: np.exp(6.0 + 0.05 * airline(rng, n)), 12, (Log, Difference(12), Difference(1)), 0.0
    ),
    "seasonal walk": Process(seasonal_walk, 12, (Difference(12),)),
}


def grown(rng: np.random.Generator, n: int) -> np.ndarray:
    """AR(0.3) whose variance is four times as large in the second half."""
    return arma(rng, n, (0.3,)) * (1.0 + late(n))


def arch(rng: np.random.Generator, n: int) -> np.ndarray:
    """Strong ARCH(1): variance ``0.3 + 0.7 y[t - 1]**2``."""
    y = np.zeros(n + 100)
    noise = rng.standard_normal(n + 100)
    for t in range(1, n + 100):
        y[t] = noise[t] * np.sqrt(0.3 + 0.7 * y[t - 1] ** 2)
    return y[100:]


def rich(rng: np.random.Generator, n: int) -> np.ndarray:
    """Autoregression with an echo after 7 steps, which small ARMA models do not catch."""
    return arma(rng, n, (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.6))


@dataclass(frozen=True)
class Fault:
    """A series with a fault, the rung that should say so, words of its headline, and steps put in by hand."""

    rung: str
    words: str
    draw: Draw
    period: int = 1
    put_in: tuple[Step, ...] = ()
    level: float = 200.0


FAULTS: dict[str, Fault] = {
    "noise, differenced before": Fault("roots", "already", lambda rng, n: np.diff(rng.standard_normal(n + 1))),
    "AR 0.5, differenced before": Fault("roots", "already", lambda rng, n: np.diff(arma(rng, n + 1, (0.5,)))),
    "noise, one difference put in": Fault(
        "roots", "too many", lambda rng, n: rng.standard_normal(n), 1, (Difference(1),)
    ),
    "AR 0.5, one difference put in": Fault(
        "roots", "too many", lambda rng, n: arma(rng, n, (0.5,)), 1, (Difference(1),)
    ),
    "walk, one difference put in": Fault(
        "roots", "too many", lambda rng, n: rng.standard_normal(n).cumsum(), 1, (Difference(1),)
    ),
    "pattern, differenced at 12": Fault(
        "roots", "pattern", lambda rng, n: pattern(rng, n, 12) + rng.standard_normal(n), 12, (Difference(12),)
    ),
    "variance 4 times as large": Fault("halves", "variance", grown),
    "ARCH 0.7": Fault("residuals", "spread", arch),
    "echo after 7 steps": Fault("residuals", "correlation", rich),
}


def series(values: np.ndarray) -> pd.Series:
    """Months from 1990 on."""
    return pd.Series(values, index=pd.period_range("1990-01", periods=len(values), freq="M"), name="y")


def is_plan(steps: tuple[Step, ...], wanted: tuple[type[Step] | Step, ...]) -> bool:
    """Whether the steps are those wanted, one by one, by value or by kind."""
    same = (one == two if not isinstance(two, type) else isinstance(one, two) for one, two in zip(steps, wanted))  # noqa: B905
    return len(steps) == len(wanted) and all(same)


def reports(one: Process | Fault, n: int, count: int, seed: list[int]) -> Iterator[pf.SeriesReport]:
    """Reports of series drawn with one generator."""
    rng = np.random.default_rng([*seed, n])
    for _ in range(count):
        yield pf.check(series(one.draw(rng, n) + one.level), season=one.period, cache=False, progress=False)["y"]


def alarms(process: Process, n: int, count: int, seed: list[int]) -> tuple[int, dict[str, list[str]]]:
    """Series whose plan is right, and the headlines of their notes by rung."""
    right, notes = 0, dict[str, list[str]]((rung, []) for rung in RUNGS)
    for report in reports(process, n, count, seed):
        if not is_plan(report.plan.steps, process.plan):
            continue
        right += 1
        for rung in RUNGS:
            if report.findings[rung].verdict == "inconclusive":
                notes[rung].append(report.findings[rung].headline)
    return right, notes


def hits(fault: Fault, n: int, count: int, seed: list[int]) -> float:
    """Share of series with the fault in which the note is there."""
    found = 0
    for report in reports(fault, n, count, seed):
        plan = report.plan.steps
        for step in fault.put_in:
            if step not in plan or step == Difference(1):
                report = report.put_in(step)
        finding = report.findings[fault.rung]
        found += finding.verdict == "inconclusive" and fault.words in finding.headline
    return found / count


def main() -> None:
    """Print both tables."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 40
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else 1
    print(f"{count} series a cell, seed {seed}\n\nnotes where the plan is right, shares in per cent")
    print(f"{'process':20}{'n':>5}{'right':>7}" + "".join(f"{rung:>11}" for rung in RUNGS))
    total, sums, said = 0, dict.fromkeys(RUNGS, 0), dict[str, int]()
    for place, (name, process) in enumerate(RIGHT.items()):
        for n in LENGTHS:
            right, notes = alarms(process, n, count, [seed, place])
            total += right
            for rung in RUNGS:
                sums[rung] += len(notes[rung])
                for one in notes[rung]:
                    said[f"{rung}: {one}"] = said.get(f"{rung}: {one}", 0) + 1
            shares = "".join(f"{100.0 * len(notes[rung]) / max(right, 1):11.1f}" for rung in RUNGS)
            print(f"{name:20}{n:5d}{right:7d}{shares}", flush=True)
    print(f"{'all':20}{'':5}{total:7d}" + "".join(f"{100.0 * sums[rung] / max(total, 1):11.1f}" for rung in RUNGS))
    for headline, times in sorted(said.items(), key=lambda item: -item[1])[:12]:
        print(f"  {times:4d}  {headline}")
    print("\nnotes where something is wrong, shares in per cent")
    print(f"{'fault':32}{'rung':12}" + "".join(f"n = {n:<6d}" for n in LENGTHS))
    for place, (name, fault) in enumerate(FAULTS.items()):
        shares = "".join(f"{100.0 * hits(fault, n, count, [seed, 100 + place]):<10.0f}" for n in LENGTHS)
        print(f"{name:32}{fault.rung:12}{shares}", flush=True)


if __name__ == "__main__":
    main()
