"""The bipolar transistor: its card, its law, its small-signal figures.

Hybrid-pi model as in the textbooks; which formula stands for which figure is fixed by the chain format.
"""

from __future__ import annotations

from collections.abc import Mapping

from polebook.devices.missing import Lack, settle
from polebook.devices.num import CHARGE, TWO_PI, Reading, Value, floor_at, power, ratio, thermal_voltage
from polebook.devices.ratings import FREE_TEXT, RATINGS, family_key
from polebook.devices.spectrum import Noise, Spectrum
from polebook.formula import Formula
from polebook.param import Param

HYBRID_PI = "hybrid-pi model (P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, Analysis and Design of Analog " \
            "Integrated Circuits, 5th ed., Wiley, ch. 1; from memory)"
GM = Formula("parts.gm", "gm = ic/VT", HYBRID_PI)
RPI = Formula("parts.rpi", "rpi = beta/gm", HYBRID_PI)
RO = Formula("parts.ro", "ro = early_voltage/ic", HYBRID_PI)
VBE = Formula("devices.vbe", "vbe = vbe_25 - 0.002·(T - 25)", "common practice")
VCB = Formula("devices.vcb", "VCB = max(0, vce - vbe)", "definition")
CMU = Formula("parts.cmu", "cmu = cob·((1 + cob_v/built_in)/(1 + VCB/built_in))^grading", HYBRID_PI)
TAU_F = Formula("devices.tau_F", "tau_F = 1/(2·pi·ft) - (c_be0 + cob)·VT/ft_ic", HYBRID_PI)
CPI = Formula("parts.cpi", "cpi = gm·tau_F + c_be0", HYBRID_PI)
CPI_DEPLETION = Formula("parts.cpi", "cpi = c_be0, as the card tells no ft", HYBRID_PI)
LAW = Formula("bias.bjt", "V_control - V_lower = vbe, and the base draws ic/beta", "common practice")
SHOT = "shot noise (W. Schottky, 1918; P. R. Gray, P. J. Hurst, S. H. Lewis and R. G. Meyer, Analysis and Design of " \
       "Analog Integrated Circuits, 5th ed., Wiley, ch. 11; both from memory)"
NOISE_IC = Formula("noise.bjt.gm", "S = 2·q·ic", SHOT)
NOISE_IB = Formula("noise.bjt.ib", "S = 2·q·ib·(1 + flicker_corner/f)", SHOT)
IB = Formula("parts.ib", "ib = ic/beta", "definition")
FORMULAS = (GM, RPI, RO, CMU, CPI, VBE, VCB, TAU_F, LAW, NOISE_IC, NOISE_IB, IB)

PARAMS = (
    family_key("bjt"),
    Param("polarity", "choice", "npn or pnp", default="npn", choices=("npn", "pnp")),
    FREE_TEXT,
    Param("beta", "factor", "current gain, collector over base"),
    Param("early_voltage", "voltage", "Early voltage; absent: no output conductance"),
    Param("rx", "resistance", "base spreading resistance", sign="nonnegative"),
    Param("ft", "frequency", "transition frequency, measured at ft_ic"),
    Param("ft_ic", "current", "collector current at which ft was measured"),
    Param("cob", "capacitance", "collector-base capacitance, measured at cob_v", sign="nonnegative"),
    Param("cob_v", "voltage", "collector-base voltage at which cob was measured", sign="nonnegative"),
    Param("grading", "factor", "grading exponent of the collector junction", sign="nonnegative", default="0.33"),
    Param("built_in", "voltage", "built-in voltage of the collector junction", default="0.75"),
    Param("c_be0", "capacitance", "depletion part of cpi", sign="nonnegative", default="0"),
    Param("ccs", "capacitance", "collector to ground (substrate, case)", role="high", sign="nonnegative"),
    Param("vbe", "voltage", "base-emitter voltage at 25 °C, falling by 2 mV a kelvin", default="0.65"),
    Param("vce_sat", "voltage", "collector-emitter voltage at saturation", sign="nonnegative", default="0.2"),
    Param("flicker_corner", "frequency", "corner of the base current's flicker noise", sign="nonnegative"),
    Param("gm", "transconductance", "transconductance at the operating point"),
    Param("rpi", "resistance", "base-emitter resistance at the operating point"),
    Param("ro", "resistance", "output resistance at the operating point"),
    Param("cpi", "capacitance", "base-emitter capacitance at the operating point", role="high", sign="nonnegative"),
    Param("cmu", "capacitance", "collector-base capacitance at the operating point", role="high", sign="nonnegative"),
    *RATINGS,
)


def base_emitter_voltage(card: Reading, celsius: Value) -> Value:
    """vbe in volts, written as for an npn: the card's (0.65 V) at 25 °C, less 2 mV a kelvin (common practice)."""
    vbe = card("vbe")
    return (0.65 if vbe is None else vbe) - 0.002 * (celsius - 25.0)


def current_gain(card: Reading) -> Value | None:
    """beta of the card, else what its operating-point gm and rpi say together; None where neither stands."""
    beta = card("beta")
    if beta is None:
        gm, rpi = card("gm"), card("rpi")
        return None if gm is None or rpi is None else gm * rpi
    return beta


