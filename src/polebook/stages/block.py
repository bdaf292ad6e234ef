"""Block: a stage known by its data sheet alone."""

from __future__ import annotations

from math import pi

from polebook.devices.num import BOLTZMANN
from polebook.devices.spectrum import T0_K, Noise, Spectrum
from polebook.formula import Formula
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

EN_OF_NF = Formula("parts.en.nf", "en = sqrt(4·k_B·T_0·nf_source·(10^(nf/10) - 1))",
                   "definition of the noise figure at 290 K (H. T. Friis, Noise figures of radio receivers, Proc. IRE "
                   "32, 1944; from memory)")
FORMULAS = (EN_OF_NF,)

KINDS = (Kind("block", "block", (), PARAMS, "a stage known by its data sheet: gain, impedances, poles, noise"),)


def open_gain(given: Given) -> Value:
    """Open-circuit gain, V/V: the data sheet's, freed of the load that it was measured with."""
    gain, load, rout = given.number("gain"), given.number("gain_into"), given.number("rout")
    return gain if load is None or rout is None else gain * (1 + rout / load)


def noise(given: Given) -> Noise:
    """Voltage noise in series with the whole input ("en"), current noise across it ("in"), as far as the file has them.

    A noise figure stands for the voltage noise that makes it with nf_source at 290 K.
    """
    found: Noise = {}
    density, nf, against = given.number("en"), given.number("nf"), given.number("nf_source")
    corner, current = given.number("en_corner"), given.number("in")
    if density is not None:
        found["en"] = Spectrum(density * density, 0.0 if corner is None else corner)
    elif nf is not None and against is not None:
        excess = 10.0 ** (nf / 10.0) - 1.0
        found["en"] = Spectrum(4.0 * BOLTZMANN * T0_K * against * excess, 0.0 if corner is None else corner)
    if current is not None:
        corner = given.number("in_corner")
        found["in"] = Spectrum(current * current, 0.0 if corner is None else corner)
    return found


def stamp(st: Stamper, before: int, given: Given) -> int:
    """input - couple - a; an ideal amplifier, its poles one by one, a buffer behind rout; bridges from a."""
    a = st.series("a", before, "in", [("couple", "C-low", given.number("couple"))])
    st.resistor("rin", a, GROUND, given.number("rin"), silent=True)
    st.capacitor("cin", a, GROUND, given.number("cin"))
    x = first = st.driven("gain", "")
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
    sources = noise(given)
    if "en" in sources:
        st.noise_voltage("en", first, a, sources["en"])
    if "in" in sources:
        st.noise_current("in", a, GROUND, sources["in"])
    return o


def _frequency(given: Given, key: str, k: int) -> Value:
    value = given.number(f"{key}.{k}")
    if value is None:
        raise KeyError(f"{key}.{k}")
    return value


STAMPS = {"block": stamp}
