"""Emitter, source and cathode followers: driven at the control terminal, taken at the lower terminal."""

from __future__ import annotations

from polebook.stages.base import device_kind
from polebook.stages.stamper import GROUND, Given, Stamper
from polebook.stages.terminals import ACROSS_LOWER, control, device, output_capacitance, slot

SLOTS = ("current", "across", "bias_top", "bias_bottom", "bias_single", "stopper", "r_low", "output_to", "lower_to")

KINDS = (
    device_kind("emitter-follower", "follower", ("bjt",), "bipolar follower, output at the emitter", SLOTS),
    device_kind("source-follower", "follower", ("mosfet", "jfet"), "FET follower, output at the source", SLOTS),
    device_kind("cathode-follower", "follower", ("triode",), "valve follower, output at the cathode", SLOTS),
)


def stamp(st: Stamper, before: int, given: Given) -> int:
    """As the inverting kinds up to the inner control; the output terminal on its rail, the lower one the output."""
    _, b = control(st, given, before)
    out = st.node("out", "out")
    device(st, given.figures, given.noise, b, GROUND, out, bridging=ACROSS_LOWER)
    part, value = slot(given, "r_low")
    st.resistor(part, out, GROUND, value)
    output_capacitance(st, given, out)
    return out


STAMPS = {"follower": stamp}
