"""From a group's structure to a plan of its solution, and from values to its unknowns."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.circuit.bias_candidates import without_idle_sources
from polebook.circuit.bias_group import RHS, Columns, Group, Numbers, assemble, columns
from polebook.circuit.bias_laws import Get, characteristic, law
from polebook.circuit.bias_network import MIDWAY, Paths
from polebook.circuit.bias_newton import Nonlinear, holds, solve_rows
from polebook.circuit.bias_order import Order, order
from polebook.circuit.bias_rank import Choice, choose
from polebook.devices.num import Value

CURRENT_FLOOR = 1e-3  # A


@dataclass(frozen=True, slots=True)
class Compiled:
    """A group with its unknowns, the rows that settle them and the order of their elimination."""

    group: Group
    cols: Columns
    choice: Choice
    order: Order


@dataclass(frozen=True, slots=True)
class Solution:
    """The unknowns of a group: `found` by column, those of `choice.settled` being of use."""

    compiled: Compiled
    numbers: Numbers
    found: dict[int, Value]
    converged: Value

    def voltage(self, node: int) -> Value | None:
        """Voltage of a node of the group, None where nothing settles it."""
        if node in self.numbers.volts:
            return self.numbers.volts[node]
        return self.unknown(self.compiled.cols.voltage[node])

    def unknown(self, column: int) -> Value | None:
        """An unknown by its column, None where nothing settles it."""
        return self.found[column] if column in self.compiled.choice.settled else None


def compiled(group: Group, get: Get) -> Compiled:
    """Plans a group at the file's own values.

    A drive that nothing settles, or that no row is left for, loses its law, and the group is planned anew: so no
    step of Newton ever runs on what has no answer.
    """
    group = without_idle_sources(group)
    lawful = [law(device, get).drop is not None for device in group.devices]
    while True:
        cols = columns(group, lawful)
        choice = choose(group, cols, lawful)
        idle = {u for u in cols.drive if u >= 0 and u not in choice.settled}
        if not idle:
            plan = order(_rows(group, cols, choice, numbers(group, get)), choice.rows, cols, group)
            if not plan.stuck:
                return Compiled(group, cols, choice, plan)
            idle |= plan.stuck
        lawful = [known and u not in idle for known, u in zip(lawful, cols.drive, strict=True)]


def level(name: str, get: Get) -> Value:
    """Voltage of a held node."""
    if name == "ground":
        return 0.0
    if name == MIDWAY:
        return 0.5 * (level("supply.positive", get) + level("supply.negative", get))
    value = get(name)
    return 0.0 if value is None else value


def numbers(group: Group, get: Get) -> Numbers:
    """The values of a group's parts."""
    return Numbers(
        [_ohms(resistor.paths, get) for resistor in group.grounded],
        [_ohms(resistor.paths, get) for resistor in group.branches],
        {node: level(name, get) for node, name in group.held.items()},
        [law(device, get) for device in group.devices],
        [get(device.stopper) if device.stopper else None for device in group.devices],
        [get(device.across) if device.across else None for device in group.devices])


def _ohms(paths: Paths, get: Get) -> Value:
    ohms: Value = get(paths[0])
    for path in paths[1:]:
        ohms = ohms + get(path)
    return ohms


def _rows(group: Group, cols: Columns, choice: Choice, values: Numbers) -> list[dict[int, Value]]:
    every = assemble(group, cols, values)
    return [every[k] for k in choice.rows] + [{column: 1.0} for column in choice.pins]


def solution(plan: Compiled, get: Get) -> Solution:
    """Solves a group for the values that `get` gives: floats, arrays, complex numbers."""
    group, cols = plan.group, plan.cols
    values = numbers(group, get)
    devices = [
        Nonlinear(u, i, characteristic(device.family), at.factor)
        for device, at, u, i in zip(group.devices, values.laws, cols.drive, cols.current, strict=True) if u >= 0
    ]
    rows = _rows(group, cols, plan.choice, values)
    found = solve_rows([dict(row) for row in rows], plan.order, devices)
    kept = [row for row in rows if all(column in plan.choice.settled for column in row if column != RHS)]
    return Solution(plan, values, found, holds(kept, found, _floors(plan, values, found)))


def _floors(plan: Compiled, values: Numbers, found: dict[int, Value]) -> dict[int, Value]:
    """What rounding alone may leave of an unknown: that of the group's voltages, and of the currents they drive."""
    cols = plan.cols
    volts: Value = 1.0
    for column in cols.voltage.values():
        volts = volts + abs(found[column])
    floors = dict.fromkeys(cols.voltage.values(), volts)
    floors.update((column, volts / ohms) for column, ohms in zip(cols.branch, values.branches, strict=True))
    floors.update((i, CURRENT_FLOOR) for i, u in zip(cols.current, cols.drive, strict=True) if i >= 0 and u < 0)
    return floors
