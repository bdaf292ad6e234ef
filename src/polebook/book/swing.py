"""How far the output of each stage can swing: what bounds it, in V peak at the node behind the stage.

A device's output stands on its quiescent current and voltage: it can give up no more than either of them.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from polebook.book.load_line import without_device
from polebook.book.solution import Solution
from polebook.chain.model import Stage
from polebook.circuit.bias import Operating
from polebook.circuit.elements import Branch
from polebook.circuit.views import impedance
from polebook.devices.opamp import HEADROOM_V
from polebook.formula import Formula
from polebook.stages.base import GROUP
from polebook.stages.stamper import GROUND

SATURATION, CUT_OFF, OHMIC, BOTTOM, GRID = "saturation", "cut-off", "ohmic region", "anode voltage", "grid current"
POSITIVE, NEGATIVE, OUTPUT, DATA = "positive rail", "negative rail", "output current", "data sheet"
SWINGS = "ends of the a.c. load line: the smaller of VCEQ and ICQ·rc (A. P. Malvino and D. J. Bates, Electronic " \
         "Principles, ch. on power amplifiers; from memory)"
FORMULAS = (
    Formula("levels.clip_v.bjt", "min(vce - vce_sat, ic·R_ac), R_ac seen at the node without the device", SWINGS),
    Formula("levels.clip_v.fet", "min(vds - 2·id/gm, id·R_ac), R_ac seen at the node without the device", SWINGS),
    Formula("levels.clip_v.triode", "min(vak, ia·R_ac, vgk up to 0 V times V(out)/V(grid to cathode)), R_ac seen at "
                                    "the node without the device", SWINGS),
    Formula("levels.clip_v.opamp", "the nearer rail less headroom, or i_max·R_load, at the amplifier; carried to the "
                                   "node by V(node)/V(o)", "definition"),
    Formula("levels.clip_v.block", "as the file states it", "the chain file"),
    Formula("levels.clip_v.shared", "that of the node ahead: at midband the two are one", "definition"),
)


@dataclass(frozen=True, slots=True)
class Bound:
    """One bound of a swing: what happens there, and V peak at the node; None where it can't be had."""

    by: str
    volts: float | None


@dataclass(frozen=True, slots=True)
class Clip:
    """The bounds of one stage's output, at its interstage node. What never happens is not among them."""

    stage: str
    node: int
    bounds: tuple[Bound, ...]

    @property
    def least(self) -> Bound | None:
        """The bound that is met first; None where none is known."""
        known = [bound for bound in self.bounds if bound.volts is not None]
        return min(known, key=lambda bound: bound.volts or 0.0, default=None)

    @property
    def whole(self) -> bool:
        """Whether every bound is known."""
        return bool(self.bounds) and all(bound.volts is not None for bound in self.bounds)


def clips(of: Solution) -> list[Clip]:
    """The bounds of every stage that amplifies, in signal order."""
    stages = {stage.name: stage for stage in of.chain.stages}
    result = []
    for index, segment in enumerate(of.circuit.layout.segments):
        stage = stages.get(segment.name)
        if stage is None or stage.left_out or segment.after == segment.before or stage.kind == "ladder":
            continue
        result.append(Clip(stage.name, segment.after, tuple(_bounds(of, index, stage))))
    return result


def upper_of(stage: Stage) -> tuple[str, str]:
    """(card, suffix) of the device whose terminal is the output: a cascode's upper one."""
    return (stage.upper or stage.device, "_upper") if stage.kind == "cascode" else (stage.device, "")


def _bounds(of: Solution, index: int, stage: Stage) -> Iterator[Bound]:
    if stage.kind == "block":
        yield Bound(DATA, of.chain.get(f"{stage.name}.clip"))
        return
    card, after = upper_of(stage)
    family = of.chain.cards[card].family
    if family == "opamp":
        yield from _amplifier(of, index, stage)
        return
    point = of.circuit.points.get(stage.name + after)
    current, across = (None, None) if point is None else (point.current, point.across)
    if family == "bjt":
        sat = of.chain.get(f"device.{card}.vce_sat", 0.2) or 0.0
        yield Bound(SATURATION, None if across is None else _floor(across - sat))
    elif family == "triode":
        yield Bound(BOTTOM, None if across is None else _floor(across))
        yield Bound(GRID, _grid(of, index, point))
    else:
        yield Bound(OHMIC, _pinched(across, current, value_of(of, stage.name, f"gm{after}")))
    if current is None:
        yield Bound(CUT_OFF, None)
        return
    ohm = without_device(of, index).ohm
    if ohm is not None:
        yield Bound(CUT_OFF, _floor(current * ohm))


