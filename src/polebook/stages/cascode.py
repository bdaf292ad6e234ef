"""Cascode: an inverting device below, a second one above it with its control terminal at signal ground."""

from __future__ import annotations

from polebook.param import Param
from polebook.stages.base import device_kind, device_param
from polebook.stages.stamper import GROUND, Given, Stamper
from polebook.stages.terminals import ACROSS_OUTPUT, control, device, lower_network, output_network

SLOTS = ("current", "across", "bias_top", "bias_bottom", "bias_single", "stopper", "r_out", "l_peak", "r_low", "c_peak",
         "r_low_bypassed", "c_bypass", "output_to", "lower_to")
ZERO = frozenset({"r_low"})
HEAD = (device_param("lower device"), Param("upper", "text", "card of the upper device (default: the same card)"))

KINDS = (
    device_kind("cascode", "cascode", ("bjt", "mosfet", "jfet"),
                "two devices stacked, output at the upper one's output terminal", SLOTS, ZERO, HEAD),
)


def stamp(st: Stamper, before: int, given: Given) -> int:
    """The lower device as the inverting kinds, its output terminal the upper one's lower terminal."""
    _, b = control(st, given, before)
    lower = lower_network(st, given)
    middle = st.node("mid", "mid")
    device(st, given.figures, given.noise, b, middle, lower, bridging=ACROSS_OUTPUT)
    upper = st.series("inner_upper", GROUND, "mid", [("rx_upper", "R", given.upper.get("rx"))])
    out = st.node("out", "out")
    device(st, given.upper, given.upper_noise, upper, out, middle, after="_upper")
    output_network(st, given, out)
    return out


STAMPS = {"cascode": stamp}