def bridge_capacitance(card: Reading, across: Value | None, vbe: Value) -> Value | None:
    """Cmu in farads at a collector-emitter voltage; at VCB = 0 where `across` is None. None: the card has no cmu.

    Cmu = cob·((1 + cob_v/built_in)/(1 + VCB/built_in))^grading, VCB = across - vbe, not below 0.
    Raises KeyError where cob stands without cob_v.
    """
    cmu, cob = card("cmu"), card("cob")
    if cmu is not None or cob is None:
        return cmu
    cob_v, built_in, grading = card("cob_v"), card("built_in"), card("grading")
    if cob_v is None:
        raise KeyError("cob_v")
    built_in = 0.75 if built_in is None else built_in
    vcb = 0.0 if across is None else floor_at(across - vbe, 0.0)
    return cob * power((1.0 + cob_v / built_in) / (1.0 + vcb / built_in), 0.33 if grading is None else grading)


def transit_time(card: Reading, celsius: Value) -> Value | None:
    """Forward transit time in seconds as the card's figures give it, negative ones too; None without ft and ft_ic.

    tau_F = 1/(2·pi·ft) - (c_be0 + cob)/gm(ft_ic), with the card's cmu in place of cob where that is given.
    """
    ft, ft_ic = card("ft"), card("ft_ic")
    if ft is None or ft_ic is None:
        return None
    cmu, depletion = card("cmu"), card("c_be0")
    junction = card("cob") if cmu is None else cmu
    charged = sum(part for part in (depletion, junction) if part is not None)
    return 1.0 / (TWO_PI * ft) - charged * thermal_voltage(celsius) / ft_ic


def small_signal(
    card: Reading, current: Value | None, across: Value | None, vbe: Value, temperature_c: Value
) -> dict[str, Value]:
    """rx, rpi, ro, gm, cpi, cmu, ccs (SI units; absent ones missing) at a quiescent current and voltage.

    current and across are magnitudes in A and V, None where unknown; any shape. Operating-point figures of the
    card win. Raises `Missing` where a figure that the card calls for cannot be had.
    """
    lacks: list[Lack] = []
    found: dict[str, Value | None] = {"rx": card("rx"), "ccs": card("ccs")}
    gm = found["gm"] = _transconductance(card, current, temperature_c, lacks)
    found["rpi"] = _input_resistance(card, gm, lacks)
    found["ro"] = _output_resistance(card, current, lacks)
    try:
        found["cmu"] = bridge_capacitance(card, across, vbe)
    except KeyError:
        lacks.append(Lack("cmu", "cob_v", "cob is measured at cob_v"))
    found["cpi"] = _diffusion_capacitance(card, gm, temperature_c, lacks)
    return settle({key: value for key, value in found.items() if value is not None}, lacks)


def noise(card: Reading, figures: Mapping[str, Value], current: Value | None) -> Noise:
    """Shot noise of the collector current ("gm", collector to emitter) and of the base current ("ib").

    figures are the card's small-signal ones; current a magnitude in A, without which neither can be told. A device
    that is cut off has none.
    """
    if current is None:
        return {"gm": None, "ib": None}
    beta, corner, carried = card("beta"), card("flicker_corner"), floor_at(current, 0.0)
    if beta is None:
        beta = figures["gm"] * figures["rpi"]
    return {"gm": Spectrum(2.0 * CHARGE * carried),
            "ib": Spectrum(2.0 * CHARGE * carried / beta, 0.0 if corner is None else corner)}


def _transconductance(card: Reading, current: Value | None, celsius: Value, lacks: list[Lack]) -> Value | None:
    gm = card("gm")
    if gm is not None:
        return gm
    if current is None:
        lacks.append(Lack("gm", "current", "gm = ic/VT"))
        return None
    return current / thermal_voltage(celsius)


def _input_resistance(card: Reading, gm: Value | None, lacks: list[Lack]) -> Value | None:
    rpi, beta = card("rpi"), card("beta")
    if rpi is not None:
        return rpi
    if beta is None:
        lacks.append(Lack("rpi", "beta", "rpi = beta/gm"))
        return None
    return None if gm is None else ratio(beta, gm)


def _output_resistance(card: Reading, current: Value | None, lacks: list[Lack]) -> Value | None:
    ro, early = card("ro"), card("early_voltage")
    if ro is not None or early is None:
        return ro
    if current is None:
        lacks.append(Lack("ro", "current", "ro = early_voltage/ic"))
        return None
    return ratio(early, current)


def _diffusion_capacitance(card: Reading, gm: Value | None, celsius: Value, lacks: list[Lack]) -> Value | None:
    """Cpi = gm·tau_F + c_be0, tau_F taken as 0 where it is negative."""
    cpi, depletion = card("cpi"), card("c_be0")
    if cpi is not None or card("ft") is None:
        return depletion if cpi is None else cpi
    tau = transit_time(card, celsius)
    if tau is None:
        lacks.append(Lack("cpi", "ft_ic", "ft is measured at ft_ic"))
    if tau is None or gm is None:
        return None
    diffusion = gm * floor_at(tau, 0.0)
    return diffusion if depletion is None else diffusion + depletion
