"""Where a new stage stands at d.c.: currents and voltages for its rail, and the parts that bring them about.

Rules of thumb, common practice: half the rail or a little less across the device, a tenth of it across the lower
resistor, ten base currents through the divider.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

from polebook import series
from polebook.chain import start_cards as cards
from polebook.quantity import letter

CORNER_HZ = 10.0  # for each coupling and bypass, so that a chain of a few stages passes 50 Hz
Row = tuple[str, str, str]  # key, value as written, comment
_DIVIDER_OHM = 2e6  # of a gate
_ACROSS = 0.45  # of the rail, across a device with an output resistor
_LOW, _LEAST_V, _MOST_V = 0.1, 0.3, 2.0  # across the lower resistor
_GRID = 0.4  # of vak/mu: the grid's bias


@dataclass(frozen=True, slots=True)
class Point:
    """Current in A; drop: control to lower terminal in V, signed; low: lower terminal to ground in V."""

    amps: float
    drop: float
    low: float


def grounded(family: str, rail: float) -> Point:
    """Of a stage with an output resistor: the lower terminal near ground."""
    low = min(max(_LOW * rail, _LEAST_V), _MOST_V)
    if family == "bjt":
        return Point(1e-3, cards.VBE, low)
    if family == "mosfet":
        return Point(1e-3, cards.MOSFET_VGS, low)
    if family == "jfet":
        return Point(cards.JFET_A, cards.JFET_VGS, -cards.JFET_VGS)
    return valve(0.5 * rail, _GRID)


def follower(family: str, rail: float) -> Point:
    """Of a follower: the lower terminal near half the rail, with room for the control above it."""
    if family == "triode":
        return valve(rail, 0.6)  # the grid can only stand at ground: nearly all of the rail is across the valve
    drop = {"bjt": cards.VBE, "mosfet": cards.MOSFET_VGS, "jfet": cards.JFET_VGS}[family]
    amps = cards.JFET_A if family == "jfet" else 2e-3 if rail <= cards.HIGH_V else 1e-3
    return Point(amps, drop, min(_ACROSS * rail, 0.9 * rail - drop))


def valve(across: float, share: float) -> Point:
    """A triode with `across` volts from anode to cathode and the grid at `share` of across/mu below the cathode."""
    grid = share * across / cards.MU
    return Point(cards.PERVEANCE * (across / cards.MU - grid) ** 1.5, -grid, grid)


def output_ohm(point: Point, rail: float, across: float = _ACROSS) -> float:
    """The output resistor that leaves `across` of the rail to the device."""
    return (rail - point.low - across * rail) / point.amps


def divider(family: str, point: Point, rail: float) -> list[Row]:
    """The two bias resistors of the control."""
    volts = point.low + point.drop
    total = rail * cards.BETA / (10 * point.amps) if family == "bjt" else _DIVIDER_OHM
    key = "rb" if family == "bjt" else "rg"
    what = {"bjt": "base", "jfet": "gate", "mosfet": "gate"}[family]
    return [
        (f"{key}1", ohm(total * (1 - volts / rail)), f"{what} near {volts:.2g} V"),
        (f"{key}2", ohm(total * volts / rail), ""),
    ]


def divider_ohm(family: str, point: Point, rail: float) -> float:
    """The two in parallel."""
    share = (point.low + point.drop) / rail
    return (rail * cards.BETA / (10 * point.amps) if family == "bjt" else _DIVIDER_OHM) * share * (1 - share)


def ohm(value: float) -> str:
    """The next of E24, as written in a file."""
    return f'"{letter(series.nearest(value, "E24"), "resistance")}"'


def farad(resistance: float, hertz: float = CORNER_HZ) -> str:
    """The least capacitor of E6 that is through at `hertz` on `resistance`, as written in a file."""
    return f'"{letter(series.at_least(1 / (2 * pi * hertz * resistance), "E6"), "capacitance")}"'
