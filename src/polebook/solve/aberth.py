"""All roots of several functions at once, each set repelling its own members (Ehrlich 1967, Aberth 1973).

Published for tridiagonal eigenproblems on the logarithmic derivative of a determinant: D. A. Bini, L. Gemignani and
F. Tisseur, The Ehrlich-Aberth method for the nonsymmetric tridiagonal eigenvalue problem, SIAM Journal on Matrix
Analysis and Applications 27, 2005 (from memory).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Complex = NDArray[np.complex128]
    Ints = NDArray[np.int64]

STEPS = 120
TIGHT = 1e-11  # a step below this share of a root ends it: the next one would be far below rounding
STALLED = 1e-8  # below this share a step that no longer shrinks ends it: rounding is reached


def aberth(ratio: Callable[[Complex, Complex, Ints], Complex], start: Complex, group: Ints,
           sizes: tuple[float, float]) -> tuple[Complex, Complex]:
    """(roots, last steps) from starting values; `group` numbers the function that each root belongs to.

    ratio(p, q, which) gives f(q)/f(p), of the functions of the roots numbered `which`. No root may be 0, or
    smaller or larger than `sizes`.
    """
    roots = start.copy()
    steps: Complex = np.full(roots.shape, np.inf, dtype=complex)
    active = np.arange(roots.size)
    for _ in range(STEPS):
        p = roots[active]
        gaps = _gaps(roots, group, active)
        delta = 1e-5 * np.minimum(np.abs(p), np.abs(gaps).min(axis=1, initial=np.inf))
        delta = np.where(delta > 0, delta, 1e-9 * np.abs(p))
        newton = delta / (ratio(p, p + delta, active) - 1.0)
        newton = np.where(np.isfinite(newton), newton, 0.0)
        push = np.where(np.isinf(gaps.real), 0.0, 1.0 / np.where(gaps == 0, 1.0, gaps)).sum(axis=1)
        step = newton / (1.0 - newton * push)
        step = np.where(np.isfinite(step), step, newton)
        reached = np.abs(p - step)
        kept = np.clip(reached, *sizes)
        step = p - (p - step) * np.where(reached > 0, kept / np.where(reached > 0, reached, 1.0), 1.0)
        before = steps[active]
        roots[active] = p - step
        steps[active] = step
        share = np.abs(step) / np.abs(p)
        done = (share < TIGHT) | ((share < STALLED) & (np.abs(step) >= 0.5 * np.abs(before)))
        active = active[~done]
        if not active.size:
            break
    return roots, steps


def _gaps(roots: Complex, group: Ints, active: Ints) -> Complex:
    """p_j - p_k to the others of its group, infinite for the rest, (active, all)."""
    gaps = roots[active][:, None] - roots[None, :]
    other = (group[active][:, None] != group[None, :]) | (active[:, None] == np.arange(roots.size)[None, :])
    return np.where(other, np.inf + 0j, gaps)
