"""Field-effect transistors, insulated gate and junction: their cards, their law, their small-signal figures.

Both follow Id = k/2·u² with the overdrive u = Vgs - cut-off: for the mosfet cut-off is vgs_th; for the jfet it is
-vgs_off and k = 2·idss/vgs_off², so that idss·(1 + Vgs/vgs_off)² is the same law. Voltages are as for n-channel.
"""

from __future__ import annotations

from collections.abc import Mapping

from polebook.devices.missing import Lack, settle
from polebook.devices.num import BOLTZMANN, CHARGE, ICE_K, Reading, Value, floor_at, ratio, sqrt, step
from polebook.devices.ratings import FREE_TEXT, RATINGS, family_key
from polebook.devices.spectrum import Noise, Spectrum
from polebook.formula import Formula
from polebook.param import Param

SQUARE_LAW = "square law of the channel (A. S. Sedra and K. C. Smith, Microelectronic Circuits, 5th ed., Oxford, " \
             "ch. 4; from memory)"
GM = Formula("parts.gm", "gm = sqrt(2·k·id)", SQUARE_LAW)
GM_JFET = Formula("parts.gm", "gm = 2·idss/vgs_off·sqrt(id/idss)", SQUARE_LAW)
K_MEASURED = Formula("devices.k", "k = gm_0^2/(2·gm_id)", SQUARE_LAW)
RO = Formula("parts.ro", "ro = 1/(channel_slope·id)", SQUARE_LAW)
CGD = Formula("parts.cgd", "cgd = crss", "common practice")
CGS = Formula("parts.cgs", "cgs = max(0, ciss - crss)", "common practice")
CDS = Formula("parts.cds", "cds = max(0, coss - crss)", "common practice")
LAW_MOSFET = Formula("bias.mosfet", "id = k/2·max(0, vgs - vgs_th)^2", SQUARE_LAW)
LAW_JFET = Formula("bias.jfet", "id = idss·max(0, 1 + vgs/vgs_off)^2", SQUARE_LAW)
VGS_OFF = Formula("devices.vgs_off", "vgs_off = sqrt(2·idss/k)", SQUARE_LAW)
CHANNEL = "thermal noise of the channel (A. van der Ziel, Thermal noise in field-effect transistors, Proc. IRE 50, " \
          "1962; from memory)"
NOISE_GM = Formula("noise.fet.gm", "S = 4·k_B·T_K·gamma_noise·gm·(1 + flicker_corner/f)", CHANNEL)
NOISE_IG = Formula("noise.fet.ig", "S = 2·q·ig", "shot noise (W. Schottky, 1918; from memory)")
GAMMA = 2.0 / 3.0  # of a long channel, where the card has none
FORMULAS = (GM, GM_JFET, K_MEASURED, RO, CGD, CGS, CDS, LAW_MOSFET, LAW_JFET, VGS_OFF, NOISE_GM, NOISE_IG)

_POLARITY = Param("polarity", "choice", "channel: n or p", default="n", choices=("n", "p"))

_COMMON = (
    Param("gm", "transconductance", "transconductance, measured at gm_id (without gm_id: at the operating point)"),
    Param("gm_id", "current", "drain current at which gm was measured"),
    Param("ro", "resistance", "output resistance at the operating point"),
    Param("channel_slope", "per_volt", "channel-length modulation; absent: no output conductance"),
    Param("gamma_noise", "factor", "channel noise factor", sign="nonnegative", default="0.6666666666666666"),
    Param("cgs", "capacitance", "gate-source capacitance", role="high", sign="nonnegative"),
    Param("cgd", "capacitance", "gate-drain capacitance", role="high", sign="nonnegative"),
    Param("cds", "capacitance", "drain-source capacitance", role="high", sign="nonnegative"),
    Param("cdb", "capacitance", "drain to ground (bulk, case)", role="high", sign="nonnegative"),
    Param("ciss", "capacitance", "data sheet's input capacitance, cgs + cgd", sign="nonnegative"),
    Param("crss", "capacitance", "data sheet's reverse capacitance, cgd", sign="nonnegative"),
    Param("coss", "capacitance", "data sheet's output capacitance, cds + cgd", sign="nonnegative"),
    Param("rx", "resistance", "gate resistance", sign="nonnegative"),
    Param("ig", "current", "gate leakage", sign="nonnegative"),
    Param("flicker_corner", "frequency", "corner of the channel's flicker noise", sign="nonnegative"),
    *RATINGS,
)

PARAMS_MOSFET = (
    family_key("mosfet"),
    _POLARITY,
    FREE_TEXT,
    Param("k", "k_factor", "transconductance factor, Id = k/2·(Vgs − vgs_th)²"),
    Param("vgs_th", "voltage", "threshold voltage, written as for an n-channel", sign="any"),
    *_COMMON,
)

PARAMS_JFET = (
    family_key("jfet"),
    _POLARITY,
    FREE_TEXT,
    Param("idss", "current", "drain current at zero gate-source voltage"),
    Param("vgs_off", "voltage", "magnitude of the gate-source voltage that cuts the channel off"),
    *_COMMON,
)


