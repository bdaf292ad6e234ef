"""Poles and zeros of a solved chain to 50 digits, each with the stages that make it: LEDGER, "poles, zeros".

A pole is a zero of det(G + sC) of the full network; a zero is one of a stage's own forward cofactor: its elements
alone, without the row of n_{k-1} and the column of n_k. How much a stage has of a pole is w = Re(-Σ ∂ln p/∂ln X) over
its C, L and storages, from the null vectors of G + pC on both sides. A pole at 0 has none: what it is given here is
that of a pole on its way there.
"""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from tests.independent.blocks import blocks
from tests.independent.elimination import eliminate, left, right
from tests.independent.linear import mp
from tests.independent.network import Element, System
from tests.independent.polynomial import Polynomial

LONG = 1500  # digits in which sums of 50-digit values from 1e-30 to 1e30 come out exact
AWAY = mp.mpf(10) ** -40  # how far from a pole its null vectors are taken, relative


@dataclass(frozen=True)
class Mode:
    """A pole or zero s (rad/s), and how much of it each line has (the shares of a pole sum to 1)."""

    s: Any
    shares: Mapping[int, Any]

    def owner(self) -> int:
        return max(self.shares, key=lambda line: (mp.re(self.shares[line]), -line))

    def clear(self, margin: float = 1e-6) -> bool:
        """Is there one line with more of it than any other?"""
        first = sorted((mp.re(w) for w in self.shares.values()), reverse=True)
        return len(first) < 2 or bool(first[0] - first[1] > margin)

    def row(self, names: list[str]) -> dict[str, Any]:
        """As in the ledger's JSON; q of a complex pair off the axis alone."""
        re, im = mp.re(self.s), mp.im(self.s)
        q = abs(self.s) / (2 * abs(re)) if re != 0 and im != 0 else None
        return {"re": re, "im": im, "hz": abs(self.s) / (2 * mp.pi), "q": q, "stage": names[self.owner()]}


def exact_system(elements: Iterable[Element]) -> System:
    with mp.workdps(LONG):
        return System(elements)


def pieces(system: System, rows: list[Hashable], columns: list[Hashable]) -> list[Polynomial]:
    """The determinant of rows and columns as a product; [] too where it is zero or has no rows."""
    entries = {k for table in (system.G, system.C) for k, v in table.items() if v != 0}
    found = blocks(entries, rows, columns)
    out = [Polynomial(system.G, system.C, r, c) for r, c in found or []]
    return [] if any(p.degree < 0 for p in out) else out


def poles(elements: list[Element]) -> list[Mode]:
    """All finite ones by rising size, those at 0 first."""
    system = exact_system(elements)
    out = []
    for piece in pieces(system, system.unknowns, system.unknowns):
        for s in [mp.mpf(0)] * piece.order + piece.roots():
            out.append(Mode(s, shares(piece, elements, system, s)))
    return _by_size(out)


def zeros(elements: list[Element], nodes: list[str], load: str) -> list[Mode]:
    """Those of every line, by rising size. nodes: n0 ... nN."""
    ends = [*nodes, load]
    out = []
    for line in range(len(ends)):
        own = [e for e in elements if e.line == line]
        if line == 0:
            before, after = "emf", ends[0]
        else:
            before, after = ends[line - 1], ends[line]
        system = exact_system(own)
        if line == 0 and "emf" not in system.unknowns:
            continue  # a current source drives n0 itself
        keys = set(system.unknowns) - {("branch", 0)} if line == 0 else set(system.unknowns)
        rows = sorted((keys | {before, after}) - {before}, key=str)
        columns = sorted((keys | {before, after}) - {after}, key=str)
        for piece in pieces(system, rows, columns):
            out += [Mode(s, {line: mp.mpf(1)}) for s in [mp.mpf(0)] * piece.order + piece.roots()]
    return _by_size(out)


def _by_size(modes: list[Mode]) -> list[Mode]:
    return sorted(modes, key=lambda m: (abs(m.s), mp.im(m.s)))


def shares(piece: Polynomial, elements: list[Element], system: System, s: Any) -> dict[int, Any]:
    """w of every line with a C, L or storage."""
    with mp.workdps(110):
        at = s * (1 + AWAY) if s != 0 else AWAY
        table = eliminate(piece.plan, piece.entries(at))
        some = {k: mp.mpf(3 + 2 * i % 7) for i, k in enumerate(sorted({*piece.rows, *piece.columns}, key=str))}
        x = right(piece.plan, table, {r: some[r] for r in piece.rows})
        y = left(piece.plan, table, {c: some[c] for c in piece.columns})
        parts = {e.key: mp.mpc(0) for e in elements if e.reactive}
        zero = mp.mpf(0)
        for i, e in enumerate(elements):
            if e.kind == "L":
                branch = ("branch", i)
                parts[e.key] -= e.value * y.get(branch, zero) * x.get(branch, zero)
            elif e.reactive:
                across = [v.get(e.a, zero) - v.get(e.b, zero) for v in (y, x)]
                parts[e.key] += e.value * across[0] * across[1]
        total = sum(parts.values(), mp.mpc(0))
        whole = sum(v * y[r] * x[c] for (r, c), v in piece.C.items())
        if abs(total - whole) > abs(whole) * mp.mpf(10) ** -20:
            raise ArithmeticError("the shares of a pole do not sum to 1")
        out: dict[int, Any] = {}
        for (line, _), part in parts.items():
            out[line] = out.get(line, mp.mpf(0)) + mp.re(part / total)
        return out
