"""Block: a stage known by its data sheet alone."""

from __future__ import annotations

from math import pi

from polebook.param import Param
from polebook.stages.base import Kind
from polebook.stages.opamp import buffer, output_node
from polebook.stages.stamper import GROUND, Given, Stamper, Value
from polebook.stages.terminals import output_capacitance

PARAMS = (
    Param("gain", "ratio", "open-circuit gain, signed V/V, or in dB with `inverting`", sign="nonzero", required=True),
    Param("inverting", "flag", "sign of a gain given in dB: true turns it over"),
    Param("gain_into", "resistance", "load that `gain` was measured with (absent = none)"),
    Param("rin", "resistance", "input resistance to ground (absent = open)"),
    Param("cin", "capacitance", "input capacitance to ground", role="high", sign="nonnegative"),
    Param("rout", "resistance", "output resistance", sign="nonnegative", default="1m"),
    Param("cout", "capacitance", "output capacitance to ground", role="high", sign="nonnegative"),
    Param("c_bridge", "capacitance", "capacitance from input to output", role="high", sign="nonnegative"),
    Param("r_bridge", "resistance", "resistance from input to output"),
    Param("poles", "quantities", "real upper poles", role="high", of="frequency"),
    Param("lower_poles", "quantities", "high-pass corners", role="low", of="frequency"),
    Param("en", "density_v", "input voltage noise", sign="nonnegative"),
    Param("en_corner", "frequency", "corner of the voltage noise", sign="nonnegative"),
    Param("in", "density_a", "input current noise", sign="nonnegative"),
    Param("in_corner", "frequency", "corner of the current noise", sign="nonnegative"),
    Param("nf", "decibel", "noise figure at 290 K, in place of en", sign="nonnegative"),
    Param("nf_source", "resistance", "source resistance that nf was measured with", default="50"),
    Param("clip", "voltage", "peak output voltage at which it clips"),
    Param("slew", "per_second", "fastest slope of the output"),
    Param("iq", "current", "quiescent supply current", sign="nonnegative"),
    Param("vout", "voltage", "quiescent output voltage (default midway between the rails)", sign="any"),
)

KINDS = (Kind("block", "block", (), PARAMS, "a stage known by its data sheet: gain, impedances, poles, noise"),)


def open_gain(given: Given) -> Value:
    """Open-circuit gain, V/V: the data sheet's, freed of the load that it was measured with."""
    gain, load, rout = given.number("gain"), given.number("gain_into"), given.number("rout")
    return gain if load is None or rout is None else gain * (1 + rout / load)


def stamp(st: Stamper, before: int, given: Given) -> int:
    """input - couple - a; an ideal amplifier, its poles one by one, a buffer behind rout; bridges from a."""
    a = st.series("a", before, "in", [("couple", "C-low", given.number("couple"))])
    st.resistor("rin", a, GROUND, given.number("rin"))
    st.capacitor("cin", a, GROUND, given.number("cin"))
    x = st.driven("gain", "")
    st.amplifier(x, a, GROUND, open_gain(given))
    for name, count, storage in (("pole", given.poles, st.lag), ("lower", given.lower_poles, st.washout)):
        for k in range(1, count + 1):
            key = "poles" if name == "pole" else "lower_poles"
            previous, x = x, st.driven(f"{name}{k}", f"{name}{k}")
            st.amplifier(x, previous, GROUND, 1.0)
            storage(f"{name}{k}", x, 1 / (2 * pi * _frequency(given, key, k)))
    rout = given.number("rout")
    o = output_node(st, rout)
    buffer(st, x, o, rout)
    st.capacitor("cout", o, GROUND, given.number("cout"))
    st.capacitor("c_bridge", a, o, given.number("c_bridge"), bridge=True)
    st.resistor("r_bridge", a, o, given.number("r_bridge"), bridge=True)
    output_capacitance(st, given, o)
    return o


def _frequency(given: Given, key: str, k: int) -> Value:
    value = given.number(f"{key}.{k}")
    if value is None:
        raise KeyError(f"{key}.{k}")
    return value


STAMPS = {"block": stamp}
