"""Common-emitter, common-source, common-cathode: driven at the control terminal, taken at the output terminal."""

from __future__ import annotations

from polebook.stages.base import device_kind
from polebook.stages.stamper import Given, Stamper
from polebook.stages.terminals import ACROSS_OUTPUT, control, device, lower_network, output_network, typed

SLOTS = ("current", "across", "bias_top", "bias_bottom", "bias_single", "stopper", "r_out", "l_peak", "r_low", "c_peak",
         "r_low_bypassed", "c_bypass", "rf", "c_rf", "c_comp", "r_comp", "output_to", "lower_to")
ZERO = frozenset({"r_low"})  # 0: the lower terminal straight at what stands below

KINDS = (
    device_kind("common-emitter", "inverting", ("bjt",), "bipolar stage, output at the collector", SLOTS, ZERO),
    device_kind("common-source", "inverting", ("mosfet", "jfet"), "FET stage, output at the drain", SLOTS, ZERO),
    device_kind("common-cathode", "inverting", ("triode",), "valve stage, output at the anode", SLOTS, ZERO),
)


def stamp(st: Stamper, before: int, given: Given) -> int:
    """input - couple - a (bias) - stopper - control - rx - inner; the bridges from the control to the output."""
    terminal, b = control(st, given, before)
    lower = lower_network(st, given)
    out = st.node("out", "out")
    device(st, given.figures, given.noise, b, out, lower, bridging=ACROSS_OUTPUT)
    st.link(terminal, out, [typed(given, "rf", "R"), ("c_rf", "C-low", given.number("c_rf"))], bridge=True)
    if st.stands(given.number("c_comp")):
        comp = st.series("comp", terminal, "in", [("r_comp", "R", given.number("r_comp"))])
        st.capacitor("c_comp", comp, out, given.number("c_comp"), bridge=True)
    output_network(st, given, out)
    return out


STAMPS = {"inverting": stamp}
