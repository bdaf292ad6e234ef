"""What the figures of a card can't say together, and what a card in use must say."""

from __future__ import annotations

import math
from collections.abc import Mapping

from polebook.chain.desk import Desk, Owner
from polebook.chain.suggest import listed
from polebook.devices import bjt
from polebook.devices.num import thermal_voltage
from polebook.quantity import engineering

# key -> the keys of which one must stand with it, and why
_PARTNERS: Mapping[str, Mapping[str, tuple[tuple[str, ...], str]]] = {
    "bjt": {
        "ft": (("ft_ic",), "ft belongs to the collector current at which it was measured"),
        "ft_ic": (("ft",), "ft_ic is the current at which ft was measured"),
        "cob": (("cob_v", "cmu"), "cob belongs to the collector-base voltage at which it was measured"),
        "cob_v": (("cob",), "cob_v is the voltage at which cob was measured"),
        "grading": (("cob",), "grading says how cob moves with the voltage"),
        "built_in": (("cob",), "built_in says how cob moves with the voltage"),
    },
    "fet": {
        "gm_id": (("gm",), "gm_id is the current at which gm was measured"),
        "ciss": (("crss", "cgs"), "cgs is ciss less crss"),
        "coss": (("crss", "cds"), "cds is coss less crss"),
    },
    "triode": {"gm_ia": (("gm", "rp"), "gm_ia is the current at which gm or rp was measured")},
    "opamp": {
        "en_corner": (("en",), "en_corner is the corner of the noise en"),
        "in_corner": (("in",), "in_corner is the corner of the noise in"),
    },
}
# keys that say the same thing twice, and why
_RIVALS: Mapping[str, list[tuple[tuple[str, ...], str]]] = {
    "mosfet": [(("k", "gm", "gm_id"), "gm at gm_id says k already: k = gm²/(2·gm_id)")],
    "jfet": [(("vgs_off", "idss", "gm", "gm_id"), "idss with gm at gm_id says vgs_off already")],
    "triode": [(("gm", "rp"), "gm and rp say the same through mu: rp = mu/gm")],
}
_GROUP = {"mosfet": "fet", "jfet": "fet"}


def contradictions(desk: Desk, family: str, keys: frozenset[str], owner: Owner) -> None:
    """Faults of any card, used or not. `keys` are those that stand in the file."""
    for key, (partners, why) in _PARTNERS.get(_GROUP.get(family, family), {}).items():
        if key in keys and not keys.intersection(partners):
            desk.fault(
                (*owner.path, key),
                f"{key} of {owner.words} stands without {listed(partners, 'or')}",
                why,
                f"add {partners[0]}, or take {key} out",
                "key",
            )
    for rivals, why in _RIVALS.get(family, []):
        if keys.issuperset(rivals):
            desk.fault(
                (*owner.path, rivals[0]),
                f"{owner.words} states {listed(rivals)} together",
                why,
                f"take {rivals[0]} out, or {rivals[-1]}",
                "key",
            )
    if family in ("mosfet", "jfet"):
        _differences(desk, keys, owner)
    if family == "bjt":
        _transit_time(desk, keys, owner)


def _differences(desk: Desk, keys: frozenset[str], owner: Owner) -> None:
    """cgs = ciss - crss and cds = coss - crss must not be negative where they are used."""
    crss = desk.numbers.get(owner.number("crss"))
    for total, rest in (("ciss", "cgs"), ("coss", "cds")):
        whole = desk.numbers.get(owner.number(total))
        if whole is not None and crss is not None and rest not in keys and whole < crss:
            desk.fault(
                (*owner.path, total),
                f"{total} of {owner.words} is below crss",
                f"{rest} = {total} - crss would be {engineering(whole - crss, 'F')}",
                f"check both against the data sheet: {total} contains crss",
            )


def _transit_time(desk: Desk, keys: frozenset[str], owner: Owner) -> None:
    """The transit time that ft and the capacitances leave must not be negative where cpi follows from it."""

    def figure(key: str) -> float | None:
        return desk.numbers.get(owner.number(key))

    celsius = desk.numbers.get("supply.temperature", 25.0)
    ft_ic, transit_s = figure("ft_ic"), bjt.transit_time(figure, celsius)
    if "cpi" not in keys and ft_ic is not None and transit_s is not None and transit_s < 0:
        junction = "cmu" if "cmu" in keys else "cob"
        charge = (figure("c_be0") or 0.0) + (figure(junction) or 0.0)
        most = ft_ic / (thermal_voltage(celsius) * 2.0 * math.pi * charge)
        desk.fault(
            (*owner.path, "ft"),
            f"ft of {owner.words} is too high for its capacitances",
            f"at ft_ic = {engineering(ft_ic, 'A')} the {engineering(charge, 'F')} of c_be0 and {junction} alone "
            f"allow {engineering(most, 'Hz')}, so the transit time would be negative",
            f"check ft, ft_ic and {junction} against the data sheet",
        )


def in_use(desk: Desk, family: str, keys: frozenset[str], owner: Owner) -> None:
    """Faults of a card that a stage uses and that does not say enough for small-signal figures."""
    if family == "bjt" and not keys & {"beta", "rpi"}:
        _lacks(
            desk, owner, "beta", "the base's resistance is beta/gm", 'add beta = "200", or rpi at the operating point'
        )
    if family == "mosfet" and not keys & {"k", "gm"}:
        _lacks(
            desk,
            owner,
            "k",
            "neither gm nor what it follows from is given: gm = √(2·k·id)",
            "add k, or gm with gm_id, or gm at the operating point",
        )
    if family == "jfet" and "gm" not in keys and not keys.issuperset(("idss", "vgs_off")):
        missing = "idss" if "idss" not in keys else "vgs_off"
        _lacks(
            desk,
            owner,
            missing,
            "neither gm nor what it follows from is given: idss and vgs_off",
            "add idss and vgs_off, or gm with gm_id, or gm at the operating point",
        )
    if family == "jfet" and keys.issuperset(("gm", "gm_id")) and "idss" not in keys:
        _lacks(
            desk,
            owner,
            "idss",
            "gm at gm_id gives gm at another current only with idss",
            "add idss, or take gm_id out where gm is the operating point's",
        )
    if family == "triode":
        if "mu" not in keys:
            _lacks(desk, owner, "mu", "the anode resistance is mu/gm", 'add mu = "100"')
        if not keys & {"gm", "rp"}:
            _lacks(desk, owner, "gm", "neither gm nor rp is given", "add gm, or rp, measured at gm_ia")
    if family == "opamp" and "gbw" not in keys:
        _lacks(desk, owner, "gbw", "the gain-bandwidth product sets its dominant pole", 'add gbw = "10M"')


def _lacks(desk: Desk, owner: Owner, key: str, why: str, fix: str) -> None:
    desk.fault((*owner.path, key), f"{owner.words} has no {key}", why, fix, "table")
