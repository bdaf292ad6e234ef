"""Paths into a stage: its keys, its tolerances, the arms of a ladder, the poles of a block."""

from __future__ import annotations

from polebook.chain import stage_lists
from polebook.chain.desk import TextPath
from polebook.chain.located import Data, Located, PathRefused, in_table, no_key, no_start, position, stages
from polebook.chain.model import Arm
from polebook.chain.suggest import listed
from polebook.param import Param
from polebook.refusal import quoted
from polebook.stages.base import COMMON, Kind
from polebook.stages.ladder import ARM
from polebook.stages.registry import KINDS


def in_stage(name: str, rest: list[str], data: Data) -> Located:
    tables = stages(data)
    found = [at for at, stage in enumerate(tables) if stage.get("name") == name or name == f"#{at + 1}"]
    if not found:
        raise no_start(name, data)
    if len(found) > 1:
        places = listed(f"#{at + 1}" for at in found)
        raise PathRefused(
            f"{len(found)} stages are named {quoted(name)}",
            "a path must lead to one of them",
            f"name them by position, {places}, for example #{found[-1] + 1}.name",
        )
    at = found[0]
    stage, path, key = tables[at], ("stage", at), rest[0]
    kind = KINDS.get(stage["kind"]) if isinstance(stage.get("kind"), str) else None
    family = family_of(stage, data) if kind else ""
    if key == "arms" and len(rest) > 1:
        return _in_arm(name, path, rest[1:], stage)
    if key == "tolerance" and len(rest) > 1:
        return _in_tolerance(name, path, ".".join(rest[1:]), stage, kind, family)
    if key in ("poles", "lower_poles") and len(rest) == 2:
        raw = stage.get(key)
        number = position(rest[1], len(raw) if isinstance(raw, list) else 0, f"item of {key}", f"stage {name}")
        return Located((*path, key, number), f"{name}.{key}.{rest[1]}", Param(f"{key}", "frequency", ""))
    params = kind.keys(family).values() if kind else _any_stage()
    if len(rest) > 1 or (key not in {param.key for param in params} and key not in stage):
        why = f"stage {name} is of kind {kind.name}; `polebook kinds {kind.name}` lists its keys" if kind else ""
        raise no_key(".".join(rest), [param.key for param in params], f"stage {name}", why)
    return in_table(params, path, name, rest, stage, f"stage {name}")


def _any_stage() -> list[Param]:
    rows = [*COMMON, *(param for kind in KINDS.values() for param in kind.params)]
    return list({param.key: param for param in rows}.values())


def family_of(stage: Data, data: Data) -> str:
    """The family of the stage's card, "" where that can't be told."""
    cards = data.get("device")
    card = cards.get(stage.get("device")) if isinstance(cards, dict) and isinstance(stage.get("device"), str) else None
    family = card.get("family", "") if isinstance(card, dict) else ""
    return family if isinstance(family, str) else ""


def arms_of(stage: Data) -> tuple[Arm, ...]:
    """The arms as far as their parts' names go."""
    raw = stage.get("arms")
    tables = raw if isinstance(raw, list) else []
    names = {param.key for param in ARM if param.key != "role"}
    return tuple(
        Arm(at + 1, True, tuple(key for key in arm if key in names))
        for at, arm in enumerate(tables)
        if isinstance(arm, dict)
    )


def _in_arm(name: str, path: TextPath, rest: list[str], stage: Data) -> Located:
    raw = stage.get("arms")
    at = position(rest[0], len(raw) if isinstance(raw, list) else 0, "arm", f"stage {name}")
    if len(rest) == 1:
        raise PathRefused(
            f"{name}.arms.{rest[0]} is a table", "a path ends in a key", f"name a part: {name}.arms.{rest[0]}.series_r"
        )
    table = raw[at] if isinstance(raw, list) else {}
    return in_table(
        ARM, (*path, "arms", at), f"{name}.arms.{rest[0]}", rest[1:], table, f"arm {rest[0]} of stage {name}"
    )


def _in_tolerance(name: str, path: TextPath, key: str, stage: Data, kind: Kind | None, family: str) -> Located:
    inner: TextPath = (*path, "tolerance", key)
    held = stage.get("tolerance")
    if kind is None or (isinstance(held, dict) and key in held):
        return Located(inner, f"{name}.tolerance.{key}", Param(key, "share", "", sign="nonnegative"))
    known = stage_lists.tolerance_keys(kind, family, arms_of(stage))
    if key not in known:
        raise no_key(key, known, f"tolerance of stage {name}")
    return Located(inner, f"{name}.tolerance.{key}", Param(key, "share", "", sign="nonnegative"))
