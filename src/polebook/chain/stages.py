"""The stages: every [[stage]] table, in signal order."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from polebook.chain import arms, rows, stage_checks, stage_keys, stage_lists
from polebook.chain.cards import CardSeen
from polebook.chain.desk import Desk, Owner
from polebook.chain.model import Stage
from polebook.chain.stage_head import Cards, card_of, kind_of, name_of
from polebook.chain.tables import MOST_STAGES
from polebook.param import Param
from polebook.stages.base import Kind

_OPPOSITE = {
    "npn": ("positive", "ground"),
    "n": ("positive", "ground"),
    "": ("positive", "ground"),
    "pnp": ("ground", "positive"),
    "p": ("ground", "positive"),
}


@dataclass(frozen=True, slots=True)
class StageSeen:
    """A stage as far as it could be read: `kind` is None where the file does not say a known one."""

    stage: Stage
    kind: Kind | None
    owner: Owner


def read(desk: Desk, raw: object, cards: Cards) -> list[StageSeen]:
    """Every stage in signal order; faults go to the desk."""
    tables = rows.as_tables(desk, raw, "stage")
    if raw == []:
        no_stage(desk)
    if len(tables) > MOST_STAGES:
        desk.fault(
            ("stage", MOST_STAGES),
            f"the chain has {len(tables)} stages, and at most {MOST_STAGES} are taken",
            "the ledger is made for chains that one can hold in view",
            "split the chain over two files",
        )
    taken: dict[str, int] = {}
    return [_stage(desk, at, table, cards, taken) for at, table in tables[:MOST_STAGES]]


def names(top: Mapping[str, Any]) -> list[str]:
    """Every name that a stage has in the file, good or not."""
    raw = top.get("stage")
    stages = [stage for stage in raw if isinstance(stage, dict)] if isinstance(raw, list) else []
    return [stage["name"] for stage in stages if isinstance(stage.get("name"), str)]


def no_stage(desk: Desk) -> None:
    """The fault of a chain without stages."""
    desk.fault(
        ("stage",),
        "the chain has no stage",
        "a chain has 1 to 64 stages, in signal order",
        'add one: [[stage]] with name = "Q1" and kind = "common-emitter"',
        "key",
    )


def _stage(desk: Desk, at: int, table: Mapping[str, Any], cards: Cards, taken: dict[str, int]) -> StageSeen:
    path = ("stage", at)
    name = name_of(desk, table, at, taken)
    owner = Owner(path, name or f"#{at + 1}", f"stage {name}" if name else f"stage number {at + 1}")
    desk.mark(owner.prefix, path)
    kind = kind_of(desk, table, owner)
    if kind is None:
        stage_keys.of_no_kind(desk, table, owner)
        return StageSeen(Stage(name, ""), None, owner)
    device = card_of(desk, table, "device", kind, owner, cards) if kind.families else None
    upper = card_of(desk, table, "upper", kind, owner, cards) or device if kind.name == "cascode" else None
    family = device.family if device and device.family in kind.families else ""
    row = rows.read(desk, table, owner, _params(kind, family), stage_keys.explainer(desk, kind, family))
    given_arms = arms.read(desk, table["arms"], owner) if "arms" in table and kind.topology == "ladder" else ()
    keys = frozenset(table)
    inverting = stage_checks.block_gain(desk, table, owner) if kind.topology == "block" else None
    stage_checks.combinations(desk, kind, keys, owner)
    stage_checks.same_polarity(desk, device, upper, owner)
    free = stage_lists.free(desk, table, kind, family, owner, given_arms)
    stage_lists.tolerances(desk, table, kind, family, owner, given_arms)
    rails = _rails(row, device) if kind.families and kind.families != ("opamp",) else ("", "")
    stage = Stage(
        name=name,
        kind=kind.name,
        device=device.card.name if device else "",
        upper=upper.card.name if upper else "",
        left_out=row.flags.get("left_out", False),
        output_to=rails[0],
        lower_to=rails[1],
        arms=given_arms,
        poles=row.counts.get("poles", 0),
        lower_poles=row.counts.get("lower_poles", 0),
        inverting=inverting,
        free=free,
        note=row.texts.get("note", ""),
    )
    return StageSeen(stage, kind, owner)


def _params(kind: Kind, family: str) -> list[Param]:
    """The keys to read; name and kind are judged apart, device and upper too, but must be known."""
    judged = {"name", "kind", "device", "upper"}
    return [Param(p.key, "judged", p.about) if p.key in judged else p for p in kind.keys(family).values()]


def _rails(row: rows.Row, device: CardSeen | None) -> tuple[str, str]:
    output, lower = _OPPOSITE[device.card.polarity if device else ""]
    return row.texts.get("output_to", output), row.texts.get("lower_to", lower)
