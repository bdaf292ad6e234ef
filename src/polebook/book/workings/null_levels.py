"""Why a figure of levels or rails is null, in plain words."""

from __future__ import annotations

from polebook.book.asked import unknown_draws
from polebook.book.workings.index import Entry
from polebook.book.workings.sheet import Books
from polebook.chain.suggest import listed

WHOLE = frozenset({"supply_current_a", "largest_source", "dynamic_range_db", "noise_margin_db", "full_power_hz"})
NO_NOISE = "the noise of the band is null: see overall.noise_total_input"
NO_BOUND = "the noise at this node has no bound at an end of the noise band where that of the output has one"
NO_CLIP = "no stage of the chain has a clip level that is known"


def rail(books: Books, entry: Entry) -> str:
    """Of a rail's current: what is not known of what it gives."""
    return unknown_draws(books.ledger.rails, [entry.row["rail"]])


def whole(books: Books, key: str, unjudged: str) -> str:
    """Of a figure of the chain; `unjudged`: why the chain has no edges at all, "" where it has."""
    levels, chain = books.ledger.levels, books.chain
    if key == "supply_current_a":
        rails = books.ledger.rails
        return unknown_draws(rails, list(rails.standing)) if rails.standing else "the file has no supply"
    if levels is None:
        return unjudged.replace("no edges", "no levels")
    if key == "full_power_hz":
        if levels.scale is None:
            return "source.largest is not stated, nor is a target for the swing: it depends on how large the signal is"
        return "no amplifier has a slew rate, and no device with a known current drives a capacitance"
    if key == "noise_margin_db" and chain.get("source.smallest") is None:
        return "source.smallest is not stated"
    if key != "noise_margin_db" and levels.largest_source is None:
        return NO_CLIP
    if key == "dynamic_range_db" and levels.largest_source == 0.0:
        return f"{levels.first.stage if levels.first else 'a stage'} clips without any signal"
    return NO_NOISE


def level(books: Books, entry: Entry) -> str:
    """Of a figure at a node."""
    key, levels = entry.key, books.ledger.levels
    if key in ("largest_v", "smallest_v"):
        return f"source.{key.removesuffix('_v')} is not stated"
    if key == "noise_v":
        return NO_NOISE if books.ledger.input_noise is None else NO_BOUND
    if levels is None:
        return "the chain is not stable"
    if key == "headroom_db" and entry.row["clip_v"] is not None:
        if entry.row["clip_v"] == 0.0:
            return "the stage clips without any signal: its bias leaves nothing to swing"
        return "source.largest is not stated"
    number = next(k for k, name in levels.names.items() if name == entry.row["node"])
    clip = levels.clip_at.get(number)
    if clip is None:
        return "nothing that amplifies drives the node: it does not clip"
    stage = next(stage for stage in books.chain.stages if stage.name == clip.stage)
    if stage.kind == "block":
        return f"clip of {clip.stage} is not stated"
    if not clip.bounds:
        return f"nothing bounds what {clip.stage} can swing"
    if books.chain.cards[stage.device].family == "opamp":
        return "the file has no supply, so that the amplifier's output has no bounds"
    lacking = listed([bound.by for bound in clip.bounds if bound.volts is None])
    return f"the bias of {clip.stage} does not tell what bounds its swing ({lacking})"
