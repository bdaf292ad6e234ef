"""The sums of time constants: what each reactive part sees at midband, and the edges that the sums estimate."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, isfinite, pi

from polebook.circuit.elements import Branch
from polebook.circuit.views import Network, admittance, impedance, network
from polebook.formula import Formula
from polebook.solve.digits import FEW, error
from polebook.solve.fold import Folded, NotHeld, fold
from polebook.solve.inverse import Inverse, inverse
from polebook.solve.onward import Open

COCHRAN_GRABEL = "B. L. Cochran and A. Grabel, A method for the determination of the transfer function of electronic " \
                 "circuits, IEEE Trans. Circuit Theory 20, 1973 (from memory)"
FORMULAS = (
    Formula("parts.tau_s", "tau = C·R for a capacitor, L/R for an inductor; R seen at its terminals at midband",
            COCHRAN_GRABEL),
    Formula("parts.tau_s.storage", "tau = tau_0·S of an upper pole, tau_0/S of a lower corner, S what is left of a "
                                   "change in its equation with the loop closed", COCHRAN_GRABEL),
    Formula("overall.octc_upper_hz", "f_H = 1/(2·pi·sum of tau_j), over the high-role parts", COCHRAN_GRABEL),
    Formula("overall.sctc_lower_hz", "f_L = sum of 1/(2·pi·tau_j), over the low-role parts", COCHRAN_GRABEL),
)
NEARLY_OPEN = 1e-5  # below this share of the branch's the conductance of the rest is not had by a difference


@dataclass(frozen=True, slots=True)
class TimeConstants:
    """tau of each part in seconds, by part; None where the part sees 0 or nothing and is left out of the sums.

    untold  parts whose tau is None because rounding has spoilt it
    """

    by_part: dict[int, float | None]
    upper_hz: float | None
    lower_hz: float | None
    untold: tuple[int, ...] = ()

    @property
    def taus(self) -> list[float]:
        return [tau for tau in self.by_part.values() if tau is not None]


def time_constants(folded: Folded, z: Inverse, lines: list[Open]) -> TimeConstants:
    """Open-circuit constants of the high-role parts, short-circuit ones of the low-role parts.

    folded, z and lines are the midband network: folded into its source, its inverse, and its lines left open.
    """
    net = folded.net
    found: dict[int, list[float | None]] = {}
    for number, branch in enumerate(net.layout.branches):
        for group in branch.groups:
            for index in group:
                if net.layout.parts[index].type != "R":
                    ohm = seen(net, z, number, branch, group, index)
                    line = net.layout.parts[index].segment
                    if net.layout.parts[index].name == "couple" and line:
                        ohm = _coupled(lines[line - 1].output_ohm, folded.inputs[line])
                    found.setdefault(index, []).append(_tau(net, index, ohm))
    for segment in net.layout.segments:
        for storage in segment.storages:
            share = z.own(storage.node)
            high = net.layout.parts[storage.part].role == "high"
            ohm = share if high else (1.0 / share if share else None)
            found.setdefault(storage.part, []).append(_tau(net, storage.part, ohm))
    by_part = {index: _total(taus) for index, taus in sorted(found.items())}
    upper = sum(tau for index, tau in by_part.items() if tau and net.layout.parts[index].role == "high")
    lower = sum(1.0 / tau for index, tau in by_part.items() if tau and net.layout.parts[index].role == "low")
    return TimeConstants(by_part, _hz(1.0 / upper if upper else 0.0), _hz(lower))


def told(found: TimeConstants, moved: list[TimeConstants]) -> TimeConstants:
    """The constants without those that rounding may have spoilt: moved are the same of shaken networks."""
    def spoilt(figure: float | None, others: list[float | None]) -> bool:
        return figure is not None and any(other is None or error(figure, other) > FEW for other in others)

    untold = tuple(index for index, tau in found.by_part.items() if spoilt(tau, [one.by_part[index] for one in moved]))
    if not untold:
        return found
    by_part = {index: None if index in untold else tau for index, tau in found.by_part.items()}
    upper = None if spoilt(found.upper_hz, [one.upper_hz for one in moved]) else found.upper_hz
    lower = None if spoilt(found.lower_hz, [one.lower_hz for one in moved]) else found.lower_hz
    return TimeConstants(by_part, upper, lower, untold)


def _coupled(ahead_ohm: float | None, behind: float | None) -> float | None:
    """What a coupling sees: it is all that joins what is ahead of it to what is behind it (siemens)."""
    return None if ahead_ohm is None or not behind else ahead_ohm + 1.0 / behind


def _hz(rate: float) -> float | None:
    """An estimate that is not finite and positive counts as none."""
    return rate / (2 * pi) if 0.0 < rate < inf else None


def _total(taus: list[float | None]) -> float | None:
    """A part in two places (an op-amp's common-mode capacitances) has both constants."""
    standing = [tau for tau in taus if tau is not None]
    return sum(standing) if standing else None


def _tau(net: Network, index: int, ohm: float | None) -> float | None:
    if ohm is None or ohm == 0.0 or not isfinite(ohm):
        return None
    value = float(net.values[index])
    return value / ohm if net.layout.parts[index].type == "L" else value * ohm


def seen(net: Network, z: Inverse, number: int, branch: Branch, group: tuple[int, ...], index: int) -> float | None:
    """Resistance at the terminals of one part of a branch with everything else at midband; None for no path."""
    part = net.layout.parts[index]
    if branch.single and not branch.series and part.type == "C":
        return float(z.at(branch.i, branch.j))
    around = z.loops.get(number) if branch.series else _loop(net, z, branch, index)
    others = admittance(net, tuple(k for k in group if k != index), 0.0, "midband")
    if others is None:
        return None  # another part of the group is a short
    if around is None:
        return 1.0 / others if others else None  # only its neighbours in the group close a path
    rest = around if part.short or not others else around - 1.0 / others
    total = others + (1.0 / rest if rest else inf)
    return 1.0 / total if total and isfinite(total) else None


def _loop(net: Network, z: Inverse, branch: Branch, index: int) -> float | None:
    """Around an admittance branch: its own resistance and that of the rest, the branch itself cut open."""
    own = impedance(net, branch, 0.0, "midband")
    across = float(z.at(branch.i, branch.j))
    if own is not None:
        loose = 1.0 - across / own
        if abs(loose) > NEARLY_OPEN:
            return float(own / loose)
        behind = _behind(net, branch)
        return None if behind is None else float(own + behind)
    others = Branch(branch.i, branch.j, tuple(g for g in branch.groups if index not in g), False)
    rest = impedance(net, others, 0.0, "midband")
    return None if rest is None else float(rest + across)


def _behind(net: Network, branch: Branch) -> float | None:
    """What a branch sees at midband with its resistors away; None where nothing else holds its ends."""
    away = {index for group in branch.groups for index in group if net.layout.parts[index].type == "R"}
    left = network(net.layout, [inf if index in away else value for index, value in enumerate(net.values)])
    try:
        return float(inverse(fold(left, 0.0, "midband")).at(branch.i, branch.j))
    except NotHeld:
        return None
