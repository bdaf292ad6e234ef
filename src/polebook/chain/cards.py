"""The device cards: every [device.NAME] table."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from polebook.chain import card_checks, rows, values
from polebook.chain.desk import Desk, Owner
from polebook.chain.model import Card
from polebook.chain.suggest import listed
from polebook.devices.registry import FAMILIES
from polebook.refusal import quoted

NAME = re.compile(r"[A-Za-z0-9_-]+")


@dataclass(frozen=True, slots=True)
class CardSeen:
    """A card as far as it could be read: `family` is "" where the file does not say a known one."""

    card: Card
    keys: frozenset[str]
    owner: Owner

    @property
    def family(self) -> str:
        return self.card.family


def read(desk: Desk, raw: object) -> dict[str, CardSeen]:
    """Every card by its name; faults go to the desk."""
    seen: dict[str, CardSeen] = {}
    if not isinstance(raw, dict):
        desk.fault(
            ("device",),
            "device is not a table of cards",
            f"{quoted(raw)} is {values.kind_of_value(raw)}",
            "write each card with the header [device.NAME]",
            "key",
        )
        return seen
    for name, table in raw.items():
        path = ("device", name)
        if not isinstance(table, dict):
            desk.fault(
                path,
                f"{quoted(name)} of device is not a card",
                "each card is a table of its own",
                f"write the header [device.{name}] and its keys below it",
                "key",
            )
        elif not NAME.fullmatch(name):
            desk.fault(
                path,
                f"{quoted(name)} can't be the name of a card",
                "a name has letters, digits, _ and -, and at least one of them",
                "choose another name",
                "key",
            )
        else:
            seen[name] = _card(desk, name, table)
    return seen


def _card(desk: Desk, name: str, table: Mapping[str, Any]) -> CardSeen:
    owner = Owner(("device", name), f"device.{name}", f"card {name}")
    desk.mark(f"device.{name}", owner.path)
    family = _family(desk, table, owner)
    if not family:
        _keys_of_no_family(desk, table, owner)
        return CardSeen(Card(name, ""), frozenset(table), owner)
    row = rows.read(desk, table, owner, FAMILIES[family], lambda key: _unknown(desk, key, family))
    card_checks.contradictions(desk, family, frozenset(table), owner)
    card = Card(name, family, row.texts.get("polarity", ""), row.texts.get("note", ""))
    return CardSeen(card, frozenset(table), owner)


def _family(desk: Desk, table: Mapping[str, Any], owner: Owner) -> str:
    """The card's family; "" with a fault where it has none that is known."""
    path = (*owner.path, "family")
    raw = table.get("family")
    if isinstance(raw, str) and raw in FAMILIES:
        return raw
    known = listed(FAMILIES, "or")
    if "family" not in table:
        guess = _likely(table)
        desk.fault(
            path,
            f"{owner.words} has no family",
            f"family is required: {known}",
            f'add family = "{guess or "bjt"}"' + (", which its keys fit" if guess else ""),
            "table",
        )
    else:
        near = desk.near(raw, FAMILIES) if isinstance(raw, str) else ""
        desk.fault(
            path,
            f"{quoted(raw)} is not a family of cards",
            f"family of {owner.words} is {known}",
            f'write family = "{near}" (the nearest)' if near else f"write {known}",
        )
    return ""


def _likely(table: Mapping[str, Any]) -> str:
    """The family that takes most of the keys, where one leads."""
    counts = {family: sum(key in table for key in _keys(family)) for family in FAMILIES}
    best = max(counts, key=lambda family: counts[family])
    return best if list(counts.values()).count(counts[best]) == 1 else ""


def _keys(family: str) -> list[str]:
    return [param.key for param in FAMILIES[family]]


def _keys_of_no_family(desk: Desk, table: Mapping[str, Any], owner: Owner) -> None:
    """Without a family only those keys are wrong that no card takes."""
    known = {key for family in FAMILIES for key in _keys(family)}
    for key in table:
        if key not in known:
            desk.fault(
                (*owner.path, key),
                f"unknown key {quoted(key)} in {owner.words}",
                "no card takes it",
                rows.nearest_key(desk, key, known),
                "key",
            )


def _unknown(desk: Desk, key: str, family: str) -> tuple[str, str]:
    others = [other for other in FAMILIES if key in _keys(other)]
    if others:
        near = desk.near(key, _keys(family))
        return (
            f"{key} belongs to {listed(others)} cards, and this is a {family} card",
            "take it out" + (f", or write {near}, the nearest key of a {family} card" if near else ""),
        )
    return f"a {family} card has no such key", rows.nearest_key(desk, key, _keys(family))
