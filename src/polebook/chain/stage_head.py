"""What a stage begins with: its name, its kind, its cards."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from polebook.chain.cards import NAME, CardSeen
from polebook.chain.desk import Desk, Owner
from polebook.chain.suggest import listed
from polebook.chain.tables import RESERVED
from polebook.refusal import quoted
from polebook.stages.base import Kind
from polebook.stages.registry import KINDS

Cards = Mapping[str, CardSeen]
_NODE = re.compile(r"n[0-9]+")


def name_of(desk: Desk, table: Mapping[str, Any], at: int, taken: dict[str, int]) -> str:
    """The stage's name; "" with a fault where it has none that it may have."""
    path = ("stage", at, "name")
    raw = table.get("name")
    if "name" not in table:
        desk.fault(
            path,
            f"stage number {at + 1} has no name",
            "every stage has a name, under which the ledger lists it",
            f'add name = "Q{at + 1}"',
            "table",
        )
    elif not isinstance(raw, str) or not NAME.fullmatch(raw):
        desk.fault(
            path,
            f"{quoted(raw)} can't be the name of a stage",
            "a name is a text of letters, digits, _ and -, at least one of them",
            f'write for example name = "Q{at + 1}"',
        )
    elif raw in RESERVED or _NODE.fullmatch(raw):
        why = f"{raw} is the name of a node" if raw not in RESERVED else f"{raw} names a part of every chain"
        desk.fault(
            path,
            f"{quoted(raw)} can't be the name of a stage",
            why + ", so paths to it would be ambiguous",
            f'choose another name, for example "Q{at + 1}"',
        )
    elif raw in taken:
        line = desk.place(("stage", taken[raw], "name")).line
        desk.fault(
            path,
            f"a second stage is named {quoted(raw)}",
            f"names are unique, and the first stands in line {line}",
            "give one of them another name",
        )
    else:
        taken[raw] = at
        return raw
    return ""


def kind_of(desk: Desk, table: Mapping[str, Any], owner: Owner) -> Kind | None:
    path = (*owner.path, "kind")
    raw = table.get("kind")
    if isinstance(raw, str) and raw in KINDS:
        return KINDS[raw]
    if "kind" not in table:
        desk.fault(
            path,
            f"{owner.words} has no kind",
            f"the kind says what the stage is: {listed(KINDS, 'or')}",
            'add kind = "common-emitter", or another',
            "table",
        )
        return None
    near = desk.near(raw, KINDS) if isinstance(raw, str) else ""
    desk.fault(
        path,
        f"{quoted(raw)} is not a kind of stage",
        f"the kinds are {listed(KINDS)}",
        f'write kind = "{near}", the nearest known kind' if near else "write one of these kinds",
    )
    return None


def card_of(desk: Desk, table: Mapping[str, Any], key: str, kind: Kind, owner: Owner, cards: Cards) -> CardSeen | None:
    """The card that `key` names; None with a fault where there is none that the kind takes."""
    path = (*owner.path, key)
    fitting = [name for name, seen in cards.items() if seen.family in kind.families]
    wanted = listed(kind.families, "or")
    if key not in table:
        if key == "device":
            fix = (
                f'add device = "{fitting[0]}"'
                if fitting
                else f'add a card [device.D] with family = "{kind.families[0]}" and device = "D" here'
            )
            desk.fault(path, f"{owner.words} has no device", f"a {kind.name} stage takes a {wanted} card", fix, "table")
        return None
    raw = table[key]
    if not isinstance(raw, str):
        desk.fault(
            path,
            f"{quoted(raw)} is not the name of a card",
            f"{key} of {owner.words} names a [device.NAME] table",
            f'write a name in quotes: {key} = "{fitting[0] if fitting else "D"}"',
        )
        return None
    if raw not in cards:
        near = desk.near(raw, cards) or (fitting[0] if len(fitting) == 1 else "")
        have = f"the cards of this file are {listed(cards)}" if cards else "this file has no cards"
        fix = f'write {key} = "{near}", the nearest known card, or add ' if near else "add "
        name = raw if NAME.fullmatch(raw) else "NAME"
        desk.fault(
            path,
            f"there is no card {quoted(raw)}",
            f"{key} of {owner.words} names a [device.NAME] table; {have}",
            f'{fix}a table [device.{name}] with family = "{kind.families[0]}"',
        )
        return None
    seen = cards[raw]
    if seen.family and seen.family not in kind.families:
        desk.fault(
            path,
            f"a {kind.name} stage takes no {seen.family} card",
            f"{key} of {owner.words} is card {raw}, of family {seen.family}; {kind.name} takes {wanted}",
            _mend(kind, seen.family, fitting),
        )
    return seen


def _mend(kind: Kind, family: str, fitting: list[str]) -> str:
    same = [other.name for other in KINDS.values() if other.topology == kind.topology and family in other.families]
    ways = [f'write kind = "{name}"' for name in same] + [f"name the card {name}" for name in fitting[:1]]
    return ", or ".join(ways) or f"name a card of family {listed(kind.families, 'or')}"
