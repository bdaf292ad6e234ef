"""`free` and `tolerance` of a stage: both name keys of that stage."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from polebook.chain import rows, values
from polebook.chain.desk import Desk, Owner, TextPath
from polebook.chain.model import Arm
from polebook.param import Param
from polebook.quantity import DIMENSIONS
from polebook.refusal import quoted
from polebook.stages.base import Kind

PARTS = frozenset({"resistance", "capacitance", "inductance"})
_STATED = frozenset({"gain_into", "nf_source"})  # conditions of a measurement, not parts


def free_keys(kind: Kind, family: str, arms: tuple[Arm, ...]) -> list[str]:
    """Keys that planning may change: every number of the stage but its allotment, "arms.1.series_r" of a ladder."""
    own = [p.key for p in kind.keys(family).values() if p.dimension in DIMENSIONS and p.key != "allot"]
    return own + _arm_keys(arms)


def tolerance_keys(kind: Kind, family: str, arms: tuple[Arm, ...]) -> list[str]:
    """Keys that a built stage may be off in: its R, C and L, and what a block's data sheet states."""
    own = [
        p.key
        for p in kind.keys(family).values()
        if (p.dimension in PARTS and p.key not in _STATED) or p.dimension in ("ratio", "quantities")
    ]
    return own + _arm_keys(arms)


def _arm_keys(arms: tuple[Arm, ...]) -> list[str]:
    return [f"arms.{arm.number}.{part}" for arm in arms for part in arm.parts]


def free(
    desk: Desk, table: Mapping[str, Any], kind: Kind, family: str, owner: Owner, arms: tuple[Arm, ...]
) -> tuple[str, ...]:
    """The keys that `free` lists."""
    if "free" not in table:
        return ()
    path = (*owner.path, "free")
    known = free_keys(kind, family, arms)
    kept: list[str] = []
    for at, key in values.words(desk, table["free"], Param("free", "keys", ""), owner, path):
        if key in known:
            kept.append(key)
        else:
            why = (
                f"{key} is no number that planning could change"
                if key in kind.keys(family)
                else (f"free of {owner.words} lists keys of that stage, and a {kind.name} stage has no such key")
            )
            desk.fault((*path, at), f"{quoted(key)} can't be free", why, rows.nearest_key(desk, key, known))
    return tuple(dict.fromkeys(kept))


def tolerances(
    desk: Desk, table: Mapping[str, Any], kind: Kind, family: str, owner: Owner, arms: tuple[Arm, ...]
) -> None:
    """The numbers NAME.tolerance.KEY."""
    if "tolerance" not in table:
        return
    path: TextPath = (*owner.path, "tolerance")
    if not isinstance(table["tolerance"], dict):
        desk.fault(
            path,
            f"tolerance of {owner.words} is not a table",
            f"{quoted(table['tolerance'])} is {values.kind_of_value(table['tolerance'])}; each part has its own",
            'write tolerance = { KEY = "1 %" } with a key of this stage',
        )
        return
    known = tolerance_keys(kind, family, arms)
    inner = Owner(path, owner.number("tolerance"), f"the tolerances of {owner.words}")
    for key, at, raw in _flat(table["tolerance"], path):
        if key not in known:
            why = (
                f"{key} has no tolerance of its own"
                if key in kind.keys(family)
                else (f"tolerance of {owner.words} names parts of that stage, and a {kind.name} stage has no such part")
            )
            desk.fault(
                at, f"unknown key {quoted(key)} in {inner.words}", why, rows.nearest_key(desk, key, known), "key"
            )
            continue
        share = values.number(desk, raw, Param(key, "share", "", sign="nonnegative"), inner, at)
        if share is not None and below_one(desk, raw, share, f"tolerance of {key} of {owner.words}", at):
            desk.put(inner.number(key), share, at)


def _flat(table: Mapping[str, Any], path: TextPath, head: str = "") -> Iterator[tuple[str, TextPath, object]]:
    """Dotted keys as one: `arms.2.shunt_c` may be written in quotes or as tables."""
    for key, raw in table.items():
        if isinstance(raw, dict) and raw:
            yield from _flat(raw, (*path, key), f"{head}{key}.")
        else:
            yield f"{head}{key}", (*path, key), raw


def below_one(desk: Desk, raw: object, share: float, label: str, path: TextPath) -> bool:
    """A tolerance of 100 % and more would let a part reach zero."""
    if share < 1.0:
        return True
    fix = f'write it with %: "{raw} %"' if isinstance(raw, int | float) else "write a share below 100 %"
    desk.fault(path, f"{label} is {share * 100:g} %", "at 100 % and more a built part could reach zero", fix)
    return False
