"""One chain, drawn once and solved: midband, time constants, band seed, response, edges, owned shares, winding."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Mapping
from dataclasses import replace
from functools import cached_property
from typing import Any

import numpy as np
from scipy.linalg import eigvals
from scipy.optimize import minimize_scalar

from tests.independent.bias import Bias, bias
from tests.independent.cards import Card
from tests.independent.draw import Drawing
from tests.independent.linear import Singular, mp
from tests.independent.network import GROUND, Element, System, merged
from tests.independent.quantity import number

TINY = mp.mpf(10) ** -22


def crossing(excess: Callable[[Any], Any], lo: Any, hi: Any) -> Any:
    """The zero between two points of opposite sign, by bracketed secant steps, to some 35 digits."""
    f_lo, f_hi = excess(lo), excess(hi)
    for _ in range(100):
        x = (lo * f_hi - hi * f_lo) / (f_hi - f_lo)
        f_x = excess(x)
        if abs(f_x) < mp.mpf(10) ** -35:
            return x
        if f_x * f_hi < 0:
            lo, f_lo = hi, f_hi
        else:
            f_lo = f_lo / 2
        hi, f_hi = x, f_x
    raise ArithmeticError("no crossing found")


class Solved:
    """One chain: drawn once, then asked figure by figure. Elements may be scaled, by line and part."""

    def __init__(self, doc: Mapping[str, Any], scaled: Mapping[tuple[int, str], Any] | None = None) -> None:
        self.doc = doc
        celsius = number(doc.get("supply", {}).get("temperature", 25))
        self.cards = {name: Card(table, celsius) for name, table in doc.get("device", {}).items()}
        self.bias = {s["name"]: Bias() for s in doc.get("stage", [])}
        self.bias |= self.quiescent()
        self.drawing = Drawing(doc, self.bias, self.cards)
        self.elements = self.drawing.elements
        if scaled:
            self.elements = [replace(e, value=e.value * scaled.get(e.key, 1)) for e in self.elements]
        self.nodes, self.load = self.drawing.nodes, self.drawing.load
        self.last = len(self.drawing.lines) - 1  # the load's line
        self.by_current = doc["source"]["kind"] == "current"
        self.full = System(self.elements)
        kept, self.find = merged(self.elements)
        self.mid_elements = kept
        self.mid = System(kept)
        self.mid_v = self.mid.voltages(mp.mpf(0), [self._drive(self.mid, self.find)])[0]
        self.gain = self.v(self.load)
        if self.gain == 0:
            raise ValueError("the midband gain is zero")

    def quiescent(self) -> dict[str, Bias]:
        """The bias of each device stage."""
        return bias(self.doc, self.cards)

    # -- midband ----------------------------------------------------------------------------------------------------

    def _drive(self, system: System, find: Any) -> dict[Hashable, Any]:
        if self.by_current:
            return system.drive({find(self.nodes[0]): 1}, emf=False)
        return system.drive({}, emf=True)

    def drive_full(self) -> dict[Hashable, Any]:
        """A unit source on the full network."""
        return self._drive(self.full, lambda node: node)

    @cached_property
    def response(self) -> dict[str, dict[Hashable, Any]]:
        """Midband voltages for 1 A into each node."""
        nodes = [k for k in self.mid.unknowns if isinstance(k, str)]
        answers = self.mid.voltages(mp.mpf(0), [{k: mp.mpf(1)} for k in nodes])
        return dict(zip(nodes, answers, strict=True))

    def v(self, node: str) -> Any:
        """Midband voltage for a unit source; None at a node that nothing holds."""
        return self.mid_v.get(self.find(node))

    def ohm(self, node: str) -> Any:
        node = self.find(node)
        return mp.mpf(0) if node == GROUND else self.response[node][node]

    def across(self, a: str, b: str) -> Any:
        """Resistance seen between two nodes of the midband network, or None where one is held by nothing."""
        a, b = self.find(a), self.find(b)
        for node in (a, b):
            if node != GROUND and node not in self.response:
                return None
        seen = mp.mpf(0)
        for node, sign in ((a, 1), (b, -1)):
            if node != GROUND:
                r = self.response[node]
                seen += sign * (r[a] - r[b])
        return seen

    def part_resistance(self, e: Element) -> Any:
        """Resistance that a reactive part sees, the others at midband; None where infinite."""
        if not e.short_at_midband:
            return self.across(e.a, e.b)
        kept, find = merged(self.elements, cut=e)
        a, b = find(e.a), find(e.b)
        if a == b:
            return mp.mpf(0)
        system = System(kept)
        try:
            x = system.voltages(mp.mpf(0), [system.drive({a: 1, b: -1}, emf=False)])[0]
        except Singular:
            return None
        return x[a] - x[b]

    def only(self, lines: Iterable[int]) -> System:
        """The midband network of these lines alone."""
        wanted = set(lines)
        return System(e for e in self.mid_elements if e.line in wanted)

    # -- time constants ---------------------------------------------------------------------------------------------

    def time_constants(self) -> dict[tuple[int, str], dict[str, Any]]:
        """tau and role of each C, L and storage; tau None where it sees 0 or infinite resistance."""
        out: dict[tuple[int, str], dict[str, Any]] = {}
        for e in self.elements:
            if not e.reactive:
                continue
            seen = self.part_resistance(e)
            tau = None
            if seen is not None and abs(seen) > TINY:
                tau = e.value / seen if e.kind == "L" else e.value * seen
            row = out.setdefault(e.key, {"kind": e.kind, "role": e.role, "value": e.value, "tau": None})
            if tau is not None:
                row["tau"] = tau if row["tau"] is None else row["tau"] + tau
        return out

    def seed(self, taus: Mapping[Any, Mapping[str, Any]]) -> tuple[Any, Any, Any]:
        """Estimates f_H and f_L of the two sums, and the band seed."""
        high = [t["tau"] for t in taus.values() if t["role"] == "high" and t["tau"] is not None]
        low = [t["tau"] for t in taus.values() if t["role"] == "low" and t["tau"] is not None]
        b1 = sum(high, mp.mpf(0))
        upper = 1 / (2 * mp.pi * b1) if b1 > 0 else None
        corner = sum((1 / (2 * mp.pi * t) for t in low), mp.mpf(0))
        lower = corner if corner > 0 else None
        if upper is not None and lower is not None:
            at = mp.sqrt(upper * lower)
        elif upper is not None:
            at = upper / 1000
        else:
            at = 1000 * lower if lower is not None else mp.mpf(1000)
        if self.clean(at):
            return upper, lower, at
        corners = [float(1 / (2 * mp.pi * abs(t))) for t in high + low]
        first, last = np.log10(min(corners)) - 1, np.log10(max(corners)) + 1
        grid = 10.0 ** (np.arange(np.ceil(first * 40 - 1e-9), np.floor(last * 40 + 1e-9) + 1) / 40)
        error = np.abs(np.abs(self.sweep(grid)) / float(abs(self.gain)) - 1)
        least = np.flatnonzero(error <= error.min() + 1e-9)[0]  # ties go to the lower frequency
        return upper, lower, mp.mpf(grid[least])

    def clean(self, f: Any) -> bool:
        """|H| at the band seed reaches |gain|/sqrt 2: there is a midband to take edges from."""
        return bool(abs(self.h(f)) >= abs(self.gain) / mp.sqrt(2))

    # -- frequency --------------------------------------------------------------------------------------------------

    def solution(self, f: Any, scaled: Mapping[tuple[int, str], Any] | None = None) -> dict[Hashable, Any]:
        """Full-network node voltages at f for a unit source, some parts scaled."""
        system = System(self.elements, scaled) if scaled else self.full
        s = mp.mpc(0, 2 * mp.pi * f)
        return system.voltages(s, [self._drive(system, lambda node: node)])[0]

    def h(self, f: Any, scaled: Mapping[tuple[int, str], Any] | None = None) -> Any:
        return self.solution(f, scaled)[self.load]

    def sweep(self, f: np.ndarray) -> np.ndarray:
        """H at many frequencies in double precision, to find brackets with."""
        G, C, unknowns = self.full.dense()
        right = np.zeros((len(unknowns), 1), complex)
        for row, value in self.drive_full().items():
            right[unknowns.index(row), 0] = float(value)
        A = G + 2j * np.pi * f[:, None, None] * C
        scale = np.abs(A).max(axis=2, keepdims=True)
        return np.linalg.solve(A / scale, right / scale)[:, unknowns.index(self.load), 0]

    def range(self, taus: Mapping[Any, Mapping[str, Any]]) -> tuple[float, float]:
        """Decades that hold every corner with room to spare (log10 Hz)."""
        corners = [float(1 / (2 * mp.pi * abs(t["tau"]))) for t in taus.values() if t["tau"] is not None]
        return (np.log10(min(corners)) - 4, np.log10(max(corners)) + 4) if corners else (0.0, 6.0)

    def edge(self, seed: Any, direction: int, reach: float) -> Any:
        """First crossing of |gain|/sqrt 2 from the seed outward; None where there is none."""
        start = float(mp.log10(seed))
        decades = abs(reach - start)
        grid = 10.0 ** (start + direction * np.linspace(0, decades, max(2, int(decades * 200))))
        level = np.abs(self.sweep(grid)) / float(abs(self.gain)) * np.sqrt(2) - 1
        below = np.flatnonzero(level < 0)
        if not len(below) or below[0] == 0:
            return None
        lo, hi = (mp.log(mp.mpf(x)) for x in (grid[below[0] - 1], grid[below[0]]))

        def excess(x: Any) -> Any:
            return 2 * mp.log(abs(self.h(mp.exp(x)) / self.gain)) + mp.log(2)

        return mp.exp(crossing(excess, lo, hi))

    def owned(self, edge: Any, keys: Iterable[tuple[int, str]]) -> dict[tuple[int, str], Any] | None:
        """-∂ln f/∂ln X at an edge, by moving each part a little and asking how far the edge goes."""
        if edge is None:
            return None
        step = mp.mpf(10) ** -18
        here = mp.log(abs(self.h(edge)))
        slope = (mp.log(abs(self.h(edge * (1 + step)))) - here) / step
        return {k: (mp.log(abs(self.h(edge, {k: 1 + step}))) - here) / step / slope for k in keys}

    def peaking_db(self, span: tuple[float, float]) -> float:
        grid = np.linspace(*span, int((span[1] - span[0]) * 100))
        gain = float(abs(self.gain))

        def level(x: float | np.ndarray) -> np.ndarray:
            return np.abs(self.sweep(10.0 ** np.atleast_1d(x))) / gain

        at = level(grid)
        best = float(at.max())
        top = int(at.argmax())
        if 0 < top < len(grid) - 1:
            found = minimize_scalar(
                lambda x: -float(level(x)[0]), bounds=(grid[top - 1], grid[top + 1]), method="bounded",
                options={"xatol": 1e-9},
            )  # fmt: skip
            best = max(best, -float(found.fun))
        return max(0.0, 20 * np.log10(best))

    def right_half_plane_poles(self, span: tuple[float, float]) -> list[Any]:
        """Poles with positive real part (rad/s).

        Eigenvalues of the pencil in double precision give starts; every one that lies near the axis or beyond it is
        refined in 50 digits as a zero of 1/(c·A(s)⁻¹·b), and kept where it proves to be a pole.
        """
        G, C, _ = self.full.dense()
        rate = 2 * np.pi * 10 ** ((span[0] + span[1]) / 2)
        starts = eigvals(-G, C * rate)
        starts = starts[np.isfinite(starts)] * rate
        size = np.abs(starts) / (2 * np.pi)
        near = (starts.real > -1e-2 * np.abs(starts)) & (starts.imag >= 0)
        found: list[Any] = []
        for start in starts[near & (size > 10.0 ** (span[0] - 2)) & (size < 10.0 ** (span[1] + 2))]:
            pole = self._pole(mp.mpc(complex(start)))
            if pole is None or abs(pole - complex(start)) > abs(pole) / 2:
                continue  # the start was none
            if pole.real <= abs(pole) * mp.mpf(10) ** -15:
                continue
            if all(abs(pole - p) > abs(p) * mp.mpf(10) ** -12 for p in found):
                found += [pole] if abs(pole.imag) < abs(pole) * mp.mpf(10) ** -15 else [pole, mp.conj(pole)]
        return found

    def _pole(self, start: Any) -> Any:
        """The pole that secant steps reach from a start near it; None where they reach none."""
        keys = self.full.unknowns
        b = {k: mp.mpf(2 + 3 * i % 7) for i, k in enumerate(keys)}  # nothing that a symmetry could hide from

        def inverse(s: Any) -> Any:
            x = self.full.voltages(s, [b])[0]
            return 1 / sum((5 + 2 * i % 11) * x[k] for i, k in enumerate(keys))

        s0, s1 = start, start * (1 + mp.mpf(10) ** -6)
        f0, f1 = inverse(s0), inverse(s1)
        for _ in range(60):
            if f1 == f0:
                return None
            s0, s1, f0 = s1, s1 - f1 * (s1 - s0) / (f1 - f0), f1
            if abs(s1 - s0) < abs(s1) * mp.mpf(10) ** -25:
                return s1
            try:
                f1 = inverse(s1)
            except (Singular, ZeroDivisionError):
                return s1
        return None
