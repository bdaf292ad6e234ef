"""What a device's card says about d.c., in the one form that the equations of a group use.

All families follow  V_control - V_lower + tilt·(V_output - V_lower) = sign·(drop + drive),  the drive a function of
the current: none for a bjt (drop = vbe), the overdrive for a fet (drop = cut-off voltage), (ia/P)^(2/3) for a triode
(tilt = 1/mu). The control draws share·current: 1/beta for a bjt, else none.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from polebook.circuit.bias_network import Device
from polebook.devices import bjt, fet, triode
from polebook.devices.num import Value

Get = Callable[[str], Value | None]


@dataclass(frozen=True, slots=True)
class Law:
    """A device's d.c. figures.

    current  the stated quiescent current in A, None where it is to be solved
    drop     V; with a stated current the drive is in it; None where the card doesn't tell it
    factor   k (A/V²) of a fet, P (A/V^1.5) of a triode; None where the card doesn't tell it
    above    what a cascode's upper device loses at its control, as a share of its output current
    """

    current: Value | None
    share: Value
    drop: Value | None
    tilt: Value
    factor: Value | None
    above: Value


def reading(card: str, get: Get) -> Get:
    """The numbers of a card by key."""
    prefix = f"device.{card}."
    return lambda key: get(prefix + key)


def share_of(family: str, card: Get) -> Value | None:
    """Control current over output current: 1/beta for a bjt, None where it has no beta; 0 for the others."""
    if family != "bjt":
        return 0.0
    beta = bjt.current_gain(card)
    return None if beta is None else 1.0 / beta


def law(device: Device, get: Get) -> Law:
    """The device's law with the numbers that `get` gives."""
    card = reading(device.card, get)
    current = get(device.current) if device.current else None
    above = share_of(device.upper_family, reading(device.upper, get)) if device.upper else 0.0
    above = 0.0 if above is None else above
    if device.family == "triode":
        mu = triode.amplification(card)
        p = None if mu is None else triode.perveance(card, current)
        drop = None if p is None else 0.0 if current is None else triode.drive(p, current)
        return Law(current, 0.0, drop, 0.0 if mu is None else 1.0 / mu, p, above)
    share = share_of(device.family, card)
    if share is None:  # without beta: a stated current is taken to draw none, a current to be solved can't be
        return Law(current, 0.0, None if current is None else control_drop("bjt", card, current, get), 0.0, None, above)
    drop = control_drop(device.family, card, current, get)
    factor = None if device.family == "bjt" else fet.strength(card, current)
    return Law(current, share, None if factor is None and device.family != "bjt" else drop, 0.0, factor, above)


def control_drop(family: str, card: Get, current: Value | None, get: Get) -> Value | None:
    """Control to lower voltage of a bjt or fet at a current, as for n-types; at no drive where current is None."""
    if family == "bjt":
        celsius = get("supply.temperature")
        return bjt.base_emitter_voltage(card, 25.0 if celsius is None else celsius)
    k = fet.strength(card, current)
    cut_off = fet.cut_off(card, k)
    if cut_off is None or k is None or current is None:
        return cut_off
    return cut_off + fet.overdrive(k, current)


def characteristic(family: str) -> Callable[[Value, Value], tuple[Value, Value]]:
    """(factor, drive) -> (current, its derivative)."""
    return triode.space_charge if family == "triode" else fet.channel


def lacking(device: Device, get: Get) -> tuple[str, ...]:
    """Keys of the card without which its current can't be solved, () where it tells all."""
    card = reading(device.card, get)
    if device.family == "bjt":
        return () if share_of("bjt", card) is not None else ("beta",)
    if device.family == "triode":
        missing = [] if triode.amplification(card) is not None else ["mu"]
        if triode.measured_gm(card) is None:
            missing.append("gm")
        return tuple(missing if card("gm_ia") is not None else [*missing, "gm_ia"])
    if device.family == "mosfet":
        k = () if fet.strength(card) is not None else ("gm_id" if card("gm") is not None else "k",)
        return (*k, *(() if card("vgs_th") is not None else ("vgs_th",)))
    if fet.strength(card) is None:
        return tuple(key for key in ("idss", "vgs_off") if card(key) is None)
    return () if fet.cut_off(card, fet.strength(card)) is not None else ("idss",)
