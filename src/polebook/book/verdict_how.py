"""By which way a part limits an edge: its Miller half, the resistance that it sees, the loop that it turns.

Every clause follows "Its ..."; where a figure of the ledger would not explain the edge, there is no clause.
"""

from __future__ import annotations

from math import pi
from typing import TYPE_CHECKING

from polebook.book.lines import Line
from polebook.book.miller import Bridge
from polebook.book.sites import Site, site_names
from polebook.book.verdict_words import UNITS, figure, plain, stated
from polebook.circuit.elements import Branch, Part
from polebook.stages.base import slot_of
from polebook.stages.registry import KINDS
from polebook.stages.stamper import GROUND

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

MOSTLY = 1.5  # a driver whose resistance is below this many times the node's makes most of it
AHEAD = 3.0  # a resistance behind the node that raises the whole so many times over is told alone
SAME = 0.02  # share by which two may differ and be told once
ALIKE = 0.1  # share by which two resistances may differ and be called the same
BEYOND = 2.5  # an edge that lies so many times beyond a corner is made by more than it: by a coil, by another part
FAR = 10.0  # a corner that lies so many times off the edge does not make it
OPAMP = frozenset(("noninverting", "inverting", "transimpedance"))


def how(of: Ledger, index: int, end: str) -> str:
    """The clause of the part number `index` at the "upper" or "lower" edge; "" where no figure explains it."""
    part = of.solution.circuit.layout.parts[index]
    if part.type == "tau":
        return _storage(of, part, end)
    looped = _loop(of, index, part)
    if looped:
        return looped
    ohm = seen_ohm(of, index)
    if ohm is None or not _makes(of, index, end):
        return ""
    value = valued(of, index)
    if end == "lower":
        return f"{value} {_lower(of, part, ohm)}"
    if part.type == "L":
        return f"{value} lies in series with {figure(ohm, 'Ω')}"
    bridge = next((b for b in of.bridges.get(part.stage, ()) if b.part == part.name and b.type == "C"), None)
    if bridge is not None and topology_of(of, part.stage) in ("inverting", "cascode", "block"):
        return f"{value} {_miller(of, bridge, ohm)}"
    return f"{value} {_grounded(of, index, ohm)}"


def _value(of: Ledger, index: int) -> float:
    return float(of.solution.circuit.network.values[index])


def valued(of: Ledger, index: int) -> str:
    """The value of a part as it is stated, three digits where it was computed for its device."""
    part = of.solution.circuit.layout.parts[index]
    given = f"{part.stage}.{part.name}" in of.chain.given or kind_of(of, part.stage) == "ladder"
    return (stated if given else figure)(_value(of, index), UNITS[part.type])


def kind_of(of: Ledger, stage: str) -> str:
    """Kind of a stage; "" for source and load."""
    return next((one.kind for one in of.chain.stages if one.name == stage), "")


def topology_of(of: Ledger, stage: str) -> str:
    """Topology of a stage's kind; "" for source and load."""
    kind = kind_of(of, stage)
    return KINDS[kind].topology if kind else ""


def seen_ohm(of: Ledger, index: int) -> float | None:
    """Resistance that a C or L sees at midband, from its time constant."""
    tau = of.solution.constants.by_part.get(index)
    if not tau:
        return None
    value = _value(of, index)
    return value / tau if of.solution.circuit.layout.parts[index].type == "L" else tau / value


def _makes(of: Ledger, index: int, end: str) -> bool:
    """Whether the corner of the part alone lies near enough to the edge to make it."""
    edge, shares = (of.upper_hz, of.owns_upper) if end == "upper" else (of.lower_hz, of.owns_lower)
    tau = of.solution.constants.by_part.get(index)
    if not edge or not tau:
        return False
    corner = 1.0 / (2 * pi * tau)
    weight = max(shares.get(index, 0.0), 0.1)
    if end == "upper":
        return edge < BEYOND * corner and corner * weight < FAR * edge
    return corner < BEYOND * edge and corner > weight * edge / FAR


def branches_of(of: Ledger, index: int) -> list[Branch]:
    return [b for b in of.solution.circuit.layout.branches if any(index in group for group in b.groups)]


def site_of(of: Ledger, node: int) -> Site | None:
    """The site of a node, None where it belongs to none."""
    name = site_names(of.solution.circuit.layout).get(node, "")
    return next((site for site in of.sites if site.name == name), None)


