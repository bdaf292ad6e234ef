"""Why a key does not belong to a stage, and what to write in its place."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from polebook.chain.desk import Desk, Owner
from polebook.chain.rows import Unknown, nearest_key
from polebook.chain.suggest import listed
from polebook.refusal import quoted
from polebook.stages.base import COMMON, GROUP, Kind, slot_key, slot_of
from polebook.stages.registry import KINDS


def every_key() -> dict[str, list[str]]:
    """Key -> the kinds that take it."""
    takers: dict[str, list[str]] = {}
    for kind in KINDS.values():
        for key in (p.key for p in (*COMMON, *kind.params)):
            takers.setdefault(key, []).append(kind.name)
    return takers


def of_no_kind(desk: Desk, table: Mapping[str, Any], owner: Owner) -> None:
    """Where the kind is not known only those keys are wrong that no kind takes."""
    known = every_key()
    for key in table:
        if key not in known:
            desk.fault(
                (*owner.path, key),
                f"unknown key {quoted(key)} in {owner.words}",
                "no kind of stage takes it",
                nearest_key(desk, key, known),
                "key",
            )


def explainer(desk: Desk, kind: Kind, family: str) -> Unknown:
    """Says of a key that `kind` does not take why it does not, and what to do."""

    def explain(key: str) -> tuple[str, str]:
        mine = kind.keys(family)
        group = family or (kind.families[0] if kind.families else "")
        slot = slot_of(key)
        if slot and group in GROUP and (own := slot_key(slot, group)) in mine:
            return (
                f"{key} is a key of other families; a {kind.name} stage with a {group} card writes {own}",
                f"write {own}",
            )
        takers = every_key().get(key, [])
        if takers and kind.name not in takers:
            return f"a {kind.name} stage does not take it; {listed(takers)} do{'es' if len(takers) == 1 else ''}", (
                "take it out, or change the kind"
            )
        return f"no kind of stage takes it; `polebook kinds {kind.name}` lists the keys", nearest_key(desk, key, mine)

    return explain
