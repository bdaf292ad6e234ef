"""Operational-amplifier stages: non-inverting, inverting, transimpedance."""

from __future__ import annotations

from polebook.devices.spectrum import Noise
from polebook.param import Param
from polebook.stages.base import Kind, device_param
from polebook.stages.stamper import GROUND, Figures, Given, Stamper, Value
from polebook.stages.terminals import output_capacitance

_DEVICE = device_param("operational amplifier")
_CF = Param("cf", "capacitance", "capacitor across rf", role="high", sign="nonnegative")
_TAIL = (
    Param("r_out", "resistance", "resistor in series between amplifier and stage output", sign="nonnegative"),
    Param("vout", "voltage", "quiescent output voltage (default midway between the rails)", sign="any"),
)
_RF = Param("rf", "resistance", "feedback resistor, output to inverting input", required=True)
_P_SIDE = Param("r_bias", "resistance", "resistor from the non-inverting input to ground (absent = straight)",
                sign="nonnegative")

NONINVERTING = (
    _DEVICE,
    Param("r_bias", "resistance", "resistor from the non-inverting input to ground"),
    Param("rf", "resistance", "feedback resistor, output to inverting input (may be 0; default 0 without rg)",
          sign="nonnegative"),
    _CF,
    Param("rg", "resistance", "resistor from the inverting input to ground (absent = unity gain)"),
    Param("c_rg", "capacitance", "capacitor in series with rg, on its ground side", role="low"),
    *_TAIL,
)
INVERTING = (
    _DEVICE,
    Param("rg", "resistance", "resistor from stage input to inverting input", sign="nonnegative", required=True),
    _RF, _CF, _P_SIDE, *_TAIL,
)
TRANSIMPEDANCE = (_DEVICE, _RF, _CF, _P_SIDE, *_TAIL)

KINDS = (
    Kind("noninverting", "noninverting", ("opamp",), NONINVERTING, "op-amp driven at its non-inverting input"),
    Kind("inverting", "inverting_opamp", ("opamp",), INVERTING, "op-amp driven through rg at its inverting input"),
    Kind("transimpedance", "transimpedance", ("opamp",), TRANSIMPEDANCE, "op-amp that turns a current into a voltage"),
)


def output_node(st: Stamper, rout: Value | None) -> int:
    """The node behind an output resistance; without one an ideal buffer drives it."""
    return st.node("o", "out") if st.stands(rout) else st.driven("o", "out")


def buffer(st: Stamper, x: int, o: int, rout: Value | None) -> None:
    """Ties the output node o to an ideal buffer at x, through rout where it stands."""
    if st.stands(rout):
        st.resistor("rout", x, o, rout, silent=True)
    else:
        st.amplifier(o, x, GROUND, 1.0)


def _amplifier(st: Stamper, figures: Figures, noise: Noise, p: int, n: int, o: int) -> None:
    """The op-amp from its inputs to o: what it loads them with, its poles, a buffer behind rout, its noise.

    `gbw` and `f2` of the figures are time constants, in seconds. Its voltage noise stands right ahead of what senses
    the inputs, behind rin, cin_diff and cin_cm: all of the input capacitance then counts in its gain.
    """
    st.resistor("rin", p, n, figures.get("rin"), silent=True)
    st.capacitor("cin_diff", p, n, figures.get("cin_diff"))
    for node in (p, n):
        st.capacitor("cin_cm", node, GROUND, figures.get("cin_cm"))
    x = first = st.driven("gbw", "gbw")
    st.amplifier(x, p, n, figures["a0"])
    st.lag("gbw", x, figures["gbw"])
    if st.stands(figures.get("f2")):
        second = st.driven("f2", "f2")
        st.amplifier(second, x, GROUND, 1.0)
        st.lag("f2", second, figures["f2"])
        x = second
    buffer(st, x, o, figures.get("rout"))
    if "en" in noise:
        st.noise_voltage("en", first, GROUND, noise["en"])
    for node in (p, n):
        if "in" in noise:
            st.noise_current("in", node, GROUND, noise["in"])


def _output(st: Stamper, given: Given, o: int) -> int:
    """r_out from o to the stage's output; o may be driven, then r_out is an admittance from it."""
    r_out = given.number("r_out")
    if st.stands(given.figures.get("rout")):
        out = st.series("out", o, "out", [("r_out", "R", r_out)])
    elif st.stands(r_out):
        out = st.node("out", "out")
        st.resistor("r_out", o, out, r_out)
    else:
        out = o
    output_capacitance(st, given, out)
    return out


def stamp_noninverting(st: Stamper, before: int, given: Given) -> int:
    """input - couple - p (r_bias); rf and cf from o to n; rg and c_rg from n to ground."""
    p = st.series("p", before, "in", [("couple", "C-low", given.number("couple"))])
    st.resistor("r_bias", p, GROUND, given.number("r_bias"))
    o = output_node(st, given.figures.get("rout"))
    rf = given.number("rf")
    n = st.node("n", "in") if st.stands(rf) else o
    _amplifier(st, given.figures, given.noise, p, n, o)
    st.resistor("rf", n, o, rf)
    st.capacitor("cf", n, o, given.number("cf"))
    st.link(n, GROUND, [("rg", "R", given.number("rg")), ("c_rg", "C-low", given.number("c_rg"))])
    return _output(st, given, o)


def _inverting_core(st: Stamper, given: Given, n: int) -> int:
    """p at ground through r_bias; rf and cf bridge the amplifier from n to o."""
    p = st.series("p", GROUND, "in", [("r_bias", "R", given.number("r_bias"))])
    o = output_node(st, given.figures.get("rout"))
    _amplifier(st, given.figures, given.noise, p, n, o)
    st.resistor("rf", n, o, given.number("rf"), bridge=True)
    st.capacitor("cf", n, o, given.number("cf"), bridge=True)
    return _output(st, given, o)


def stamp_inverting(st: Stamper, before: int, given: Given) -> int:
    """input - couple - rg - n."""
    a = st.series("a", before, "in", [("couple", "C-low", given.number("couple"))])
    return _inverting_core(st, given, st.series("n", a, "in", [("rg", "R", given.number("rg"))]))


def stamp_transimpedance(st: Stamper, before: int, given: Given) -> int:
    """input - couple - n."""
    return _inverting_core(st, given, st.series("n", before, "in", [("couple", "C-low", given.number("couple"))]))


STAMPS = {
    "noninverting": stamp_noninverting,
    "inverting_opamp": stamp_inverting,
    "transimpedance": stamp_transimpedance,
}
