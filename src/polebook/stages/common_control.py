"""Common-base, common-gate, common-grid: driven at the lower terminal, taken at the output terminal."""

from __future__ import annotations

from polebook.stages.base import device_kind
from polebook.stages.stamper import GROUND, Given, Stamper
from polebook.stages.terminals import bias_parts, device, output_network, slot, typed

SLOTS = ("current", "across", "bias_top", "bias_bottom", "bias_single", "c_control", "stopper", "r_out", "l_peak",
         "r_low", "output_to", "lower_to")

KINDS = (
    device_kind("common-base", "common_control", ("bjt",), "bipolar stage driven at the emitter", SLOTS),
    device_kind("common-gate", "common_control", ("mosfet", "jfet"), "FET stage driven at the source", SLOTS),
    device_kind("common-grid", "common_control", ("triode",), "valve stage driven at the cathode", SLOTS),
)


def stamp(st: Stamper, before: int, given: Given) -> int:
    """input - couple - lower terminal; the control behind bias and bypass, straight to ground without them."""
    lower = st.series("lower", before, "in", [("couple", "C-low", given.number("couple"))])
    part, value = slot(given, "r_low")
    st.resistor(part, lower, GROUND, value)
    a = st.series("a", GROUND, "in", [*bias_parts(given), typed(given, "c_control", "C-low")])
    terminal = st.series("control", a, "in", [("stopper", "R", given.number("stopper"))])
    b = st.series("inner", terminal, "in", [("rx", "R", given.figures.get("rx"))])
    out = st.node("out", "out")
    device(st, given.figures, given.noise, b, out, lower)
    output_network(st, given, out)
    return out


STAMPS = {"common_control": stamp}
