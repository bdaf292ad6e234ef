"""The dB of the upper-edge budget that source, stages and load claim."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from typing import Any

from polebook.chain.desk import Desk
from polebook.chain.suggest import listed
from polebook.chain.tables import BUDGET_DB


def check(desk: Desk, top: Mapping[str, Any], left_out: Collection[str], names: Collection[str]) -> None:
    """What source, stages and load claim together must fit the budget of an edge."""
    claims = {
        name: desk.numbers[f"{name}.allot"]
        for name in ("source", *names, "load")
        if name not in left_out and f"{name}.allot" in desk.numbers
    }
    total = sum(claims.values())
    if total > BUDGET_DB * (1 + 1e-6):  # so that 3.0103 dB is not over 10·log10(2)
        last = list(claims)[-1]
        desk.fault(
            _allot_path(top, last),
            f"the allotments sum to {total:.4g} dB",
            f"{listed(claims)} claim more than the {BUDGET_DB:.4f} dB that an edge at -3 dB has to give",
            "lower or take out some of their allot keys",
            "key",
        )


def _allot_path(top: Mapping[str, Any], name: str) -> tuple[str | int, ...]:
    if name in ("source", "load"):
        return (name, "allot")
    at = next(at for at, stage in enumerate(top["stage"]) if isinstance(stage, dict) and stage.get("name") == name)
    return ("stage", at, "allot")
