"""Which parts make each entry of the matrix, over all segments: the network's stamps sorted by slot."""

from __future__ import annotations

from dataclasses import dataclass, field

from polebook.circuit.layout import Layout


@dataclass(slots=True)
class Terms:
    """What one entry is the sum of: (part or branch, sign) each, and a plain number.

    conducting takes 1/R, forward the value, storing s·value, washing 1/(s·value), compound the admittance of a branch.
    """

    number: float = 0.0
    conducting: list[tuple[int, float]] = field(default_factory=list)
    forward: list[tuple[int, float]] = field(default_factory=list)
    storing: list[tuple[int, float]] = field(default_factory=list)
    washing: list[tuple[int, float]] = field(default_factory=list)
    compound: list[tuple[int, float]] = field(default_factory=list)


def terms(layout: Layout) -> dict[int, Terms]:
    """Slot -> terms, of the slots that have any.

    All segments' shares of an entry stand together: an interstage node's is complete before the segment behind it is
    eliminated, which changes no sum but its order.
    """
    stamps = layout.stamps
    found: dict[int, Terms] = {}

    def at(entry: int) -> Terms:
        return found.setdefault(stamps.slot_of[entry], Terms())

    for entry in stamps.unit:
        at(entry).number += 1.0
    for sort in ("conducting", "forward", "storing", "washing", "compound"):
        for number, signed in getattr(stamps, sort):
            for entry, sign in signed:
                getattr(at(entry), sort).append((number, sign))
    return found
