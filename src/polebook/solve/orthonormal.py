"""A function with known poles as a sum of orthonormal ones: coefficients that stay small however the poles lie.

Residues of poles that lie near together cancel each other; taken apart into

    phi_j(s) = sqrt(-2·Re p_j)/(s - p_j) · prod over i < j of (s + conj p_i)/(s - p_i)

a function has coefficients no larger than itself, since these are orthonormal on the imaginary axis (S. Takenaka
1925, F. Malmquist 1926; from memory). They are so too as a sum over the n points of the axis at which the product of
all n factors (s + conj p)/(s - p) has one value: the coefficients are found from n values of the function, each with
weight 1 over the slope of the product's angle (rational quadrature; A. Bultheel, P. González-Vera, E. Hendriksen and
O. Njåstad, Orthogonal Rational Functions, 1999; from memory). No equation is solved, and like poles are welcome.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import pi
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.solve.aberth import Complex

    Floats = NDArray[np.float64]

HALVINGS = 60


@dataclass(slots=True)
class Expansion:
    """coefficients of phi by pole.

    miss  the greatest error of s times the sum at as many further points, as a share of the greatest of s times the
          function, or as it stands where that is below 1
    """

    poles: Complex
    coefficients: Complex
    miss: float


def expand(poles: Complex, function: Callable[[Complex], Complex]) -> Expansion:
    """Takes a function of s (rad/s) apart that vanishes at infinity and is real on the real axis.

    poles    all of its own (more may stand among them), in conjugate pairs, every real part negative
    """
    omega = _points(poles)
    up = np.where(np.arange(poles.size) % 2 == 0, 1.0, -1.0)  # the points lie on either side of 0, in turn
    axis: Complex = (1j * omega).astype(np.complex128)
    values, s = function(axis), up * axis
    there = np.where(up > 0, values, np.conj(values))
    phi, weight = basis(poles, s), 1.0 / _slope(poles, up * omega)
    found = phi.conj().T @ (weight * there)
    found = found + phi.conj().T @ (weight * (there - phi @ found))
    miss = np.abs(basis(poles, -s) @ found - np.conj(there)) * omega
    return Expansion(poles, found, float(miss.max() / max(1.0, (np.abs(values) * omega).max())))


def basis(poles: Complex, s: Complex) -> Complex:
    """phi_j(s), (points, poles)."""
    away = s[:, None] - poles
    product = np.cumprod((s[:, None] + poles.conj()) / away, axis=1)
    before = np.concatenate([np.ones((s.size, 1)), product[:, :-1]], axis=1)
    result: Complex = widths(poles) * before / away
    return result


def widths(poles: Complex) -> Floats:
    """sqrt(-2·Re p)."""
    result: Floats = np.sqrt(-2.0 * poles.real)
    return result


def matrix(poles: Complex) -> Complex:
    """A, lower triangular, with phi(s) = (s - A)^-1·widths: phi(t) = exp(t·A)·widths, and never grows."""
    b = widths(poles)
    result: Complex = np.diag(poles) - np.tril(np.outer(b, b), -1)
    return result


def residues(of: Expansion) -> tuple[Complex, float]:
    """(residue at each pole, sum of the sizes that they are added up from); not finite where poles are alike."""
    p, one = of.poles, np.eye(of.poles.size) > 0
    apart = np.where(one, 1.0, p[:, None] - p[None, :])
    product = np.cumprod((p[:, None] + p.conj()) / apart, axis=1)
    before = np.concatenate([np.ones((p.size, 1)), product[:, :-1]], axis=1)
    terms = np.triu(of.coefficients * widths(p) * before / apart)
    return terms.sum(axis=1), float(np.abs(terms).sum())


def _points(poles: Complex) -> Floats:
    """Where the angle of the product is an odd multiple of pi/2, rad/s, rising."""
    wanted = pi / 2 + pi * np.arange(poles.size)
    sizes = np.abs(poles)
    low = np.full(poles.size, np.log(sizes.min(initial=np.inf)) - 20.0)
    high = np.full(poles.size, np.log(sizes.max(initial=0.0) * poles.size) + 10.0)
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        short = _angle(poles, np.exp(middle)) < wanted
        low, high = np.where(short, middle, low), np.where(short, high, middle)
    result: Floats = np.exp(0.5 * (low + high))
    return result


def _angle(poles: Complex, omega: Floats) -> Floats:
    result: Floats = 2.0 * np.arctan((omega[:, None] - poles.imag) / -poles.real).sum(axis=1)
    return result


def _slope(poles: Complex, omega: Floats) -> Floats:
    width = -poles.real
    result: Floats = (2.0 * width / (width * width + (omega[:, None] - poles.imag) ** 2)).sum(axis=1)
    return result
