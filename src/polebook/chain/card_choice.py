"""What a new stage finds where it comes: a card that stands, else a new one; the rails; what it drives."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.chain import start_bias
from polebook.chain.located import Data, stages
from polebook.chain.start import LEAST_V, MOST_V, RAIL_V, VALVE_RAIL_V, card_block
from polebook.chain.start_bias import farad
from polebook.chain.start_cards import NAMES
from polebook.chain.start_stages import FAMILY
from polebook.quantity import Refused, letter, parse
from polebook.stages.base import GROUP, slot_key
from polebook.stages.registry import KINDS
from polebook.text import literal
from polebook.text.spans import Path

_ACROSS, _ACROSS_LOWER = 0.45, 0.22  # of a rail: across a device, and the lower one of two
_LEAST_OHM, _MOST_OHM = 1.0, 1e9
_FAR_OHM = 1e3  # taken for what follows where its input resistance is not stated
# an input that stands at ground for d.c.: topology -> the key that says what its coupling sees
_GROUNDED = {"block": "rin", "ladder": "", "noninverting": "r_bias", "inverting_opamp": "rg", "transimpedance": ""}


@dataclass(frozen=True, slots=True)
class Chosen:
    """The card of a stage: name and family, "" for a kind without one; `block` are the lines of a new card."""

    name: str = ""
    family: str = ""
    block: str = ""

    @property
    def said(self) -> str:
        """For a label: that the card is new."""
        return f", with a new card {self.name}" if self.block else ""


def choose(data: Data, kind: str, family: str, at: int) -> Chosen:
    """The card for a stage of `kind` at number `at`: that of the nearest stage before or after which fits, else any.

    family is asked for, or "" where any will do that the kind takes.
    """
    families = (family,) if family else KINDS[kind].families
    if not families:
        return Chosen()
    raw = data.get("device")
    cards = {name: card for name, card in raw.items() if isinstance(card, dict)} if isinstance(raw, dict) else {}
    for name in [*_near(data, at), *cards]:
        card = cards.get(name, {})
        if card.get("family") in families and card.get("polarity", "n") in ("npn", "n"):
            return Chosen(name, card["family"])
    family = family or FAMILY[kind]
    name, number = NAMES[family], 1
    while name in cards:
        number += 1
        name = f"{NAMES[family]}{number}"
    return Chosen(name, family, card_block(family, name, rail_volts(data, family=family)))


def _near(data: Data, at: int) -> list[str]:
    """The cards of the stages, from the nearest to number `at` on."""
    used = [(abs(number - at + 0.5), stage.get("device")) for number, stage in enumerate(stages(data))]
    return [name for _, name in sorted(used, key=lambda one: one[0]) if isinstance(name, str)]


def rail_volts(data: Data, key: str = "positive", family: str = "") -> float:
    """A rail of the file in V; the positive one lies where a stage can be biased for it."""
    volts = _volts(data, key)
    if key == "positive" and volts < LEAST_V:
        return VALVE_RAIL_V if family == "triode" else RAIL_V
    return min(max(volts, -MOST_V), MOST_V)


def _volts(data: Data, key: str) -> float:
    table = data.get("supply")
    try:
        return parse(table.get(key, 0), "voltage") if isinstance(table, dict) else 0.0
    except Refused:  # a fault of the file, which is told elsewhere
        return 0.0


def stated(data: Data, kind: str, family: str) -> dict[str, str]:
    """Current and voltage as a new stage states them (key -> TOML literal) where no rail is there to bias it."""
    if family not in GROUP or _volts(data, "positive") >= LEAST_V:
        return {}
    rail, follows = rail_volts(data, family=family), KINDS[kind].topology == "follower"
    point = (start_bias.follower if follows else start_bias.grounded)(family, rail)
    across = rail - point.low if follows else rail * (_ACROSS_LOWER if KINDS[kind].topology == "cascode" else _ACROSS)
    texts = (letter(float(f"{point.amps:.2g}"), "current"), letter(float(f"{across:.2g}"), "voltage"))
    return {slot_key(slot, family): literal.string(one) for slot, one in zip(("current", "across"), texts, strict=True)}


def parted(data: Data, at: int) -> tuple[Path, str, str] | None:
    """What follows place `at` where it would hold the output of a device stage there at ground for d.c.

    The path of the `couple` that keeps it from doing so, whose it is, its value as a TOML literal; else None.
    """
    for number, stage in enumerate(stages(data)[at:], start=at):
        if stage.get("left_out") is True:
            continue
        kind = KINDS.get(stage["kind"]) if isinstance(stage.get("kind"), str) else None
        if kind is None or kind.topology not in _GROUNDED or "couple" in stage:
            return None
        value = farad(_ohms(stage.get(_GROUNDED[kind.topology])))
        return ("stage", number, "couple"), str(stage.get("name", f"#{number + 1}")), value
    load = data.get("load")
    if not isinstance(load, dict) or "resistance" not in load or "couple" in load:
        return None
    return ("load", "couple"), "load", farad(_ohms(load["resistance"]))


def _ohms(raw: object) -> float:
    try:
        ohms = parse(raw, "resistance")
    except Refused:
        return _FAR_OHM
    return min(max(ohms, _LEAST_OHM), _MOST_OHM)
