"""The entries of the inverse that lie where the network has elements: every driving-point resistance at once.

Z_ij is the voltage at i for 1 A into j. The recursion runs back through the elimination (K. Takahashi,
J. Fagan and M. Chin, 1973, from memory; here with the series branches' steps): with V_k = sum t_j·V_j and a
current into k acting as s_i on its neighbours,

    Z_kj = sum_m t_m·Z_mj,   Z_jk = sum_i Z_ji·s_i,   Z_kk = own + sum_m t_m·Z_mk.
"""

from __future__ import annotations

from dataclasses import dataclass

from polebook.solve.fold import Folded, Taken
from polebook.stages.stamper import GROUND, Value

OPEN = 1e-14  # what is left of a loop's admittance below this share of a difference is rounding


@dataclass(slots=True)
class Inverse:
    """Z by (i, j), where both are ends of one element; `loops` the resistance around each series branch.

    A loop is None where it is open.
    """

    z: dict[tuple[int, int], Value]
    loops: dict[int, Value | None]
    driven: list[bool]

    def at(self, i: int, j: int) -> Value:
        """Resistance between the ends of an element, ohms (either end may be ground or driven)."""
        total: Value = 0.0
        for node, sign in ((i, 1.0), (j, -1.0)):
            if node != GROUND and not self.driven[node]:
                total = total + sign * (self._z(i, node) - self._z(j, node))
        return total

    def point(self, node: int) -> Value:
        """Driving-point resistance of a node, ohms; 0 where it is driven."""
        return 0.0 if self.driven[node] else self.z[node, node]

    def own(self, node: int) -> Value:
        """Z of a node to itself, whatever its row is (a storage's: its closed-loop share)."""
        return self.z[node, node]

    def _z(self, i: int, j: int) -> Value:
        return 0.0 if i == GROUND else self.z[i, j]


def inverse(folded: Folded) -> Inverse:
    """Selected inverse of a folded (usually midband) network; time and room grow linearly with it."""
    layout = folded.net.layout
    z: dict[tuple[int, int], Value] = {}
    loops: dict[int, Value | None] = {}
    if layout.emf != GROUND:
        z[layout.emf, layout.emf] = 1.0
    count = len(layout.names)
    for taken in folded.taken:
        for step in reversed(taken):
            _enter(z, step, count)
            if step.step.branch >= 0:
                loops[step.step.branch] = _loop(z, step, count)
    return Inverse(z, loops, layout.driven)


def _enter(z: dict[tuple[int, int], Value], taken: Taken, count: int) -> None:
    step, k = taken.step, taken.step.node
    s = [(i, -x * taken.own) for i, x in zip(step.rows, taken.a_ik, strict=True) if i < count]
    if step.takes:
        s.append((step.parent, taken.share))
    t = list(zip(step.cols, taken.t, strict=True))
    for j in step.near:
        row: Value = 0.0
        for m, t_m in t:
            row = row + t_m * z[m, j]
        column: Value = 0.0
        for i, s_i in s:
            column = column + z[j, i] * s_i
        z[k, j], z[j, k] = row, column
    own = taken.own
    for m, t_m in t:
        own = own + t_m * z[m, k]
    z[k, k] = own


def _loop(z: dict[tuple[int, int], Value], taken: Taken, count: int) -> Value | None:
    """Resistance around the loop of a series branch, its own included; None where the loop is open.

    A voltage e in the branch drives q = e·(a_kk - sum a_kj·Z_ji·a_ik/d)/d, with the entries as they stood.
    """
    step = taken.step
    b = step.parent
    rows = [(i, x) for i, x in zip(step.rows, taken.a_ik, strict=True) if i < count]
    cols = list(zip(step.cols, taken.a_kj, strict=True))
    if b != GROUND:
        cols[-1] = (b, cols[-1][1] + taken.a_kk)
        if step.takes:
            rows = [(i, x) for i, x in rows if i != b] + [(b, taken.a_kk + sum(x for i, x in rows if i == b))]
    total = taken.a_kk
    for j, a_kj in cols:
        for i, a_ik in rows:
            total = total - taken.share * a_kj * z[j, i] * a_ik
    return None if abs(total) <= OPEN * abs(taken.a_kk) else taken.across / total
