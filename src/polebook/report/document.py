"""Reading the document: what several pages ask of it."""

from __future__ import annotations

from collections.abc import Mapping
from math import isfinite
from typing import Any

Document = Mapping[str, Any]  # as json.loads gives it: LEDGER.md's schema
Entry = Mapping[str, Any]


def finite(value: Any) -> Any:
    """`value`, a document or a piece of one, with None for every number that is not finite."""
    if isinstance(value, float):
        return value if isfinite(value) else None
    if isinstance(value, Mapping):
        return {key: finite(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [finite(item) for item in value]
    return value


def entries(document: Document, section: str) -> list[Entry]:
    """The rows of a section; none where it is null."""
    return list(document.get(section) or [])


def interstage(document: Document) -> list[Entry]:
    """The nodes between stages, in signal order."""
    return [node for node in entries(document, "nodes") if node["interstage"]]


def input_node(document: Document, at: int) -> str:
    """Name of the node that drives line `at` (1: the first stage). Nodes that are one go by the lower number."""
    names = {node["name"] for node in interstage(document)}
    return next((f"n{k}" for k in range(at - 1, -1, -1) if f"n{k}" in names), "")


def output_node(document: Document, at: int) -> str:
    """Name of the node at the output of line `at`."""
    return input_node(document, at + 1)


def part_name(entry: Entry) -> str:
    """A part's full name, "Q2.c_comp"."""
    return f"{entry['stage']}.{entry['part']}"


def greatest(document: Document, end: str) -> Entry | None:
    """The part that owns most of the "upper" or "lower" edge; None where no share is known."""
    owners = [part for part in entries(document, "parts") if part[f"owns_{end}"] is not None]
    return max(owners, key=lambda part: float(part[f"owns_{end}"]), default=None)


def bridge_of(document: Document, stage: str, part: str) -> tuple[int, Entry] | None:
    """The line number and the Miller split of a bridging part, None where it bridges nothing."""
    for at, line in enumerate(entries(document, "lines")):
        if line["name"] != stage:
            continue
        for bridge in line["bridges"] or []:
            if bridge["part"].rpartition(".")[2] == part:
                return at, bridge
    return None
