"""Inverse roots of an ARMA model with standard errors, and the AR and MA roots that may cancel."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from preflight_magic.kernels.arma_parameters import Array, Order, split
from preflight_magic.model import Root

Complex = NDArray[np.complex128]

_ON_CIRCLE = 1.0 - 1e-7
"""Modulus from which an AR part counts as not stationary: a shock would last ten million steps."""
_CLOSE = 2.0
"""Standard errors within which an AR and an MA root may be the same. Common practice."""
_TOUCHING = 0.02
"""Distance within which they count as the same where the information matrix is singular. Common practice."""


@dataclass(frozen=True)
class _Part:
    """Inverse roots of one polynomial in its own lag, with their derivatives by its coefficients."""

    kind: Literal["AR", "MA"]
    seasonal: bool
    roots: Complex
    slopes: Complex
    place: slice


@dataclass(frozen=True)
class CommonFactor:
    """An AR and an MA inverse root that may cancel.

    `distance` is that of the two roots in the complex plane of their own lag, with its standard error by the delta
    method (NaN where the information matrix is singular).
    """

    ar: Root
    ma: Root
    distance: float
    standard_error: float

    def __str__(self) -> str:
        return f"AR {self.ar.modulus:.2f} and MA {self.ma.modulus:.2f}, {self.distance:.2f} apart"


# --------------------------------------------------------------------------------------------------- roots
def inverse_roots(order: Order, values: Array, covariance: Array | None = None) -> tuple[Root, ...]:
    """Inverse roots of the four polynomials of a seasonal ARMA model.

    Parameters
    ----------
    order : Order
    values : ndarray, shape (order.size,)
        Coefficients: ``1 - c B`` for AR parts, ``1 + c B`` for MA parts.
    covariance : ndarray, shape (order.size, order.size), optional
        Of the coefficients; without it standard errors are NaN.

    Returns
    -------
    tuple of Root
        AR before MA, plain before seasonal, the largest first. A pair of conjugate roots is given once. A root L of a
        seasonal polynomial, in the seasonal lag, stands for the s roots of modulus ``|L|**(1/s)`` in the plain lag: it
        is given once, with that modulus, which is per step as every other, and with the longest cycle that is not
        infinite: s for a positive L, 2 s for a negative one.

    Notes
    -----
    Standard errors by the delta method: a root L of ``L**p - c[1] L**(p-1) - ...`` moves by ``L**(p-i) / P'(L)`` with
    c[i].
    """
    found = []
    for part in _parts(order, values):
        for root, slope in zip(part.roots, part.slopes, strict=True):
            if root.imag >= 0.0:
                block = None if covariance is None else covariance[part.place, part.place]
                found.append(_root(part, complex(root), slope, block, order.period))
    return tuple(found)


def _parts(order: Order, values: Array) -> list[_Part]:
    ar, ma, sar, sma = split(order, np.asarray(values, dtype=float))
    parts, place = [], 0
    table: tuple[tuple[Literal["AR", "MA"], bool, Array, int], ...]
    table = (("AR", False, ar, 1), ("MA", False, ma, -1), ("AR", True, sar, 1), ("MA", True, sma, -1))
    for kind, seasonal, block, sign in table:
        if len(block):
            roots, slopes = _polynomial_roots(sign * block)
            parts.append(_Part(kind, seasonal, roots, sign * slopes, slice(place, place + len(block))))
        place += len(block)
    return sorted(parts, key=lambda part: (part.kind, part.seasonal))


def _polynomial_roots(block: Array) -> tuple[Complex, Complex]:
    """Roots L of ``L**p - c[1] L**(p-1) - ... - c[p]``, largest first, and their derivatives by c, shape (p, p)."""
    p = len(block)
    polynomial = np.concatenate([[1.0], -block])
    roots = np.roots(polynomial).astype(np.complex128)
    roots = np.concatenate([roots, np.zeros(p - len(roots))])  # numpy drops zeros at the end
    # a double root comes out as a pair that is apart by the square root of the rounding error
    roots = np.where(np.abs(roots.imag) < 1e-7 * np.abs(roots), roots.real + 0j, roots)
    roots = roots[np.argsort(-np.abs(roots), kind="stable")]
    steepness = np.polyval(np.polyder(polynomial), roots)
    powers = roots[:, None] ** np.arange(p - 1, -1, -1)
    with np.errstate(divide="ignore", invalid="ignore"):
        slopes = powers / steepness[:, None]
    return roots, np.where(np.isfinite(slopes), slopes, np.nan)


def _root(part: _Part, root: complex, slope: Complex, block: Array | None, period: int) -> Root:
    modulus = abs(root)
    error = float("nan")
    if block is not None and modulus > 0.0:
        error = _deviation((np.conj(root) * slope).real / modulus, block)
    angle = abs(float(np.angle(root))) if modulus > 0.0 else 0.0
    if not part.seasonal:
        return Root(part.kind, modulus, 2.0 * np.pi / angle if angle > 0.0 else float("inf"), error)
    per_step = modulus ** (1.0 / period)
    error = error * per_step / (period * modulus) if modulus > 0.0 else float("nan")
    return Root(part.kind, per_step, period * (2.0 * np.pi / angle if angle > 0.0 else 1.0), error, True)


def _deviation(gradient: Array, covariance: Array) -> float:
    variance = float(gradient @ covariance @ gradient)
    return float(np.sqrt(variance)) if variance >= 0.0 else float("nan")


def is_stationary(order: Order, values: Array) -> bool:
    """Whether all AR inverse roots, seasonal ones per step, lie inside the circle."""
    return all(root.modulus < _ON_CIRCLE for root in inverse_roots(order, values) if root.part == "AR")


# ------------------------------------------------------------------------------------------ common factors
def common_factors(order: Order, values: Array, covariance: Array | None = None) -> tuple[CommonFactor, ...]:
    """AR and MA inverse roots that the data do not tell apart: they may cancel, and both orders be one less.

    Parameters
    ----------
    order : Order
    values : ndarray, shape (order.size,)
    covariance : ndarray, shape (order.size, order.size), optional
        Without it, or where it is NaN, roots within 0.02 of each other are meant.

    Returns
    -------
    tuple of CommonFactor
        The nearest first, plain with plain and seasonal with seasonal; every root in one pair at most.
    """
    parts = _parts(order, values)
    pairs = []
    for left in (part for part in parts if part.kind == "AR"):
        for right in (part for part in parts if part.kind == "MA" and part.seasonal == left.seasonal):
            for i, first in enumerate(left.roots):
                for j, second in enumerate(right.roots):
                    if first.imag >= 0.0 and second.imag >= 0.0:
                        pairs.append(
                            (_pair(order, covariance, left, i, right, j), (left.seasonal, i), (left.seasonal, j))
                        )
    chosen: list[CommonFactor] = []
    used: set[tuple[str, tuple[bool, int]]] = set()
    for factor, ar, ma in sorted(pairs, key=lambda pair: pair[0].distance):
        error = factor.standard_error
        near = factor.distance <= (_TOUCHING if np.isnan(error) else _CLOSE * error)
        if near and ("AR", ar) not in used and ("MA", ma) not in used:
            chosen.append(factor)
            used |= {("AR", ar), ("MA", ma)}
    return tuple(chosen)


def _pair(order: Order, covariance: Array | None, left: _Part, i: int, right: _Part, j: int) -> CommonFactor:
    gap = complex(left.roots[i] - right.roots[j])
    blocks = (
        (None, None)
        if covariance is None
        else (covariance[left.place, left.place], covariance[right.place, right.place])
    )
    error = float("nan")
    if covariance is not None:
        gradient = np.zeros(order.size)
        direction = np.conj(gap) / abs(gap) if gap else 1.0
        gradient[left.place] = (direction * left.slopes[i]).real
        gradient[right.place] = -(direction * right.slopes[j]).real
        error = _deviation(gradient, covariance)
    return CommonFactor(
        _root(left, complex(left.roots[i]), left.slopes[i], blocks[0], order.period),
        _root(right, complex(right.roots[j]), right.slopes[j], blocks[1], order.period),
        abs(gap),
        error,
    )
