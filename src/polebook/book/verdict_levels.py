"""Why the swing or the supply current is not what was wanted: the stage that ends first, the stage that takes most."""

from __future__ import annotations

from typing import TYPE_CHECKING

from polebook.book.swing import BOTTOM, CUT_OFF, DATA, GRID, NEGATIVE, OHMIC, OUTPUT, POSITIVE, SATURATION
from polebook.book.verdict_words import figure, stated

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.book.targets import Target

_MENDS = {
    CUT_OFF: "more current in {stage}, or less load on {node}, lifts it",
    SATURATION: "more voltage across {stage} lifts it", OHMIC: "more voltage across {stage} lifts it",
    BOTTOM: "more voltage across {stage} lifts it", GRID: "a grid further below its cathode lifts it",
    POSITIVE: "a wider supply, or a lower vout, lifts it", NEGATIVE: "a wider supply, or a higher vout, lifts it",
    OUTPUT: "less load on {stage} lifts it", DATA: "only a stage that swings wider lifts it",
}


def headline(of: Ledger, target: Target) -> str:
    """"swing 2.38 V for 3 V"."""
    if target.name == "swing":
        return f"swing {figure(target.got, 'V')} for {stated(target.want, 'V')}"
    return f"supply current {figure(target.got, 'A')} for {stated(target.want, 'A')}"


def cause(of: Ledger, target: Target) -> str:
    """What holds the swing down, or draws the current, in one clause."""
    return _ends(of) if target.name == "swing" else _draws(of)[0]


def mend(of: Ledger, target: Target) -> str:
    """What would change it, in one clause."""
    first = of.levels.first if of.levels else None
    if target.name == "current":
        return _draws(of)[1]
    if of.levels is None or first is None or first.least is None:
        return ""
    return _MENDS[first.least.by].format(stage=first.stage, node=of.levels.names[first.node])


def _ends(of: Ledger) -> str:
    first = of.levels.first if of.levels else None
    if of.levels is None or first is None or first.least is None:
        return ""
    return (f"{first.stage} clips first, by {first.least.by}, at {figure(first.least.volts, 'V')} peak on "
            f"{of.levels.names[first.node]}")


def _draws(of: Ledger) -> tuple[str, str]:
    """(which stage takes most of the greater rail, what would spare current)."""
    sums: dict[str, float] = {}
    for draw in of.rails.draws:
        if draw.rail == of.rails.greater and draw.current is not None:
            sums[draw.stage] = sums.get(draw.stage, 0.0) + draw.current
    if not sums:
        return "", ""
    most = max(sums, key=lambda stage: abs(sums[stage]))
    return f"{most} takes most of it, {figure(abs(sums[most]), 'A')}", f"less current in {most} spares most"
