"""Integrals over frequency by panels in ln f, halved where the rule does not agree with the one inside it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

if TYPE_CHECKING:  # numpy.typing costs 5 ms at start-up
    from numpy.typing import NDArray

Array: TypeAlias = "NDArray[np.float64]"

# nodes and weights of the pair of rules with 7 and 15 points, positive half (A. S. Kronrod, Nodes and Weights of
# Quadrature Formulas, 1965; their degrees are tried in tests/laws/test_quadrature.py)
_NODES = (0.9914553711208126, 0.9491079123427585, 0.8648644233597691, 0.7415311855993945, 0.5860872354676911,
          0.4058451513773972, 0.2077849550078985, 0.0)
_FINE = (0.022935322010529224, 0.06309209262997856, 0.10479001032225019, 0.14065325971552592, 0.1690047266392679,
         0.19035057806478542, 0.20443294007529889, 0.20948214108472782)
_COARSE = (0.0, 0.1294849661688697, 0.0, 0.27970539148927664, 0.0, 0.3818300505051189, 0.0, 0.4179591836734694)
NODES: Array = np.concatenate([-np.array(_NODES), np.array(_NODES[-2::-1])])
FINE: Array = np.concatenate([_FINE, _FINE[-2::-1]])
COARSE: Array = np.concatenate([_COARSE, _COARSE[-2::-1]])

NEAR = 1e-6  # share of the total by which the two rules of a panel may differ; the finer one is then off by far less
ROUNDS = 60
MOST = 4000  # panels


@dataclass(frozen=True, slots=True)
class Integral:
    """total (m,); error (m,) by what the coarser rule is off, which is far more than the finer one is; its panels."""

    total: Array
    error: Array
    panels: Panels

    def settled(self, place: int) -> bool:
        """Whether the panels could be halved far enough for one of the densities."""
        return bool(np.isfinite(self.total[place]) and self.error[place] <= 1e-3 * abs(self.total[place]))


@dataclass(slots=True)
class Panels:
    """left and right (p,) in ln Hz; fine and off (m, p): each panel's integral, and how far the coarser rule is off."""

    left: Array
    right: Array
    fine: Array
    off: Array


def nodes(left: Array, right: Array) -> Array:
    """(p·15,) frequencies in Hz at which panels from left to right (p,), ln Hz, are looked at."""
    return np.exp(0.5 * ((left + right)[:, None] + (right - left)[:, None] * NODES)).ravel()


def panels(left: Array, right: Array, hz: Array, density: Array) -> Panels:
    """The panels from the density (m, p·15) at their nodes."""
    each = (density * hz).reshape(density.shape[0], left.size, NODES.size) * (0.5 * (right - left))[:, None]
    fine = each @ FINE
    return Panels(left, right, fine, np.abs(fine - each @ COARSE))


def refined(start: Panels, density: Callable[[Array], Array]) -> Integral:
    """The integral of a density (m, f) over Hz; panels are halved where the two rules differ."""
    now = start
    with np.errstate(all="ignore"):
        for _ in range(ROUNDS):
            coarse = (now.off > NEAR * np.abs(now.fine.sum(axis=1))[:, None]).any(axis=0)
            coarse &= now.right - now.left > 1e-13 * np.maximum(1.0, np.abs(now.right))
            if not coarse.any() or now.left.size + coarse.sum() > MOST:
                break
            middle = 0.5 * (now.left[coarse] + now.right[coarse])
            left = np.concatenate([now.left[coarse], middle])
            right = np.concatenate([middle, now.right[coarse]])
            hz = nodes(left, right)
            more = panels(left, right, hz, density(hz))
            now = Panels(*(np.concatenate([a[..., ~coarse], b], axis=-1) for a, b in (
                (now.left, more.left), (now.right, more.right), (now.fine, more.fine), (now.off, more.off))))
        return Integral(now.fine.sum(axis=1), now.off.sum(axis=1), now)