def _pinched(across: float | None, current: float | None, gm: float | None) -> float | None:
    """What a channel can give up of its voltage before it is pinched off no more."""
    return None if across is None or current is None or not gm else _floor(across - 2.0 * current / gm)


def _floor(volts: float) -> float:
    return max(float(volts), 0.0)


def _grid(of: Solution, index: int, point: Operating | None) -> float | None:
    """What the output does while the grid goes up to its cathode."""
    if point is None or point.control_v is None or point.lower_v is None:
        return None
    drive = across_input(of, index)
    if not drive:
        return None
    return _floor(point.lower_v - point.control_v) * abs(of.volts[of.circuit.layout.after[index]] / drive)


def across_input(of: Solution, index: int) -> float:
    """Midband signal from control to lower terminal of a stage's device."""
    transfers = of.circuit.layout.segments[index].transfers
    if not transfers:
        return 0.0
    transfer = transfers[-1]
    return _volt(of, transfer.plus) - _volt(of, transfer.minus)


def _volt(of: Solution, node: int) -> float:
    return 0.0 if node == GROUND else of.volts[node]


def _amplifier(of: Solution, index: int, stage: Stage) -> Iterator[Bound]:
    """Rails and output current of an op-amp, both carried from its output terminal to the node."""
    numbers, card = of.chain.numbers, stage.device
    o = output_of(of, index)
    carry = abs(of.volts[of.circuit.layout.after[index]] / of.volts[o])
    vout, rails = of.circuit.points[stage.name].output_v, [numbers.get(f"supply.{rail}") or 0.0
                                                           for rail in ("positive", "negative")]
    if vout is None or rails[0] == rails[1]:
        yield Bound(POSITIVE, None)
    else:
        off = numbers.get(f"device.{card}.headroom", HEADROOM_V)
        for by, volts in ((POSITIVE, rails[0] - vout), (NEGATIVE, vout - rails[1])):
            yield Bound(by, _floor(volts - off) * carry)
    most, ohm = numbers.get(f"device.{card}.i_max"), driven_ohm(of, index)
    if most is not None and ohm is not None:
        yield Bound(OUTPUT, most * ohm * carry)


def output_of(of: Solution, index: int) -> int:
    """The node at an op-amp's own output terminal, ahead of r_out."""
    layout = of.circuit.layout
    return next(node for node in layout.segments[index].nodes if layout.names[node].endswith(".o"))


def drawn(of: Solution, index: int) -> Iterator[tuple[Branch | None, float]]:
    """(branch, A) that an op-amp's output gives at midband for 1 V or 1 A of source; None for what follows r_out.

    What follows is taken by its input admittance, so that a tiny r_out costs no digits.
    """
    layout, net, volts = of.circuit.layout, of.circuit.network, of.volts
    o = output_of(of, index)
    for branch in layout.segments[index].branches:
        z = impedance(net, branch, 0.0, "midband")
        if o not in (branch.i, branch.j) or branch.i == branch.j or not z:
            continue
        if layout.parts[branch.groups[0][0]].name not in ("rout", "r_out"):
            other = branch.j if branch.i == o else branch.i
            yield branch, (volts[o] - _volt(of, other)) / z
    yield None, volts[layout.after[index]] * (of.midband.inputs[index + 1] or 0.0)


def driven_ohm(of: Solution, index: int) -> float | None:
    """V/I at an op-amp's output terminal in the midband solution; None where it gives no current."""
    current = sum(amperes for _, amperes in drawn(of, index))
    return abs(of.volts[output_of(of, index)] / current) if current else None


def value_of(of: Solution, stage: str, name: str) -> float | None:
    """Value of a part of the network by its name."""
    parts = of.circuit.layout.parts
    return next((float(of.circuit.network.values[k]) for k, part in enumerate(parts)
                 if (part.stage, part.name) == (stage, name)), None)


def is_device(of: Solution, stage: Stage) -> bool:
    """Whether a three-terminal device drives the output of a stage."""
    return bool(stage.device) and of.chain.cards[stage.device].family in GROUP
