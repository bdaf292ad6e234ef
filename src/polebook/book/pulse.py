"""The step response of the upper network, and the sag of a pulse by the lower one."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from math import exp, log, log10, pi, sqrt
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.sites import Site
from polebook.book.solution import Solution
from polebook.circuit.views import Network, View
from polebook.formula import Formula
from polebook.solve.fold import fold
from polebook.solve.marks import Marks, marks
from polebook.solve.poles import Poles, poles
from polebook.solve.sweep import Sweep, sweep
from polebook.solve.transient import Transient, transient
from polebook.solve.winding import winding

if TYPE_CHECKING:
    from polebook.solve.aberth import Complex
    from polebook.solve.orthonormal import Floats

RISE = log(9.0) / (2.0 * pi)  # rise time of one pole times its frequency: 0.3497
PER_CENT, PER_MILLE = 0.01, 0.001  # of the final value, to which settling is timed
EXACT = 5e-10  # error up to which a transient is believed, as a share of the gain, or of the most that passes anywhere
SWAMPED = 1e-7  # error, as a share of the final value, above which nothing is read off a transient
ROUNDING = 1e-16
POINTS = 201
NAMES: Mapping[View, str] = {"upper": "the upper network by itself (couplings and bypasses shorted)",
                             "lower": "the lower network by itself (device and load capacitances away)"}
STEPS = (1.0, 1.2, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)  # what a time axis may end at
RESPONSE = "y(t)/y(inf) = 1 + sum of a_k·exp(p_k·t) over the poles p_k of the upper network, a_k the residues of " \
           "H(s)/(s·gain)"
BY_RESIDUES = "inverse Laplace transform by partial fractions (any text on linear systems)"
FORMULAS = (
    Formula("overall.rise_time_s", f"t_r = t_90 - t_10, the first times at 90 and 10 % of the final value; {RESPONSE}",
            BY_RESIDUES),
    Formula("overall.overshoot_percent", f"100·(max y/y(inf) - 1), not below 0; {RESPONSE}", BY_RESIDUES),
    Formula("overall.settling_1_s", f"last t at which |y/y(inf) - 1| = 0.01; {RESPONSE}", BY_RESIDUES),
    Formula("overall.settling_01_s", f"last t at which |y/y(inf) - 1| = 0.001; {RESPONSE}", BY_RESIDUES),
    Formula("overall.sag_percent", "100·(1 - y(T)/y(0+)), y the step response of the lower network: y(t)/y(0+) = sum "
                                   "of a_k·exp(p_k·t) over its poles p_k and 0, a_k the residues of H(s)/(s·gain)",
            BY_RESIDUES),
)


@dataclass(frozen=True, slots=True)
class Pulse:
    """The step response as a share of its final value, which is the midband gain; or `why` there is none.

    Times in s, None where a figure does not apply. `poles` are those of the upper network, rad/s.
    """

    why: str
    poles: Complex
    transient: Transient | None = None
    marks: Marks | None = None

    @property
    def rise_time_s(self) -> float | None:
        return self.marks.rise_s if self.marks else None

    @property
    def overshoot_percent(self) -> float | None:
        return 100.0 * max(0.0, self.marks.top - 1.0) if self.marks and self.marks.top is not None else None

    @property
    def undershoot_percent(self) -> float | None:
        """How far it first goes the wrong way, % of the final value."""
        return -100.0 * self.marks.dip if self.marks else None

    @property
    def settling_1_s(self) -> float | None:
        return self.marks.settled_s[PER_CENT] if self.marks else None

    @property
    def settling_01_s(self) -> float | None:
        return self.marks.settled_s[PER_MILLE] if self.marks else None

    def at(self, t: Floats) -> Floats:
        """Response at times t (s, none negative) as a share of its final value. Only where there is one."""
        assert self.transient is not None, self.why
        result: Floats = 1.0 + self.transient.at(t)
        return result

    def at_one(self, t: float) -> float:
        """The same at one time."""
        return float(self.at(np.array([t]))[0])

    @property
    def window_s(self) -> float:
        """End of a time axis on which the whole rise and its settling show: a round number of seconds."""
        if self.marks is None or self.transient is None or not self.transient.poles.size:
            return 1e-6
        least = 1.5 * (self.marks.high_s or 0.0)
        rough, fine = self.settling_1_s, self.settling_01_s
        settled = fine if rough and fine and fine < 2.0 * rough else rough
        wanted = max(least, min(1.1 * settled, 12.0 * least) if settled is not None else 6.0 * least)
        return rounded(wanted or 5.0 / float(np.abs(self.transient.poles).min()))

    def curve(self, end_s: float | None = None, points: int = POINTS) -> tuple[Floats, Floats]:
        """(times in s, response as a share of its final value) from 0 to end_s, by default the window's end."""
        t = np.linspace(0.0, self.window_s if end_s is None else end_s, points)
        return t, self.at(t)


@dataclass(frozen=True, slots=True)
class Sag:
    """How much of a pulse's height is lost at its end, %; None and `why` where there is none to tell.

    poles are those of the step response of the lower network, rad/s: the step's own at 0 first. The transient is that
    response beside the axis, its residues are the response's own.
    """

    percent: float | None
    why: str
    pulse_s: float | None = None
    transient: Transient | None = None
    poles: Complex | None = None