def _miller(of: Ledger, bridge: Bridge, ohm: float) -> str:
    """The half that makes most of its time constant."""
    inverse, sees = of.solution.inverse, f"sees {figure(ohm, 'Ω')}"
    at_input = float(inverse.point(bridge.i))
    k = bridge.k
    if k is None or k >= 0.0 or bridge.at_input is None or bridge.at_output is None:
        return sees
    site, other = site_of(of, bridge.i), site_of(of, bridge.j)
    if at_input * (1.0 - k) >= 0.5 * ohm and site is not None and site.ohm:
        text = f"looks like {figure(bridge.at_input, 'F')} at {the(site.name)} (K {plain(k)})"
        if abs(at_input - site.ohm) <= ALIKE * at_input:
            return f"{text}, on {figure(site.ohm, 'Ω')}"
        between = _series(of, bridge)
        if at_input > AHEAD * site.ohm:
            return f"{text}, behind {between}"
        return f"{text}, on {figure(site.ohm, 'Ω')} and {between}"
    if float(inverse.point(bridge.j)) * (1.0 - 1.0 / k) >= 0.5 * ohm and other is not None and other.ohm:
        return f"counts as {figure(bridge.at_output, 'F')} at {the(other.name)}, on {figure(other.ohm, 'Ω')}"
    return sees


def _series(of: Ledger, bridge: Bridge) -> str:
    """The resistor that stands between the interstage node and the bridge."""
    layout, values = of.solution.circuit.layout, of.solution.circuit.network.values
    stage = next(segment for segment in layout.segments if any(b.j == bridge.j and b.bridge for b in segment.branches))
    found = [(float(values[k]), layout.parts[k].name) for b in stage.branches if b.series for group in b.groups
             for k in group if layout.parts[k].name in ("stopper", "rx", "r_comp")]
    value, name = max(found, default=(0.0, ""))
    called = {"rx": "the device's rx", "stopper": "the stopper"}.get(name, name)
    return f"{called}, {stated(value, 'Ω')}" if name else "the resistance there"


def _grounded(of: Ledger, index: int, ohm: float) -> str:
    """A capacitance to ground stands on a node's resistance; another one sees what it sees."""
    ends = [(b.i, b.j) for b in branches_of(of, index)]
    nodes = [i if j == GROUND else j for i, j in ends if GROUND in (i, j)]
    site = site_of(of, nodes[0]) if len(ends) == 1 and nodes else None
    if site is None:
        return f"sees {figure(ohm, 'Ω')}{_where(of, ends, ohm)}"
    text = f"stands on {figure(ohm, 'Ω')} at {the(site.name)}"
    if not site.interstage or site.ohm is None or abs(site.ohm - ohm) > ALIKE * ohm:
        return text
    driver = _driver(of, site)
    if driver is None or not driver.output_ohm or driver.output_ohm > MOSTLY * ohm:
        return text
    if driver.output_ohm < (1.0 + SAME) * ohm:
        return f"stands on {the(driver.name)}'s {figure(driver.output_ohm, 'Ω')} at {the(site.name)}"
    return f"{text}, mostly {the(driver.name)}'s {figure(driver.output_ohm, 'Ω')}"


def _driver(of: Ledger, site: Site) -> Line | None:
    """The line that drives an interstage node; the coupled load is driven by the last stage."""
    found = [at for at, line in enumerate(of.lines) if line.name == site.stage]
    if not found:
        return None
    return of.lines[found[0] - 1] if site.stage == "load" else of.lines[found[0]]


def _where(of: Ledger, ends: list[tuple[int, int]], ohm: float) -> str:
    """The site whose resistance makes most of what a floating capacitance sees."""
    if len(ends) != 1:
        return ""
    inverse = of.solution.inverse
    node = max(ends[0], key=lambda k: float(inverse.point(k)) if k != GROUND else 0.0)
    site = site_of(of, node)
    near = site is not None and abs(float(inverse.point(node)) - ohm) <= ALIKE * ohm
    return f" at {the(site.name)}" if site is not None and near else ""


def the(name: str) -> str:
    """A line in a sentence: "Q1", "the source"."""
    return f"the {name}" if name in ("source", "load") else name


def _lower(of: Ledger, part: Part, ohm: float) -> str:
    """A coupling works into what is ahead and behind; a bypass sees less than it bypasses."""
    if part.name == "couple" and part.segment:
        ahead, behind = of.lines[part.segment - 1], of.lines[part.segment]
        sides = [f"{figure(side, 'Ω')} of {the(line.name)}" for side, line in
                 ((ahead.output_ohm, ahead), (behind.input_ohm, behind)) if side and side > ALIKE * ohm]
        whole = f"works into {figure(ohm, 'Ω')}"
        return f"{whole}, {' and '.join(sides)}" if len(sides) == 2 else f"works into {sides[0]}" if sides else whole
    if slot_of(part.name) == "c_bypass":
        beside = _beside(of, part)
        if beside is not None and beside > 2 * ohm:
            return f"sees {figure(ohm, 'Ω')}, not the {stated(beside, 'Ω')} that it bypasses"
    return f"sees {figure(ohm, 'Ω')}"


