"""In which region of its law a device stands."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.circuit.bias_laws import Get
from polebook.circuit.bias_solution import Operating
from polebook.devices import fet
from polebook.quantity import engineering

KEPT = "the active-region law is kept all the same, so its figures are not to be trusted"


def region(family: str, card: Get, sign: int, point: Operating) -> Iterator[tuple[str, str]]:
    """(what, why) of every way in which an operating point (plain floats) leaves the active region."""
    if point.current is not None and point.current <= 0.0:
        yield "is cut off", KEPT
        return
    across = point.across
    if point.output_v is not None and point.lower_v is not None:
        across = sign * (point.output_v - point.lower_v)  # what the rails leave, also where a voltage is stated
    if family == "bjt":
        least = card("vce_sat")
        yield from _short(across, 0.2 if least is None else least, "is saturated, vce", "vce_sat")
    elif family == "triode":
        if across is not None and across <= 0.0:
            yield f"has no anode voltage, vak is {engineering(across, 'V')}", KEPT
        if point.control_v is not None and point.lower_v is not None and point.control_v > point.lower_v:
            yield (f"has a positive grid, vgk is {engineering(point.control_v - point.lower_v, 'V')}",
                   "grid current, which the law leaves out, loads what drives it")
    else:
        yield from _channel(card, across, point.current)


def _channel(card: Get, across: float | None, current: float | None) -> Iterator[tuple[str, str]]:
    idss, k = card("idss"), fet.strength(card, current)
    if idss is not None and current is not None and current > idss:
        yield (f"runs above idss, id is {engineering(current, 'A')} and idss {engineering(idss, 'A')}",
               "its gate is forward biased, and the gate current is left out")
    if k is not None and current is not None:
        yield from _short(across, fet.overdrive(k, current), "is not pinched off, vds", "the overdrive 2·id/gm")


def _short(across: float | None, least: float, what: str, limit: str) -> Iterator[tuple[str, str]]:
    """A voltage across the device below what its law needs."""
    if across is not None and across < least:
        yield f"{what} is {engineering(across, 'V')}, below {limit} of {engineering(least, 'V')}", KEPT
