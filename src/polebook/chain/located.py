"""Where a path leads, and the refusals that all paths share."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from polebook.chain.desk import TextPath
from polebook.chain.suggest import listed, nearest
from polebook.chain.tables import SECTIONS, TOP
from polebook.param import Param
from polebook.problem import Problem, ProblemsFound
from polebook.refusal import quoted

Data = Mapping[str, Any]
EXAMPLES = "write it like Q1.rc, source.couple, target.upper or device.D.beta"
_FEW = 20  # names that a message lists


class PathRefused(ProblemsFound):
    """A path that leads nowhere, with the reason as its one problem."""

    def __init__(self, what: str, why: str, fix: str) -> None:
        super().__init__((Problem(None, what, why, fix),))


@dataclass(frozen=True, slots=True)
class Located:
    """Where a path leads.

    path    in the text: ("stage", 0, "rc")
    number  among the chain's numbers: "Q1.rc"
    param   the row of the key; None where the file holds a key that is not known
    """

    path: TextPath
    number: str
    param: Param | None


def stage_names(data: Data) -> list[str]:
    """Names of the stages as far as they have one."""
    return [stage["name"] for stage in stages(data) if isinstance(stage.get("name"), str)]


def stages(data: Data) -> list[dict[str, Any]]:
    raw = data.get("stage")
    return [stage if isinstance(stage, dict) else {} for stage in raw] if isinstance(raw, list) else []


def no_start(name: str, data: Data) -> PathRefused:
    names = stage_names(data)
    near = nearest(name, [*names, *SECTIONS, "device", "bench", *(param.key for param in TOP)])
    have = f"the stages are {listed(names)}" if 0 < len(names) <= _FEW else f"the file has {len(names)} stages"
    return PathRefused(
        f"nothing is named {quoted(name)}",
        f"a path begins with a stage, a table or device; {have}",
        f"did you mean {near}? " + EXAMPLES if near else EXAMPLES,
    )


def in_table(params: Iterable[Param], path: TextPath, head: str, rest: list[str], table: object, owner: str) -> Located:
    known = {param.key: param for param in params}
    if len(rest) == 1 and rest[0] in known:
        return Located((*path, rest[0]), f"{head}.{rest[0]}", known[rest[0]])
    if len(rest) == 1 and isinstance(table, dict) and rest[0] in table:
        return Located((*path, rest[0]), f"{head}.{rest[0]}", None)  # a key that is not known, to be taken out
    raise no_key(".".join(rest), known, owner)


def no_key(key: str, known: Iterable[str], owner: str, why: str = "") -> PathRefused:
    known = list(known)
    near = nearest(key, known)
    keys = f"its keys are {listed(known)}" if len(known) <= _FEW else "no key of it has that name"
    return PathRefused(
        f"{owner} has no key {quoted(key)}",
        why or keys,
        f"did you mean {near}?" if near else f"name one of its keys: {listed(known)}",
    )


def position(word: str, count: int, noun: str, owner: str) -> int:
    """0-based position of the item that `word` counts from 1."""
    if word.isdecimal() and word.isascii() and len(word) < 6 and 1 <= int(word) <= count:
        return int(word) - 1
    have = f"{owner} has {count} of them, counted from 1" if count else f"{owner} has none"
    raise PathRefused(
        f"there is no {noun} {word}", have, f"name a {noun} that is there" if count else f"write the {noun} by hand"
    )
