"""One solution of a group: elimination of what is linear, Newton on the drives of fets and valves, back again."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from polebook.circuit.bias_group import RHS, Row
from polebook.circuit.bias_order import Order, clear
from polebook.devices.num import Value

STEPS = 30
START_V = 1.0  # every drive starts here, in the active region: the laws are convex, so Newton comes from above
RESIDUAL = 1e-12

Characteristic = Callable[[Value, Value], tuple[Value, Value]]  # (factor, drive) -> (current, derivative)


@dataclass(frozen=True, slots=True)
class Nonlinear:
    """A device with a drive: its columns and its law."""

    drive: int
    current: int
    law: Characteristic
    factor: Value


def solve_rows(rows: list[Row], order: Order, devices: Sequence[Nonlinear]) -> dict[int, Value]:
    """Column -> value. A fixed number of steps, no branch on a value, so that complex steps and arrays pass.

    Rows are used up.
    """
    for pivot in order.linear:
        clear(rows, pivot)
    for pivot in order.drives:
        clear(rows, pivot)
    found = newton(rows, order, devices) if devices else {}
    for pivot in reversed(order.linear):
        row = rows[pivot.row]
        total = row.get(RHS, 0.0)
        for column, value in row.items():
            if column != RHS and column != pivot.column:
                total = total - value * found[column]
        found[pivot.column] = total / row[pivot.column]
    return found


def newton(rows: list[Row], order: Order, devices: Sequence[Nonlinear]) -> dict[int, Value]:
    """Drives and currents from the rows left: drive + sum of coefficients·currents = right-hand side.

    Device by device first, the others' currents standing, which already solves what is coupled one way only;
    then all together.
    """
    by_drive = {pivot.column: rows[pivot.row] for pivot in order.drives}
    count = range(len(devices))
    lines = [by_drive[device.drive] for device in devices]
    scale = [line[device.drive] for line, device in zip(lines, devices, strict=True)]
    right = [line.get(RHS, 0.0) / s for line, s in zip(lines, scale, strict=True)]
    ohms = [[line.get(other.current, 0.0) / s for other in devices] for line, s in zip(lines, scale, strict=True)]
    drives: list[Value] = [START_V for _ in count]
    currents: list[Value] = [0.0 for _ in count]
    for k in count:
        law, factor, ohm = devices[k].law, devices[k].factor, ohms[k][k]
        target = right[k]
        for other in count:
            if other != k:
                target = target - ohms[k][other] * currents[other]
        u = drives[k]
        for _ in range(STEPS):
            current, slope = law(factor, u)
            u = u - (u + ohm * current - target) / (1.0 + ohm * slope)
        drives[k], currents[k] = u, law(factor, u)[0]
    if len(devices) > 1:
        drives = _together(devices, ohms, right, drives)
    found: dict[int, Value] = {}
    for device, u in zip(devices, drives, strict=True):
        found[device.drive], found[device.current] = u, device.law(device.factor, u)[0]
    return found


def _together(devices: Sequence[Nonlinear], ohms: list[list[Value]], right: list[Value],
              drives: list[Value]) -> list[Value]:
    count = range(len(devices))
    for _ in range(STEPS):
        laws = [device.law(device.factor, u) for device, u in zip(devices, drives, strict=True)]
        matrix = [[ohms[k][n] * laws[n][1] + (1.0 if k == n else 0.0) for n in count] for k in count]
        miss = []
        for k in count:
            rest = drives[k] - right[k]
            for n in count:
                rest = rest + ohms[k][n] * laws[n][0]
            miss.append(rest)
        drives = [u - change for u, change in zip(drives, _gauss(matrix, miss), strict=True)]
    return drives


def _gauss(matrix: list[list[Value]], right: list[Value]) -> list[Value]:
    """Solution of a small dense system whose diagonal leads."""
    n = len(right)
    for k in range(n):
        for row in range(k + 1, n):
            factor = matrix[row][k] / matrix[k][k]
            for column in range(k + 1, n):
                matrix[row][column] = matrix[row][column] - factor * matrix[k][column]
            right[row] = right[row] - factor * right[k]
    for k in reversed(range(n)):
        for column in range(k + 1, n):
            right[k] = right[k] - matrix[k][column] * right[column]
        right[k] = right[k] / matrix[k][k]
    return right


def holds(rows: list[Row], found: dict[int, Value], floors: dict[int, Value]) -> Value:
    """Whether every row's terms cancel to 1e-12 of their sum, an unknown counting as its floor more than it is.

    Without the floors (a volt, and what it drives through a resistor) a network in which nothing flows could
    not hold.
    """
    result: Value = True
    for row in rows:
        rest = -row.get(RHS, 0.0)
        size = abs(rest)
        for column, value in row.items():
            if column != RHS:
                term = value * found[column]
                rest = rest + term
                size = size + abs(term)
                if column in floors:
                    size = size + abs(value * floors[column])
        result = result & (abs(rest) <= RESIDUAL * size)
    return result
