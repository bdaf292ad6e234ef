"""Elements between named nodes, the midband merging of them, and their nodal equations G + sC."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from tests.independent.linear import Rows, Singular, mp, solve

GROUND = "0"


@dataclass(frozen=True)
class Element:
    """One element.

    kind   R, C, L; "tau" (a capacitance that counts as a time constant); "gm" (value·(V(c)-V(d)) flows from a
           to b through it); "amp" (V(a) = value·(V(c)-V(d)), an ideal source to ground); "emf" (V(a) = 1 when driven)
    line   which line owns it: 0 the source, k stage k, N+1 the load
    part   its name in the ledger, without the stage: "cmu", "rc"
    role   "low" or "high" of a C, L or tau
    """

    kind: str
    line: int
    part: str
    a: str
    b: str
    value: Any
    role: str = ""
    c: str = GROUND
    d: str = GROUND

    @property
    def reactive(self) -> bool:
        return self.kind in ("C", "L", "tau")

    @property
    def key(self) -> tuple[int, str]:
        return self.line, self.part

    @property
    def short_at_midband(self) -> bool:
        return (self.role == "low") if self.kind != "L" else (self.role == "high")


def merged(elements: Iterable[Element], cut: Element | None = None) -> tuple[list[Element], Callable[[str], str]]:
    """The midband network: shorted parts make their nodes one, open parts go; `cut` is opened whatever its role."""
    parent: dict[str, str] = {}

    def find(node: str) -> str:
        while node in parent:
            node = parent[node]
        return node

    for e in elements:
        if e.reactive and e.short_at_midband and e is not cut:
            a, b = find(e.a), find(e.b)
            if a != b:
                # ground and driven nodes keep their names
                gone, stays = (a, b) if b == GROUND else (b, a)
                parent[gone] = stays
    kept = [replace(e, a=find(e.a), b=find(e.b), c=find(e.c), d=find(e.d)) for e in elements if not e.reactive]
    return kept, find


class System:
    """The nodal equations of some elements. Unknowns: node voltages, and currents of L, amp and emf."""

    def __init__(self, elements: Iterable[Element], scaled: Mapping[tuple[int, str], Any] | None = None) -> None:
        self.G: dict[tuple[Hashable, Hashable], Any] = {}
        self.C: dict[tuple[Hashable, Hashable], Any] = {}
        self.emf_rows: list[Hashable] = []
        scaled = scaled or {}
        for i, e in enumerate(elements):
            value = e.value * scaled[e.key] if e.reactive and e.key in scaled else e.value
            self._stamp(i, e, value)
        self.unknowns = sorted({k for pair in (*self.G, *self.C) for k in pair}, key=str)

    def _add(self, table: dict[tuple[Hashable, Hashable], Any], row: Hashable, column: Hashable, value: Any) -> None:
        if GROUND in (row, column):
            return
        table[row, column] = table.get((row, column), mp.mpf(0)) + value

    def _stamp(self, i: int, e: Element, value: Any) -> None:
        if e.kind in ("R", "C", "tau"):
            table, y = (self.G, mp.fdiv(1, value, dps=50)) if e.kind == "R" else (self.C, mp.mpf(value))
            if e.a == e.b:
                return
            for row, column, sign in ((e.a, e.a, 1), (e.b, e.b, 1), (e.a, e.b, -1), (e.b, e.a, -1)):
                self._add(table, row, column, sign * y)
        elif e.kind == "gm":
            for row, column, sign in ((e.a, e.c, 1), (e.a, e.d, -1), (e.b, e.c, -1), (e.b, e.d, 1)):
                self._add(self.G, row, column, sign * mp.mpf(value))
        else:
            branch = ("branch", i)
            self._add(self.G, e.a, branch, mp.mpf(1))
            self._add(self.G, branch, e.a, mp.mpf(1))
            if e.kind == "L":
                self._add(self.G, e.b, branch, mp.mpf(-1))
                self._add(self.G, branch, e.b, mp.mpf(-1))
                self._add(self.C, branch, branch, -mp.mpf(value))
            elif e.kind == "amp":
                self._add(self.G, branch, e.c, -mp.mpf(value))
                self._add(self.G, branch, e.d, mp.mpf(value))
            else:
                self.emf_rows.append(branch)

    def rows(self, s: Any) -> Rows:
        rows: Rows = {k: {} for k in self.unknowns}
        for (r, c), value in self.G.items():
            rows[r][c] = value
        for (r, c), value in self.C.items():
            if s != 0:
                rows[r][c] = rows[r].get(c, 0) + s * value
        # an entry that cancels to nothing (opposite controlled sources) is no entry
        return {r: {c: v for c, v in row.items() if v != 0} for r, row in rows.items()}

    def drive(self, injected: Mapping[str, Any], emf: bool) -> dict[Hashable, Any]:
        right = {node: mp.mpf(value) for node, value in injected.items() if node != GROUND}
        if emf:
            right |= {row: mp.mpf(1) for row in self.emf_rows}
        return right

    def voltages(self, s: Any, drives: list[dict[Hashable, Any]]) -> list[dict[Hashable, Any]]:
        """Node voltages for each drive; raises Singular where a driven node is not held."""
        known = set(self.unknowns)
        if any(k not in known for drive in drives for k in drive):
            raise Singular
        answers = solve(self.rows(s), drives)
        for answer in answers:
            answer[GROUND] = mp.mpf(0)
        return answers

    def dense(self) -> tuple[np.ndarray, np.ndarray, list[Hashable]]:
        """G, C (double precision, n×n) and the unknowns in their order."""
        place = {k: i for i, k in enumerate(self.unknowns)}
        out = []
        for table in (self.G, self.C):
            m = np.zeros((len(place), len(place)))
            for (r, c), value in table.items():
                m[place[r], place[c]] = float(value)
            out.append(m)
        return out[0], out[1], self.unknowns