def rounded(seconds: float) -> float:
    """The next round number above."""
    decade = 10.0 ** int(np.floor(log10(seconds)))
    return next((step for step in STEPS if step * decade >= seconds * (1.0 - 1e-9)), 10.0) * decade


def unjudged(of: Solution) -> str:
    """Why a chain has no transient at all; "" where it may have one."""
    if of.winding.right is None:
        return "whether the chain is stable could not be told"
    return "the chain is unstable" if of.winding.right else ""


def pulse(of: Solution) -> Pulse:
    """The step response of the upper network."""
    none: Complex = np.zeros(0, dtype=complex)
    why = unjudged(of)
    if why:
        return Pulse(why, none)
    found, seen = _poles(of, of.circuit.network, "upper")
    if isinstance(found, str):
        return Pulse(found, none)
    if _growth(seen) > 0.5:
        return Pulse("the response grows towards infinite frequency, so a step begins with an impulse", found.roots)
    fading = found.roots[found.roots.real < 0]  # one on the axis is a trap that the response does not feel, or a miss
    response = _response(of, of.circuit.network, "upper")
    one = transient(fading, lambda s: (response(s) - 1.0) / s)
    level = fading.size or np.abs(seen.loss).max() < EXACT  # without a pole there is nothing but the gain
    if not (level and one.miss < EXACT):
        return Pulse(_missed(found, "upper"), found.roots)
    seen_there = marks(one, (PER_CENT, PER_MILLE))
    if max(seen_there.top or 1.0, -seen_there.dip) * max(one.miss, ROUNDING) > SWAMPED:
        return Pulse("beside what it passes on its way the final value is lost in rounding", found.roots)
    return Pulse("", found.roots, one, seen_there)


def sag(of: Solution, pulse_s: float | None, net: Network | None = None) -> Sag:
    """Sag at the end of a pulse of that length (s); of a network with the same midband, where one is given.

    The transform is looked at beside the axis, where the step's own pole and any other at 0 fade too: aside by the
    slowest pole, or by 1/T where that is less.
    """
    why = unjudged(of)
    if pulse_s is None or why:
        return Sag(None, why or "target.pulse is not set")
    net = net or of.circuit.network
    found, _ = _poles(of, net, "lower")
    if isinstance(found, str):
        return Sag(None, found, pulse_s)
    aside = min(1.0 / pulse_s, float(np.abs(found.roots).min(initial=np.inf)))
    own: Complex = np.concatenate([np.zeros(1 + found.at_zero), found.roots])
    response = _response(of, net, "lower")
    one = transient(own - aside, lambda s: response(s + aside) / (s + aside))
    if not one.miss < EXACT:
        return Sag(None, _missed(found, "lower"), pulse_s)
    return Sag(100.0 * (1.0 - exp(aside * pulse_s) * one.one(pulse_s)), "", pulse_s, one, own)


def rise_by_edge(edge_hz: float | None) -> float | None:
    """Rise time (s) that one pole at the upper edge would have: 0.35/edge."""
    return RISE / edge_hz if edge_hz else None


def rise_by_nodes(sites: list[Site]) -> float | None:
    """Root of the sum of the squares of the rise times (s) that the node poles would have, each alone."""
    each = [RISE / site.pole_hz for site in sites if site.pole_hz]
    return sqrt(sum(t * t for t in each)) if each else None


def _poles(of: Solution, net: Network, view: View) -> tuple[Poles | str, Sweep]:
    """Poles of a view, or what speaks against them, and its sweep.

    Poles that are not trusted to the last will do: whether they make the response is told by the transient's own miss.
    """
    name, hz = NAMES[view], of.sweep.hz
    seen = sweep(net, float(hz[0]), float(hz[-1]), of.gains, view)
    told = winding(seen)
    if told.right is None:
        return f"whether {name} is stable could not be told", seen
    if told.right:
        return f"{name} is unstable", seen
    found = poles(net, float(seen.hz[0]), float(seen.hz[-1]), told.right, view)
    if told.finite != found.roots.size or (found.roots.real > 0).any():
        return f"the poles of {name} are not resolved", seen
    return found, seen


def _response(of: Solution, net: Network, view: View) -> Callable[[Complex], Complex]:
    """H(s) over the midband gain."""
    def response(s: Complex) -> Complex:
        product: Complex = np.ones(s.shape, dtype=complex)
        with np.errstate(all="ignore"):
            for gain, reference in zip(fold(net, s, view).gains, of.gains, strict=True):
                product = product * (gain / reference)
        return product

    return response


def _growth(seen: Sweep) -> float:
    """Power of f by which the response goes above everything; minus infinity where nothing is left of it there."""
    if not np.isfinite(seen.loss[-2:]).all():
        return -np.inf
    return float((seen.loss[-1] - seen.loss[-2]) / log(seen.hz[-1] / seen.hz[-2]))


def _missed(found: Poles, view: View) -> str:
    if not found.trusted:
        return f"the poles of {NAMES[view]} are not resolved"
    if (found.roots.real == 0).any():
        return "the step response rings on without end"
    return "its transient could not be told to a thousand-millionth"
