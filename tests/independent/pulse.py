"""The step responses of the upper and the lower network, and the group delay, in 50 digits: LEDGER, "Pulse".

The response is a sum over the poles of the view's own determinant, each residue read off the response beside the pole;
poles that are nearly alike are taken together by Cauchy's integral around them.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable
from dataclasses import replace
from functools import cache, cached_property
from typing import Any

import numpy as np

from tests.independent.linear import mp
from tests.independent.modes import exact_system, pieces
from tests.independent.network import GROUND, Element, System
from tests.independent.solved import Solved

BESIDE = mp.mpf(10) ** -20  # of a pole: where its residue is read
CROWDED = 1e-3  # poles nearer to each other than this share of them are taken together
POINTS = 90  # of a circle about them: it lies three times nearer than the next pole
HIGH, LOW = "high", "low"


def in_view(elements: Iterable[Element], role: str) -> tuple[list[Element], Callable[[str], str]]:
    """The elements with the parts of that role live and those of the other at midband: shorts joined, opens gone."""
    parent: dict[str, str] = {}

    def find(node: str) -> str:
        while node in parent:
            node = parent[node]
        return node

    elements = list(elements)
    asleep = [e for e in elements if e.reactive and e.role != role]
    for e in asleep:
        a, b = find(e.a), find(e.b)
        if e.short_at_midband and a != b:
            gone, stays = (a, b) if b == GROUND else (b, a)
            parent[gone] = stays
    kept = [replace(e, a=find(e.a), b=find(e.b), c=find(e.c), d=find(e.d)) for e in elements if e not in asleep]
    return kept, find


class View:
    """One of the two networks of a chain, its response over the midband gain, and its step response."""

    def __init__(self, chain: Solved, role: str) -> None:
        self.chain = chain
        self.elements, self.find = in_view(chain.elements, role)
        self.full = System(self.elements)
        self.load = self.find(chain.load)

    def drive_full(self) -> dict[Hashable, Any]:
        return self.chain._drive(self.full, self.find)

    def h(self, s: Any) -> Any:
        return self.full.voltages(s, [self.drive_full()])[0][self.load] / self.chain.gain

    @cached_property
    def poles(self) -> list[Any]:
        """Of the determinant, 50 digits; those at 0 too."""
        system, found = exact_system(self.elements), []
        for piece in pieces(system, system.unknowns, system.unknowns):
            found += [mp.mpf(0)] * piece.order + (piece.roots() if piece.degree > piece.order else [])
        return found

    @cached_property
    def terms(self) -> list[tuple[Any, Any]]:
        """(s, a) of which y = sum of a·exp(s·t): each pole of h(s)/s with its residue; for a crowd of poles the points
        of a circle about it with what they weigh in Cauchy's integral."""
        crowds = _crowds([*self.poles, mp.mpf(0)])
        found = []
        with mp.workdps(80):
            for crowd in crowds:
                others = [q for other in crowds if other is not crowd for q in other]
                if len(crowd) == 1:
                    step = BESIDE * (abs(crowd[0]) or min((abs(q) for q in others), default=mp.mpf(1)))
                    s = crowd[0] + step
                    found.append((crowd[0], step * self.h(s) / s))
                    continue
                centre = sum(crowd) / len(crowd)
                radius = min(abs(q - centre) for q in others) / 3
                for k in range(POINTS):
                    aside = radius * mp.expjpi(mp.mpf(2 * k) / POINTS)
                    s = centre + aside
                    found.append((s, aside * self.h(s) / s / POINTS))
        return found

    def step(self, t: Any) -> Any:
        """y(t) over the midband gain."""
        return mp.re(sum(a * mp.exp(s * t) for s, a in self.terms))

    def sketch(self, t: np.ndarray) -> np.ndarray:
        """The same in ordinary floats, to find brackets with."""
        return sum(complex(a) * np.exp(complex(s) * t) for s, a in self.terms).real


@cache
def view_of(chain: Solved, role: str) -> View:
    """The network of a chain in which the parts of a role are live."""
    return View(chain, role)


def _crowds(poles: list[Any]) -> list[list[Any]]:
    """Poles that lie within CROWDED of their size together."""
    found: list[list[Any]] = []
    for p in poles:
        near = [crowd for crowd in found if any(abs(p - q) <= CROWDED * abs(p) for q in crowd)]
        found = [crowd for crowd in found if crowd not in near] + [[p, *(q for crowd in near for q in crowd)]]
    return found


