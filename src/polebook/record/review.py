"""All that a review of a chain tells, gathered as plain data: the ledger, what the drawings show, and what the file
says in words."""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING, Any

from polebook.book import working
from polebook.book.direct import direct
from polebook.book.ledger import Ledger
from polebook.book.noise_rows import page as hiss
from polebook.chain.model import Chain
from polebook.plan.parts import parts
from polebook.record.curves import drawn
from polebook.record.leaning import leaning

if TYPE_CHECKING:
    from polebook.record.bench import Overlay

MOST_WORKINGS = 8


def review(
    of: Ledger, file: str, day: str = "", *, built: Mapping[str, Any] | None = None,
    bench: Mapping[str, Any] | None = None, benches: Iterable[Overlay] = (), spread: Mapping[str, Any] | None = None,
) -> dict[str, Any]:
    """The document of `report.review`. Of the chain's path only the name of the file is told.

    day     the date that it is to carry, "" for none
    built   what the target for the yield was judged by, None where nothing was built
    bench   what was measured against the plan, the answer of `polebook bench --json`; benches: its sweeps
    spread  what a spread came to (`plan.spread_document`), where it was asked for

    Raises ProblemsFound.
    """
    told = drawn(of, benches)
    return {
        **told, "direct": direct(of), "noise": hiss(of), "file": os.path.basename(file), "day": day,
        "stages": stages(of.chain), "notes": notes(of.chain), "supply": supply(of.chain),
        "workings": workings(of, told), "parts_list": parts(of.chain),
        "built": built, "bench": bench, "spread": spread,
    }


def workings(of: Ledger, document: Mapping[str, Any]) -> list[dict[str, Any]]:
    """How the figures came about that the verdict leans on, as far as they are there."""
    known = set(working.names(of))
    found = (working.working(of, name).document() for name in leaning(document) if name in known)
    return [one for one in found if one["value"] is not None][:MOST_WORKINGS]


def stages(chain: Chain) -> list[dict[str, Any]]:
    """What every stage is; "device" names its cards."""
    return [{"name": stage.name, "kind": stage.kind, "device": ", ".join(filter(None, (stage.device, stage.upper))),
             "left_out": stage.left_out} for stage in chain.stages]


def notes(chain: Chain) -> list[dict[str, str]]:
    """Every note of the file with what it is about, that of the file itself ("") first."""
    told = [("", chain.note), ("targets", chain.target_note)]
    told += [(stage.name, stage.note) for stage in chain.stages]
    told += [(card.name, card.note) for card in chain.cards.values()]
    return [{"about": about, "text": text.strip()} for about, text in told if text.strip()]


def supply(chain: Chain) -> dict[str, float]:
    """Volts of the rails that stand, and the temperature in °C."""
    keys = ("positive", "negative", "temperature")
    return {key: chain.numbers[f"supply.{key}"] for key in keys
            if key == "temperature" or chain.get(f"supply.{key}")}
