"""Per day, log, power and logit, and their inverses, as pandas source."""

from __future__ import annotations

from typing import assert_never

from preflight_magic.model import Log, Logit, PerDay, Power
from preflight_magic.plan.literals import number
from preflight_magic.plan.points import PointStep

TINY = 0.01
"""Exponents smaller than this are written with expm1 and log1p, which stay exact near zero."""


def _shifted(offset: float) -> str:
    """Template of a value plus the offset of a power."""
    if offset == 0:
        return "{x}"
    return "({x} + " + number(offset) + ")" if offset > 0 else "({x} - " + number(-offset) + ")"


def forward(step: PointStep, counted: bool) -> str:
    """Template of a point step, with ``{x}`` for the value."""
    match step:
        case PerDay(unit=unit):
            return f"{{x}} / {unit}({{x}}.index)" if counted else "{x} / {x}.index.days_in_month"
        case Log():
            return "np.log({x})"
        case Power(exponent=exponent, offset=offset):
            raised, power = _shifted(offset), number(exponent)
            if exponent == 0:
                return f"np.log({raised.strip('()')})"
            if abs(exponent) < TINY:
                return f"np.expm1({power} * np.log({raised.strip('()')})) / {power}"
            return f"({raised} ** {power} - 1) / {power}"
        case Logit(lower=lower, upper=upper):
            below = "{x}" if lower == 0 else f"({{x}} - {_signed(lower)})"
            return f"np.log({below} / ({number(upper)} - {{x}}))"
        case _:
            assert_never(step)


def _signed(value: float) -> str:
    return number(value) if value >= 0 else f"({number(value)})"


def backward(step: PointStep, counted: bool) -> list[str]:
    """Lines that undo a point step on ``x``."""
    match step:
        case PerDay(unit=unit):
            if not counted:
                return ["    x = x * x.index.days_in_month"]
            return [f"    x = x * {unit}(history.index.union(x.index)).loc[x.index]"]
        case Log():
            return _undo_log("")
        case Power(exponent=exponent, offset=offset):
            end = "" if offset == 0 else f" - {number(offset)}" if offset > 0 else f" + {number(-offset)}"
            if exponent == 0:
                return _undo_log(end)
            if abs(exponent) < TINY:
                power = number(exponent)
                return _undo_by_level(f"np.exp(np.log1p(np.maximum({power} * z, -1)) / {power}){end}")
            base = f"1 + {number(exponent)} * z" if exponent > 0 else f"1 - {number(-exponent)} * z"
            inverse = 1 / exponent
            whole = abs(inverse - round(inverse)) < 1e-12
            power = str(round(inverse)) if whole else f"(1 / {number(exponent)})"
            return _undo_by_level(f"np.maximum({base}, 0) ** {power}{end}")
        case Logit(lower=lower, upper=upper):
            share = f"{number(upper - lower)} / (1 + np.exp(-z))"
            return _undo_by_level(share if lower == 0 else f"{number(lower)} + {share}")
        case _:
            assert_never(step)


def _undo_log(end: str) -> list[str]:
    return [
        "    # Half the error variance turns the median of a log-normal value into its mean.",
        f"    x = np.exp(x if variance is None else x + variance / 2){end}",
    ]


def _undo_by_level(expression: str) -> list[str]:
    return [
        "",
        "    def level(z):",
        f"        return {expression}",
        "",
        "    x = level(x) if variance is None else mean_of(level, x, variance)",
    ]