def _beside(of: Ledger, part: Part) -> float | None:
    """The resistor in parallel to a bypass."""
    for branch in of.solution.circuit.layout.segments[part.segment].branches:
        for group in branch.groups:
            names = {of.solution.circuit.layout.parts[k].name: k for k in group}
            if part.name in names:
                return next((_value(of, k) for name, k in names.items() if slot_of(name) == "r_low_bypassed"), None)
    return None


def _storage(of: Ledger, part: Part, end: str) -> str:
    """An op-amp's or a block's own corner."""
    get, stage = of.chain.get, part.stage
    kind = kind_of(of, stage)
    if part.name.startswith("pole"):
        return f"{stated(get(f'{stage}.poles.{part.name[4:]}') or 0.0, 'Hz')} is the data sheet's own pole"
    if part.name.startswith("lower"):
        return f"{stated(get(f'{stage}.lower_poles.{part.name[5:]}') or 0.0, 'Hz')} is the data sheet's own corner"
    card = next(one.device for one in of.chain.stages if one.name == stage)
    hz = stated(get(f"device.{card}.{part.name}") or 0.0, "Hz")
    if part.name == "f2":
        return f"{hz} is the second pole of {card}"
    if kind == "transimpedance":
        burden = _burden(of, stage)
        return f"{hz} works through rf, {stated(get(f'{stage}.rf') or 0.0, 'Ω')}, into {burden}" if burden else ""
    site = next((site for site in of.sites if site.name == f"{stage}.gbw"), None)
    line = next(line for line in of.lines if line.name == stage)
    if site is None or site.pole_hz is None or not of.upper_hz or site.pole_hz > FAR * of.upper_hz:
        return ""
    return f"{hz} at a gain of {plain(line.gain)} leaves a pole at {figure(site.pole_hz, 'Hz')}"


def _burden(of: Ledger, stage: str) -> str:
    """The capacitance at the input of a transimpedance stage that owns most of the upper edge."""
    layout = of.solution.circuit.layout
    before = next(segment.before for segment in layout.segments if segment.name == stage)
    found = [(of.owns_upper.get(k, 0.0), k) for b in layout.branches if not b.series and before in (b.i, b.j)
             and GROUND in (b.i, b.j) for group in b.groups for k in group if layout.parts[k].type == "C"]
    if not found:
        return ""
    most = max(found)[1]
    part = layout.parts[most]
    return f"the {valued(of, most)} of {part.stage}.{part.name}"


def loop_of(of: Ledger, index: int) -> str:
    """The op-amp stage whose loop a part turns: its storages, what lies at an input that it holds, or on its output."""
    part = of.solution.circuit.layout.parts[index]
    kind = kind_of(of, part.stage)
    if kind in OPAMP and (part.type == "tau" or part.name.startswith("cin_")):
        return part.stage
    if part.type != "C" or part.role != "high":
        return ""
    nodes = {i if j == GROUND else j for i, j in ((b.i, b.j) for b in branches_of(of, index)) if GROUND in (i, j)}
    for segment in of.solution.circuit.layout.segments[1:]:
        if segment.kind == "transimpedance" and segment.before in nodes:
            return segment.name
        if segment.kind in OPAMP and segment.after in nodes and _stiff(of, segment.name, segment.after):
            return segment.name
    return ""


def _rout(of: Ledger, stage: str) -> float:
    parts = of.solution.circuit.layout.parts
    return next((_value(of, k) for k, part in enumerate(parts) if part.stage == stage and part.name == "rout"), 0.0)


def _stiff(of: Ledger, stage: str, node: int) -> bool:
    """Whether the loop holds the output node far below the amplifier's own output resistance."""
    site = site_of(of, node)
    return site is not None and site.ohm is not None and site.ohm < ALIKE * _rout(of, stage)


def _loop(of: Ledger, index: int, part: Part) -> str:
    """The clause of a capacitance across an op-amp's rf, at the input that it holds, or on its output."""
    value = valued(of, index)
    if kind_of(of, part.stage) in OPAMP and part.name == "cf":
        return f"{value} lies across rf, {stated(of.chain.get(f'{part.stage}.rf') or 0.0, 'Ω')}"
    stage = loop_of(of, index)
    if not stage:
        return ""
    segment = next(segment for segment in of.solution.circuit.layout.segments if segment.name == stage)
    if any(segment.after in (b.i, b.j) for b in branches_of(of, index)):
        return f"{value} on rout, {stated(_rout(of, stage), 'Ω')}, turns the loop of {stage}"
    card = next(one.device for one in of.chain.stages if one.name == stage)
    hz, rf = stated(of.chain.get(f"device.{card}.gbw") or 0.0, "Hz"), of.chain.get(f"{stage}.rf")
    through = f" through rf, {stated(rf, 'Ω')}" if rf else ""
    return f"{value} slows the loop of {stage}: {hz} of {card}{through}"
