"""The triode valve: its card, its law, its small-signal figures.

Child-Langmuir, common practice for valves: ia = P·u^1.5 with the drive u = vgk + vak/mu and
P = gm_ia/(1.5·gm_ia/gm)^1.5. Then gm goes with the cube root of ia, and mu stands still.
"""

from __future__ import annotations

from collections.abc import Mapping

from polebook.devices.missing import Lack, settle
from polebook.devices.num import BOLTZMANN, Reading, Value, floor_at, power, ratio, sqrt
from polebook.devices.ratings import FREE_TEXT, RATINGS, family_key
from polebook.devices.spectrum import T0_K, Noise, Spectrum
from polebook.formula import Formula
from polebook.param import Param

CHILD_LANGMUIR = "Child-Langmuir law, common practice for valves"
GM = Formula("parts.gm", "gm = gm_0·(ia/gm_ia)^(1/3)", CHILD_LANGMUIR)
GM_THERE = Formula("parts.gm", "gm = gm_0", "taken as measured at the operating point")
GM_MEASURED = Formula("devices.gm_0", "gm_0 = mu/rp", "definition")
MU = Formula("devices.mu", "mu = gm_0·rp", "definition")
RO = Formula("parts.ro", "ro = mu/gm", CHILD_LANGMUIR)
PERVEANCE = Formula("devices.P", "P = gm_ia/(1.5·gm_ia/gm_0)^1.5", CHILD_LANGMUIR)
LAW = Formula("bias.triode", "ia = P·max(0, vgk + vak/mu)^1.5", CHILD_LANGMUIR)
NOISE_GM = Formula("noise.triode.gm", "S = 4·k_B·T_0·req_noise·gm^2·(1 + flicker_corner/f)",
                   "equivalent noise resistance at 290 K, common practice for valves")
REQ = Formula("devices.req_noise", "req_noise = 2.5/gm", "common practice for triodes")
FORMULAS = (GM, GM_THERE, GM_MEASURED, MU, RO, PERVEANCE, LAW, NOISE_GM, REQ)

PARAMS = (
    family_key("triode"),
    FREE_TEXT,
    Param("mu", "factor", "amplification factor"),
    Param("gm", "transconductance", "transconductance, measured at gm_ia"),
    Param("rp", "resistance", "anode resistance, measured at gm_ia (in place of gm)"),
    Param("gm_ia", "current", "anode current at which gm or rp was measured; absent: the operating point's"),
    Param("cgk", "capacitance", "grid-cathode capacitance", role="high", sign="nonnegative"),
    Param("cga", "capacitance", "grid-anode capacitance", role="high", sign="nonnegative"),
    Param("cak", "capacitance", "anode-cathode capacitance", role="high", sign="nonnegative"),
    Param("req_noise", "resistance", "equivalent noise resistance; absent: 2.5/gm", sign="nonnegative"),
    Param("flicker_corner", "frequency", "corner of the flicker noise", sign="nonnegative"),
    *RATINGS,
)


def amplification(card: Reading) -> Value | None:
    """mu, else gm·rp where both stand; None where neither can be had."""
    mu, gm, rp = card("mu"), card("gm"), card("rp")
    if mu is None:
        return None if gm is None or rp is None else gm * rp
    return mu


def measured_gm(card: Reading) -> Value | None:
    """gm in S as measured: the card's, else mu/rp; None where neither can be had."""
    gm, mu, rp = card("gm"), card("mu"), card("rp")
    if gm is None:
        return None if mu is None or rp is None else mu / rp
    return gm


def perveance(card: Reading, current: Value | None = None) -> Value | None:
    """P in A/V^1.5, gm being measured at gm_ia, else at `current`; None where it cannot be had."""
    gm, gm_ia = measured_gm(card), card("gm_ia")
    if gm_ia is None:
        gm_ia = current
    return None if gm is None or gm_ia is None else gm_ia / power(1.5 * gm_ia / gm, 1.5)


def drive(p: Value, current: Value) -> Value:
    """u = vgk + vak/mu in volts at an anode current in A; 0 for currents below 0."""
    return power(floor_at(current, 0.0) / p, 2.0 / 3.0)


def space_charge(p: Value, u: Value) -> tuple[Value, Value]:
    """Anode current in A and its derivative in S at a drive in V; both 0 for drives below 0."""
    held = floor_at(u, 0.0)
    root = sqrt(held)
    return p * held * root, 1.5 * p * root


def small_signal(card: Reading, current: Value | None) -> dict[str, Value]:
    """gm, ro, cgk, cga, cak (SI units; absent ones missing) at an anode current in A, None where unknown.

    gm = gm(gm_ia)·(ia/gm_ia)^(1/3); without gm_ia, gm is the operating point's; ro = mu/gm.
    Raises `Missing` where a figure that the card calls for cannot be had.
    """
    lacks: list[Lack] = []
    found: dict[str, Value | None] = {key: card(key) for key in ("cgk", "cga", "cak")}
    gm = found["gm"] = _transconductance(card, current, lacks)
    mu = amplification(card)
    if mu is None:
        lacks.append(Lack("ro", "mu", "ro = mu/gm"))
    else:
        found["ro"] = None if gm is None else ratio(mu, gm)
    return settle({key: value for key, value in found.items() if value is not None}, lacks)


def noise(card: Reading, figures: Mapping[str, Value]) -> Noise:
    """Noise of the anode current ("gm", anode to cathode): that of req_noise ahead of the grid, 2.5/gm without it."""
    req, corner, gm = card("req_noise"), card("flicker_corner"), figures["gm"]
    white = 4.0 * BOLTZMANN * T0_K * (2.5 * gm if req is None else req * gm * gm)
    return {"gm": Spectrum(white, 0.0 if corner is None else corner)}


def _transconductance(card: Reading, current: Value | None, lacks: list[Lack]) -> Value | None:
    gm, gm_ia = measured_gm(card), card("gm_ia")
    if gm is None:
        lacks.append(Lack("gm", "gm", "neither gm nor rp with mu stands on the card"))
        return None
    if gm_ia is None:
        return gm
    if current is None:
        lacks.append(Lack("gm", "current", "gm = gm(gm_ia)·(ia/gm_ia)^(1/3)"))
        return None
    return gm * power(floor_at(current, 0.0) / gm_ia, 1.0 / 3.0)
