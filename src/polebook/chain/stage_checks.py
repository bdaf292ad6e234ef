"""What the keys of one stage can't say together."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from polebook.chain.cards import CardSeen
from polebook.chain.desk import Desk, Owner
from polebook.chain.suggest import listed
from polebook.refusal import quoted
from polebook.stages.base import Kind
from polebook.units import DIMENSIONS

# key -> the keys of which one must stand with it, and what it is for
_NEEDS: Mapping[str, tuple[tuple[str, ...], str]] = {
    "c_rf": (("rf",), "it stands in series with rf"),
    "r_comp": (("c_comp",), "it stands in series with c_comp"),
    "ce": (("re_bypassed",), "it bypasses re_bypassed"),
    "cs": (("rs_bypassed",), "it bypasses rs_bypassed"),
    "ck": (("rk_bypassed",), "it bypasses rk_bypassed"),
    "l_peak": (("rc", "rd", "ra"), "it stands in series with the output resistor"),
    "c_peak": (("re", "rs", "rk"), "it lies across the unbypassed lower resistor"),
    "cb": (("rb1", "rb2"), "it lies across the bias resistors of the base"),
    "cg": (("rg", "rg1", "rg2"), "it lies across the bias resistors of the control terminal"),
    "c_rg": (("rg",), "it stands in series with rg"),
    "nf_source": (("nf",), "it is the source resistance that nf was measured with"),
    "en_corner": (("en", "nf"), "it is the corner of the voltage noise"),
    "in_corner": (("in",), "it is the corner of the current noise"),
}


def combinations(desk: Desk, kind: Kind, keys: frozenset[str], owner: Owner) -> None:
    """Keys that stand without the one they belong to, and keys that exclude each other."""
    mine = kind.keys()
    for key in (key for key in _NEEDS if key in keys and key in mine):
        partners, why = _NEEDS[key]
        partners = tuple(partner for partner in partners if partner in mine)
        if not keys.intersection(partners):
            desk.fault(
                (*owner.path, key),
                f"{key} of {owner.words} stands without {listed(partners, 'or')}",
                why,
                f"add {partners[0]}, or take {key} out",
                "key",
            )
    if kind.topology == "noninverting" and "rg" in keys and "rf" not in keys:
        desk.fault(
            (*owner.path, "rf"),
            f"{owner.words} has rg and no rf",
            "rf and rg set the gain together, 1 + rf/rg",
            'add rf = "10k", or take rg out for a gain of one',
            "table",
        )
    others = [key for key in ("rg1", "rg2") if key in keys and key in mine]
    if "rg" in keys and "rg" in mine and others:
        desk.fault(
            (*owner.path, "rg"),
            f"{owner.words} has rg together with {listed(others)}",
            "rg alone holds the gate at ground, rg1 and rg2 are a divider: a stage has one or the other",
            f"take rg out, or {listed(others)}",
            "key",
        )
    if kind.topology == "block" and {"nf", "en"} <= keys:
        desk.fault(
            (*owner.path, "nf"),
            f"{owner.words} has nf and en",
            "both say the voltage noise, and might disagree",
            "take one of them out",
            "key",
        )


def same_polarity(desk: Desk, device: CardSeen | None, upper: CardSeen | None, owner: Owner) -> None:
    """The two devices of a cascode carry one current, so both are n-type or both p-type."""
    if not device or not upper or not device.card.polarity or not upper.card.polarity:
        return
    p_types = [card.polarity in ("pnp", "p") for card in (device.card, upper.card)]
    if p_types[0] != p_types[1]:
        desk.fault(
            (*owner.path, "upper"),
            f"the devices of {owner.words} are of opposite polarity",
            f"one current flows through both: {device.card.name} is {device.card.polarity}, "
            f"{upper.card.name} is {upper.card.polarity}",
            "name an upper card of the same polarity as the lower one",
        )


def in_decibels(raw: object) -> bool:
    """Whether a gain is written in dB."""
    return isinstance(raw, str) and raw.strip().endswith(DIMENSIONS["gain_source"].decibels)


def block_gain(desk: Desk, table: Mapping[str, Any], owner: Owner) -> bool | None:
    """`inverting` of a block; turns the gain over where a gain in dB says so."""
    name = owner.number("gain")
    raw, inverting = table.get("gain"), table.get("inverting")
    if name not in desk.numbers or ("inverting" in table and not isinstance(inverting, bool)):
        return None
    if in_decibels(raw):
        if inverting is None:
            desk.fault(
                (*owner.path, "gain"),
                f"gain of {owner.words} is in dB and has no sign",
                f"{quoted(raw)} may be {desk.numbers[name]:g} or {-desk.numbers[name]:g}",
                "add inverting = true or inverting = false",
            )
            return None
        if inverting:
            desk.numbers[name] = -desk.numbers[name]
        return bool(inverting)
    if inverting is not None:
        desk.fault(
            (*owner.path, "inverting"),
            f"gain and inverting of {owner.words} both say the sign",
            f"{quoted(raw)} is a plain gain with its own sign",
            "take inverting out",
            "key",
        )
    return None
