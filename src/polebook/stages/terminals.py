"""What the three-terminal topologies stamp in the same way: the device and the network at its terminals."""

from __future__ import annotations

from polebook.devices.spectrum import Noise
from polebook.stages.base import slot_key
from polebook.stages.stamper import GROUND, Figures, Given, Labelled, Stamper, Value


def slot(given: Given, name: str) -> tuple[str, Value | None]:
    """(key, value) of a general part as the stage's family names it."""
    key = slot_key(name, given.family)
    return (key, given.number(key)) if key else ("", None)


def typed(given: Given, name: str, type_: str) -> tuple[str, str, Value | None]:
    """(key, type, value) of a general part."""
    key, value = slot(given, name)
    return (key, type_, value)


def bias_parts(given: Given) -> Labelled:
    """The control's bias resistors: at midband all of them stand from the control side to ground."""
    keys = dict.fromkeys(slot(given, name)[0] for name in ("bias_top", "bias_bottom", "bias_single"))
    return [(key, "R", given.number(key)) for key in keys if key]


def control(st: Stamper, given: Given, before: int, site: str = "in") -> tuple[int, int]:
    """Coupling, bias and stopper; returns the control terminal and the node behind the device's own `rx`."""
    a = st.series("a", before, site, [("couple", "C-low", given.number("couple"))])
    for part, _, value in bias_parts(given):
        st.resistor(part, a, GROUND, value)
    terminal = st.series("control", a, site, [("stopper", "R", given.number("stopper"))])
    return terminal, st.series("inner", terminal, site, [("rx", "R", given.figures.get("rx"))])


def lower_network(st: Stamper, given: Given) -> int:
    """The lower resistors and their bypass down to the rail; returns the lower terminal."""
    foot = st.series("foot", GROUND, "", [typed(given, "r_low_bypassed", "R"), typed(given, "c_bypass", "C-low")])
    lower = st.series("lower", foot, "", [typed(given, "r_low", "R")])
    st.capacitor("c_peak", lower, foot, given.number("c_peak"))
    return lower


def output_network(st: Stamper, given: Given, out: int) -> None:
    """The output resistor and its peaking coil, and what is fitted or strayed from the output to ground."""
    st.link(out, GROUND, [typed(given, "r_out", "R"), ("l_peak", "L-high", given.number("l_peak"))])
    output_capacitance(st, given, out)


def output_capacitance(st: Stamper, given: Given, out: int) -> None:
    """The two capacitances that every kind may carry at its output."""
    st.capacitor("stray", out, GROUND, given.number("stray"))
    st.capacitor("c_load", out, GROUND, given.number("c_load"))


def device(st: Stamper, figures: Figures, noise: Noise, b: int, output: int, lower: int, after: str = "",
           bridging: tuple[str, ...] = ()) -> None:
    """The small-signal device between the inner control b, output and lower terminals, and its noise.

    `after` is added to every part's name; `bridging` names the capacitances that bridge the stage.
    """
    st.transconductance("gm" + after, output, lower, b, lower, figures.get("gm"))
    st.resistor("rpi" + after, b, lower, figures.get("rpi"), silent=True)
    st.resistor("ro" + after, output, lower, figures.get("ro"), silent=True)
    for name in ("cpi", "cgs", "cgk"):
        st.capacitor(name + after, b, lower, figures.get(name), name in bridging)
    for name in ("cmu", "cgd", "cga"):
        st.capacitor(name + after, b, output, figures.get(name), name in bridging)
    for name in ("ccs", "cdb"):
        st.capacitor(name + after, output, GROUND, figures.get(name))
    for name in ("cds", "cak"):
        st.capacitor(name + after, output, lower, figures.get(name))
    for name, spectrum in noise.items():
        st.noise_current(name + after, output if name == "gm" else b, lower, spectrum)


ACROSS_OUTPUT = ("cmu", "cgd", "cga")
ACROSS_LOWER = ("cpi", "cgs", "cgk")