def strength(card: Reading, current: Value | None = None) -> Value | None:
    """k of the square law in A/V², from k, idss with vgs_off, or gm with gm_id; else from gm at `current`.

    None where the card says none of them.
    """
    k, idss, vgs_off = card("k"), card("idss"), card("vgs_off")
    if k is not None:
        return k
    if idss is not None and vgs_off is not None:
        return 2.0 * idss / (vgs_off * vgs_off)
    gm, gm_id = card("gm"), card("gm_id")
    if gm_id is None:
        gm_id = current
    return None if gm is None or gm_id is None else gm * gm / (2.0 * gm_id)


def cut_off(card: Reading, k: Value | None) -> Value | None:
    """Vgs in volts at which the channel is just cut off; None where the card doesn't tell.

    A jfet without vgs_off has it from idss = k/2·vgs_off², which is 2·sqrt(idss·gm_id)/gm.
    """
    threshold, vgs_off, idss = card("vgs_th"), card("vgs_off"), card("idss")
    if threshold is not None:
        return threshold
    if vgs_off is not None:
        return -vgs_off
    return None if idss is None or k is None else -sqrt(2.0 * idss / k)


def overdrive(k: Value, current: Value) -> Value:
    """u = Vgs - cut-off in volts at a drain current in A; 0 for currents below 0."""
    return sqrt(2.0 * floor_at(current, 0.0) / k)


def channel(k: Value, u: Value) -> tuple[Value, Value]:
    """Drain current in A and its derivative in S at an overdrive in V; both 0 below cut-off."""
    held = floor_at(u, 0.0)
    return 0.5 * k * held * held, k * held * step(u)


def small_signal(card: Reading, current: Value | None) -> dict[str, Value]:
    """rx, ro, gm, cgs, cgd, cds, cdb (SI units; absent ones missing) at a drain current in A, None where unknown.

    mosfet and jfet alike: gm = sqrt(2·k·id), for a jfet the same as (2·idss/vgs_off)·sqrt(id/idss);
    ro = 1/(channel_slope·id); cgd = crss, cgs = ciss - crss, cds = coss - crss. Operating-point figures of the
    card win. Raises `Missing` where a figure that the card calls for cannot be had.
    """
    lacks: list[Lack] = []
    found: dict[str, Value | None] = {"rx": card("rx"), "cdb": card("cdb")}
    found["gm"] = _transconductance(card, current, lacks)
    found["ro"] = _output_resistance(card, current, lacks)
    cgd, crss = card("cgd"), card("crss")
    found["cgd"] = crss if cgd is None else cgd
    found["cgs"] = _difference(card, "cgs", "ciss", lacks)
    found["cds"] = _difference(card, "cds", "coss", lacks)
    return settle({key: value for key, value in found.items() if value is not None}, lacks)


def noise(card: Reading, figures: Mapping[str, Value], celsius: Value) -> Noise:
    """Thermal noise of the channel ("gm", drain to source) and shot noise of the gate leakage ("ig")."""
    gamma, corner, leakage = card("gamma_noise"), card("flicker_corner"), card("ig")
    factor = 4.0 * BOLTZMANN * (celsius + ICE_K) * (GAMMA if gamma is None else gamma)
    found: Noise = {"gm": Spectrum(factor * figures["gm"], 0.0 if corner is None else corner)}
    if leakage is not None:
        found["ig"] = Spectrum(2.0 * CHARGE * leakage)
    return found


def _transconductance(card: Reading, current: Value | None, lacks: list[Lack]) -> Value | None:
    gm = card("gm")
    if gm is not None and card("gm_id") is None:
        return gm
    k = strength(card)
    if k is None:
        lacks.append(Lack("gm", *_unknown_strength(card)))
    elif current is None:
        lacks.append(Lack("gm", "current", "gm = √(2·k·id)"))
    return None if k is None or current is None else sqrt(2.0 * k * floor_at(current, 0.0))


def _unknown_strength(card: Reading) -> tuple[str, str]:
    """Which key would tell k, and why."""
    if card("idss") is not None:
        return "vgs_off", "gm = (2·idss/vgs_off)·√(id/idss)"
    if card("vgs_off") is not None:
        return "idss", "gm = (2·idss/vgs_off)·√(id/idss)"
    return "gm", "no figure of the card tells the transconductance"


def _output_resistance(card: Reading, current: Value | None, lacks: list[Lack]) -> Value | None:
    ro, slope = card("ro"), card("channel_slope")
    if ro is not None or slope is None:
        return ro
    if current is None:
        lacks.append(Lack("ro", "current", "ro = 1/(channel_slope·id)"))
        return None
    return ratio(1.0, slope * current)


def _difference(card: Reading, key: str, total: str, lacks: list[Lack]) -> Value | None:
    """The card's own figure, else the data sheet's total less crss, not below 0."""
    own, whole, crss = card(key), card(total), card("crss")
    if own is not None or whole is None:
        return own
    if crss is None:
        lacks.append(Lack(key, "crss", f"{key} = {total} - crss"))
        return None
    return floor_at(whole - crss, 0.0)
