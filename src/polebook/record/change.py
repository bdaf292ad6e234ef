"""One thing that a chain file says otherwise than another, and the steps that make it of the other's content."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from polebook.chain.said import change, said, short
from polebook.text.spans import Path

SORTS = ("stage added", "stage removed", "stage moved", "stage renamed", "kind changed", "left out", "taken in",
         "stage", "card added", "card removed", "card renamed", "card", "source", "load", "supply", "target",
         "tolerance", "preferred", "free", "bench", "title", "note")
"""What a change can be; of a value, what it is a value of."""

_QUIET = frozenset({"stage renamed", "card added", "card removed", "card renamed", "tolerance", "preferred", "free",
                    "bench", "title", "note"})
_JUDGED_BY = frozenset({"reference", "noise_from", "noise_to", "pulse", "upper", "lower"})


@dataclass(frozen=True, slots=True)
class Put:
    """A key of a table set, or taken out where `value` is None.

    table  ("stage", "Q1"), ("device", "D"), ("load", "")
    """

    table: tuple[str, str]
    path: Path
    value: Any


@dataclass(frozen=True, slots=True)
class Place:
    """A stage put where the later file has it: one that is new, or one that moves."""

    stage: str


@dataclass(frozen=True, slots=True)
class Remove:
    """A stage taken out."""

    stage: str


Step = Put | Place | Remove


@dataclass(frozen=True, slots=True)
class Change:
    """`sort` is one of SORTS.

    path           what is changed, named as in the later file: "Q1", "Q1.rc", "device.D.beta", "target.upper"
    before, after  as each file spells it; "" where it does not have it
    text           one line for a reader
    steps          what makes it of the earlier file's content, stages and cards named as there
    """

    sort: str
    path: str
    before: str
    after: str
    text: str
    steps: tuple[Step, ...] = ()

    @property
    def acts(self) -> bool:
        """Whether it may move a figure of the ledger. Wants of targets, names, tolerances and notes move none."""
        if self.sort == "target":
            return self.path.rpartition(".")[2] in _JUDGED_BY
        return self.sort not in _QUIET


def told(path: str, before: str, after: str, default: str = "") -> str:
    """A key with its two values: "rc of Q1: 2k2 to 2k4"; `default` stands in for one that is absent."""
    if default and not (before and after):
        return change(path, before or f"{default} by default", after or f"{default} by default")
    return change(path, before, after) if before else f"{said(path)} put in: {short(after)}"
