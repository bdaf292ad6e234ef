"""How the response of the upper network begins to leave its midband: the first coefficients of ln H(s) in powers of s.

With ln(H(s)/gain) = c_1·s + c_2·s² + c_3·s³ + ... is ln|H| = -c_2·(2·pi·f)² + ... and the group delay
-c_1 + 3·c_3·(2·pi·f)² - ... So the size is maximally flat where c_2 = 0 (the second derivative of |H|² at the middle
of the band is 0), the delay where c_3 = 0. The coefficients are Cauchy's integrals over a circle on which H is solved:
exact but for rounding, since all poles and zeros lie far outside it.
"""

from __future__ import annotations

from math import pi
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.ledger import Ledger
from polebook.solve.fold import fold

if TYPE_CHECKING:
    from polebook.solve.aberth import Complex

POINTS = 32
INSIDE = 0.2  # radius of the circle over the sum of all time constants' rate
CLEAN = 1e-9  # share of the first coefficient that the last ones may have: else a pole or a zero lies too near
SMALLER, TRIES = 0.25, 4


def flatness(of: Ledger, more_s: float = 0.0) -> tuple[float, float] | None:
    """(c_2, c_3) of a chain, each times the power of the radius; None where nothing is stored or none comes out clean.

    more_s  a further time constant (s) that the circle has to keep clear of
    """
    parts = of.solution.circuit.layout.parts
    taus = [abs(tau) for index, tau in of.solution.constants.by_part.items() if tau and parts[index].role == "high"]
    total = sum(taus) + more_s
    radius = INSIDE / total if total else 0.0
    for _ in range(TRIES if total else 0):
        found = _coefficients(of, radius)
        if np.isfinite(found).all() and np.abs(found[-4:]).max() < CLEAN * np.abs(found[1]):
            return float(found[2].real), float(found[3].real)
        radius *= SMALLER
    return None


def _coefficients(of: Ledger, radius: float) -> Complex:
    """c_k·radius^k, (POINTS,); the last ones stand for negative powers, which a series of powers has none of."""
    s = radius * np.exp(2j * pi * np.arange(POINTS) / POINTS)
    logs = np.zeros(POINTS, dtype=complex)
    with np.errstate(all="ignore"):
        for gain, middle in zip(fold(of.solution.circuit.network, s, "upper").gains, of.solution.gains, strict=True):
            logs = logs + np.log(np.asarray(gain, dtype=complex) / middle)
        found: Complex = np.fft.fft(logs) / POINTS
    return found
