"""The d.c. equations of one group of nodes and devices that hang together without a capacitor.

Unknowns are the voltages of the free nodes, the currents of resistors between two free nodes (so that a small one
beside large ones costs no digits), and the current, for fets and valves also the drive, of every device whose
current is not stated. Rows are mappings column -> coefficient; the column `RHS` holds the right-hand side.
The arithmetic is left open: numbers, arrays, or the residues by which the structure is examined.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from polebook.circuit.bias_laws import Law
from polebook.circuit.bias_network import Device, Network, Resistor
from polebook.devices.num import Value

RHS = -1
Row = dict[int, Value]


@dataclass(frozen=True, slots=True)
class Group:
    """Structure of one group.

    nodes     its free nodes; column and balance row of a node have its place here
    held      held nodes that it touches -> the level
    grounded  resistors from a free node a to a held node b
    branches  resistors between two free nodes
    """

    nodes: tuple[int, ...]
    held: dict[int, str]
    grounded: tuple[Resistor, ...]
    branches: tuple[Resistor, ...]
    devices: tuple[Device, ...]


@dataclass(frozen=True, slots=True)
class Columns:
    """Column of every unknown; -1 where a device has none. Current and drive of a device by its place."""

    voltage: dict[int, int]
    branch: tuple[int, ...]
    current: tuple[int, ...]
    drive: tuple[int, ...]
    count: int


@dataclass(frozen=True, slots=True)
class Numbers:
    """Values for one solution: ohms by resistor, volts by held node; by device its law, stopper and stated voltage."""

    grounded: Sequence[Value]
    branches: Sequence[Value]
    volts: dict[int, Value]
    laws: Sequence[Law]
    stoppers: Sequence[Value | None]
    across: Sequence[Value | None]


def groups(net: Network, every: bool = False) -> list[Group]:
    """The groups of a network that hold a device or end at an amplifier's input, by the first of these.

    With `every`, those of resistors alone too, behind the others.
    """
    parent: dict[int, int] = {}

    def root(node: int) -> int:
        while parent.setdefault(node, node) != node:
            node = parent[node]
        return node

    members = [[r.a, r.b] for r in net.resistors] + [[d.control, d.lower, d.output] for d in net.devices]
    for nodes in members:
        free = [node for node in nodes if not net.level(node)]
        for node in free[1:]:
            parent[root(node)] = root(free[0])
    gathered: dict[int, tuple[list[Resistor], list[Device]]] = {}
    for device in net.devices:
        free = [n for n in (device.control, device.lower, device.output) if not net.level(n)]
        gathered.setdefault(root(free[0]) if free else -1 - len(gathered), ([], []))[1].append(device)
    for amplifier in net.amplifiers:
        if not net.level(amplifier.input):
            gathered.setdefault(root(amplifier.input), ([], []))
    for resistor in net.resistors:
        free = [n for n in (resistor.a, resistor.b) if not net.level(n)]
        if free and (every or root(free[0]) in gathered):
            gathered.setdefault(root(free[0]), ([], []))[0].append(resistor)
    return [_group(net, resistors, devices) for resistors, devices in gathered.values()]


def _group(net: Network, resistors: list[Resistor], devices: list[Device]) -> Group:
    touched = [n for d in devices for n in (d.control, d.lower, d.output)] + [n for r in resistors for n in (r.a, r.b)]
    held = {n: net.level(n) for n in touched if net.level(n)}
    nodes = tuple(dict.fromkeys(n for n in touched if n not in held))
    turned = [Resistor(r.b, r.a, r.paths) if r.a in held else r for r in resistors]
    return Group(nodes, held, tuple(r for r in turned if r.b in held),
                 tuple(r for r in turned if r.b not in held and r.a != r.b), tuple(devices))


def columns(group: Group, lawful: Sequence[bool]) -> Columns:
    """Numbers the unknowns: voltages, branch currents, device currents, drives. `lawful`: the card tells the law."""
    n = len(group.nodes)
    place = n + len(group.branches)
    current, drive = [], []
    for device in group.devices:
        current.append(-1 if device.current else place)
        place += not device.current
    for device, known in zip(group.devices, lawful, strict=True):
        driven = known and not device.current and device.family != "bjt"
        drive.append(place if driven else -1)
        place += driven
    return Columns({node: k for k, node in enumerate(group.nodes)}, tuple(range(n, n + len(group.branches))),
                   tuple(current), tuple(drive), place)


def assemble(group: Group, cols: Columns, numbers: Numbers) -> list[Row]:
    """Every row there is: balances by node, branches, then by device its law and its stated across voltage.

    A balance sums the currents that leave the node. A row that can't be written is empty.
    """
    balances: list[Row] = [{} for _ in group.nodes]
    for resistor, ohms in zip(group.grounded, numbers.grounded, strict=True):
        row, k = balances[cols.voltage[resistor.a]], cols.voltage[resistor.a]
        _add(row, k, 1 / ohms)
        _add(row, RHS, numbers.volts[resistor.b] / ohms)
    branches: list[Row] = []
    for resistor, ohms, k in zip(group.branches, numbers.branches, cols.branch, strict=True):
        a, b = cols.voltage[resistor.a], cols.voltage[resistor.b]
        _add(balances[a], k, 1)
        _add(balances[b], k, -1)
        branches.append({a: 1, b: -1, k: -ohms})
    laws: list[Row] = []
    acrosses: list[Row] = []
    for k, device in enumerate(group.devices):
        _currents(balances, device, numbers.laws[k], cols, k)
        laws.append(_law(device, numbers, cols, k))
        acrosses.append(_across(device, numbers, cols, k))
    return [*balances, *branches, *laws, *acrosses]


def _add(row: Row, column: int, value: Value) -> None:
    row[column] = row[column] + value if column in row else value


def _currents(balances: list[Row], device: Device, law: Law, cols: Columns, k: int) -> None:
    """Books what the device draws at its terminals; where a current source carries it all, nothing is left."""
    terminals = [(device.lower, -(1 + law.share))]
    if not device.fed_output:
        terminals.append((device.output, 1 / (1 + law.above) if device.upper else 1))
    if device.family == "bjt":
        terminals.append((device.control, law.share))
    for node, part in terminals:
        if node not in cols.voltage:
            continue
        if law.current is None:
            _add(balances[cols.voltage[node]], cols.current[k], device.sign * part)
        else:
            _add(balances[cols.voltage[node]], RHS, -device.sign * part * law.current)


def _law(device: Device, numbers: Numbers, cols: Columns, k: int) -> Row:
    """V_control - V_lower + tilt·(V_output - V_lower) - sign·drive = sign·drop, V_control behind the stopper."""
    law, stopper = numbers.laws[k], numbers.stoppers[k]
    if law.drop is None:
        return {}
    row: Row = {RHS: device.sign * law.drop}
    _voltage(row, device.control, 1, numbers, cols)
    _voltage(row, device.lower, -1 - law.tilt if device.family == "triode" else -1, numbers, cols)
    if device.family == "triode":
        _voltage(row, device.output, law.tilt, numbers, cols)
    if cols.drive[k] >= 0:
        _add(row, cols.drive[k], -device.sign)
    if stopper is not None and device.family == "bjt":
        fall = device.sign * law.share * stopper
        if law.current is None:
            _add(row, cols.current[k], -fall)
        else:
            _add(row, RHS, fall * law.current)
    return row


def _across(device: Device, numbers: Numbers, cols: Columns, k: int) -> Row:
    """V_output - V_lower as stated; a cascode's statement is about its lower device alone."""
    across = numbers.across[k]
    if across is None or device.upper:
        return {}
    row: Row = {RHS: device.sign * across}
    _voltage(row, device.output, 1, numbers, cols)
    _voltage(row, device.lower, -1, numbers, cols)
    return row


def _voltage(row: Row, node: int, weight: Value, numbers: Numbers, cols: Columns) -> None:
    """Adds weight·V(node) to the left-hand side."""
    if node in cols.voltage:
        _add(row, cols.voltage[node], weight)
    else:
        _add(row, RHS, -weight * numbers.volts[node])
