"""Paths as people write them, "Q1.rc" or "device.D.beta", against the content of a file."""

from __future__ import annotations

from polebook.chain.located import EXAMPLES, Data, Located, PathRefused, in_table, no_start, position, stage_names
from polebook.chain.stage_paths import in_stage
from polebook.chain.suggest import listed, nearest
from polebook.chain.tables import BENCH, SECTIONS, TOP
from polebook.devices.registry import FAMILIES
from polebook.param import Param
from polebook.refusal import quoted

__all__ = ["Located", "PathRefused", "locate"]


def locate(words: str, data: Data) -> Located:
    """Where `words` leads in `data`, a file's content. Raises PathRefused with the nearest names."""
    parts = words.strip().split(".")
    if "" in parts:
        raise PathRefused(f"{quoted(words)} is not a path", "a path is names joined by single dots", EXAMPLES)
    first, rest = parts[0], parts[1:]
    if not rest:
        return _alone(first, data)
    if first in SECTIONS:
        return in_table(SECTIONS[first], (first,), first, rest, data.get(first), f"[{first}]")
    if first == "device":
        return _in_card(rest, data)
    if first == "bench":
        return _in_bench(rest, data)
    return in_stage(first, rest, data)


def _alone(name: str, data: Data) -> Located:
    for param in TOP:
        if param.key == name:
            return Located((name,), name, param)
    if name in data and name not in (*SECTIONS, "device", "bench", "stage"):
        return Located((name,), name, None)
    if name in SECTIONS or name in stage_names(data) or name in ("device", "bench"):
        raise PathRefused(
            f"{name} is a table", "a path ends in a key", f"name a key of it, for example {_example(name, data)}"
        )
    raise no_start(name, data)


def _example(name: str, data: Data) -> str:
    if name in SECTIONS:
        return f"{name}.{SECTIONS[name][0].key}"
    return {"device": "device.D.beta", "bench": "bench.1.gain"}.get(name, f"{name}.couple")


def _in_card(rest: list[str], data: Data) -> Located:
    cards = data.get("device")
    cards = cards if isinstance(cards, dict) else {}
    name = rest[0]
    if name not in cards:
        near = nearest(name, cards)
        raise PathRefused(
            f"there is no card {quoted(name)}",
            f"the cards of the file are {listed(cards)}" if cards else "the file has no cards",
            f"did you mean device.{near}?" if near else f"add a table [device.{name}] by hand",
        )
    card = cards[name] if isinstance(cards[name], dict) else {}
    if len(rest) == 1:
        raise PathRefused(
            f"device.{name} is a table", "a path ends in a key", f"name a key of it, for example device.{name}.family"
        )
    params = FAMILIES.get(card.get("family", "")) or _any_card()
    return in_table(params, ("device", name), f"device.{name}", rest[1:], card, f"card {name}")


def _any_card() -> tuple[Param, ...]:
    return tuple({param.key: param for params in FAMILIES.values() for param in params}.values())


def _in_bench(rest: list[str], data: Data) -> Located:
    benches = data.get("bench")
    at = position(rest[0], len(benches) if isinstance(benches, list) else 0, "bench", "the file")
    if len(rest) == 1:
        raise PathRefused(
            f"bench.{rest[0]} is a table", "a path ends in a key", f"name a key of it: bench.{rest[0]}.gain"
        )
    table = benches[at] if isinstance(benches, list) else {}
    return in_table(BENCH, ("bench", at), f"bench.{rest[0]}", rest[1:], table, f"bench {rest[0]}")