def crossing(view: View, level: float, t: np.ndarray, y: np.ndarray, last: bool = False) -> Any:
    """Where |y - 1| falls below `level` for good (last), or y first comes to it; to 25 digits or so."""
    if last:
        k = int(np.nonzero(np.abs(y - 1) >= level)[0][-1])
        return _root(lambda x: abs(view.step(x) - 1) - mp.mpf(str(level)), t[k], t[k + 1])
    k = int(np.nonzero(y >= level)[0][0])
    return mp.mpf(0) if k == 0 else _root(lambda x: view.step(x) - mp.mpf(str(level)), t[k - 1], t[k])


def _root(f: Callable[[Any], Any], a: float, b: float) -> Any:
    return mp.findroot(f, (mp.mpf(a), mp.mpf(b)), solver="anderson", tol=mp.mpf(10) ** -22)


def figures(chain: Solved, points: int = 6000) -> dict[str, Any]:
    """rise_time_s, overshoot_percent, settling_1_s, settling_01_s of the upper network."""
    view = view_of(chain, HIGH)
    live = [p for p in view.poles if mp.re(p) < 0]
    if not live:
        return dict.fromkeys(("rise_time_s", "overshoot_percent", "settling_1_s", "settling_01_s"), 0.0)
    slow, fast = float(1 / min(-mp.re(p) for p in live)), float(1 / max(abs(p) for p in live))
    rings = [float(mp.im(p)) for p in live if mp.im(p) > -2 * mp.re(p)]
    even = np.arange(0.0, 12 * slow, 0.1 / max(rings)) if rings and max(rings) * slow < 2e4 else np.zeros(1)
    t = np.unique(np.concatenate([even, np.geomspace(fast * 1e-3, 40 * slow, points)]))
    y = view.sketch(t)
    top = int(np.argmax(y))
    over = mp.mpf(0)
    if y[top] > 1 + 1e-9:
        over = mp.mpf(str(y[0])) - 1 if top == 0 else _top(view, t[top - 1], t[top + 1]) - 1
    return {
        "rise_time_s": crossing(view, 0.9, t, y) - crossing(view, 0.1, t, y),
        "overshoot_percent": 100 * over,
        "settling_1_s": crossing(view, 0.01, t, y, last=True),
        "settling_01_s": crossing(view, 0.001, t, y, last=True),
    }


def _top(view: View, a: float, b: float) -> Any:
    """The greatest value between two times, by thirds."""
    lo, hi = mp.mpf(a), mp.mpf(b)
    for _ in range(45):
        one, two = lo + (hi - lo) / 3, hi - (hi - lo) / 3
        lo, hi = (one, hi) if view.step(one) < view.step(two) else (lo, two)
    return view.step((lo + hi) / 2)


def sag_percent(chain: Solved, pulse_s: float) -> Any:
    """100·(1 - y(T)/y(0+)) of the lower network, which is the midband network at 0+."""
    return 100 * (1 - view_of(chain, LOW).step(mp.mpf(pulse_s)))


def group_delay(chain: Solved, hz: Any) -> Any:
    """-d arg H/dω of the full network, by a difference over 1e-20 of the frequency."""
    step = mp.mpf(10) ** -20
    near, far = chain.h(hz * (1 - step)), chain.h(hz * (1 + step))
    return -mp.arg(far / near) / (4 * mp.pi * hz * step)


def delay_spread(chain: Solved, lower: Any, upper: Any, points: int = 160) -> Any:
    """Greatest less least group delay from edge to edge (Hz)."""
    grid = [mp.exp(x) for x in mp.linspace(mp.log(lower), mp.log(upper), points)]
    values = [float(group_delay(chain, hz)) for hz in grid]
    ends = []
    for sign in (1, -1):
        k = int(np.argmax(sign * np.array(values)))
        if k in (0, points - 1):
            ends.append(group_delay(chain, grid[k]))
            continue
        lo, hi = mp.log(grid[k - 1]), mp.log(grid[k + 1])
        for _ in range(30):
            one, two = lo + (hi - lo) / 3, hi - (hi - lo) / 3
            worse = sign * group_delay(chain, mp.exp(one)) < sign * group_delay(chain, mp.exp(two))
            lo, hi = (one, hi) if worse else (lo, two)
        ends.append(group_delay(chain, mp.exp((lo + hi) / 2)))
    return ends[0] - ends[1]
