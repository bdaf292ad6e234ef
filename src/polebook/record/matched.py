"""Which stage and card of one file is which of another: by name, and where the rest is alike by another name."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from polebook.chain.model import Chain, Stage
from polebook.record.sides import Side

ALIKE = 0.75  # of the values of a stage or card, for it to be the same one under another name
NAME = 0.25  # what the same name counts for beside the share of values that are alike


@dataclass(frozen=True, slots=True)
class Matched:
    """What two files have in common.

    stages, cards   name in the later file -> name in the earlier one; of the same name, or renamed
    moved           names in the later file of the stages that changed places: as few as tell the new order
    """

    stages: Mapping[str, str]
    cards: Mapping[str, str]
    moved: frozenset[str]


def matched(before: Side, after: Side) -> Matched:
    """Matches cards first, for stages name them."""
    cards = _cards(before.chain, after.chain)
    stages = _stages(before.chain, after.chain, cards)
    return Matched(stages, cards, _moved(before.chain, after.chain, stages))


def _cards(before: Chain, after: Chain) -> dict[str, str]:
    found = {name: name for name in after.cards if name in before.cards}
    left = [name for name in before.cards if name not in found]
    for name in after.cards:
        if name not in found and (old := next((old for old in left if _renamed(before, old, after, name)), None)):
            found[name] = old
            left.remove(old)
    return found


def _renamed(before: Chain, old: str, after: Chain, new: str) -> bool:
    """Whether a card is the other under a new name: wholly alike, or most of it and all stages that named it follow."""
    was, now = _card(before, old), _card(after, new)
    if was == now:
        return True
    names = {stage.name for stage in before.stages} & {stage.name for stage in after.stages}
    used = _users(before, old, names)
    follow = bool(used) and used <= _users(after, new, names)
    return follow and was["family"] == now["family"] and _alike(was, now) >= ALIKE


def _users(chain: Chain, card: str, names: set[str]) -> set[tuple[str, bool]]:
    """Which of the stages `names` have a card, as their device or as the upper one."""
    return {(stage.name, upper) for stage in chain.stages for upper in (False, True)
            if stage.name in names and (stage.upper if upper else stage.device) == card}


def _card(chain: Chain, name: str) -> dict[str, Any]:
    card = chain.cards[name]
    return {"family": card.family, "polarity": card.polarity, **_numbers(chain, f"device.{name}.")}


def _stages(before: Chain, after: Chain, cards: Mapping[str, str]) -> dict[str, str]:
    """The likest pairs first. A name counts for something, so that of like stages each stays itself, but not for all:
    stages that were numbered anew are not taken for one another."""
    old = [(at, stage, _said(before, stage)) for at, stage in enumerate(before.stages)]
    pairs = []
    for at, stage in enumerate(after.stages):
        said = _said(after, stage, cards)
        for place, other, was in old:
            alike, same = _alike(was, said), stage.name == other.name
            if same or (stage.kind == other.kind and alike >= ALIKE):
                pairs.append((alike + NAME * same, -abs(place - at), other.name, stage.name))
    found: dict[str, str] = {}
    for _, _, was_called, name in sorted(pairs, key=lambda pair: pair[:2], reverse=True):
        if name not in found and was_called not in found.values():
            found[name] = was_called
    return found


def _said(chain: Chain, stage: Stage, cards: Mapping[str, str] | None = None) -> dict[str, Any]:
    """What the file says of a stage beside its name and notes; cards by their names in the earlier file."""
    known = cards or {}
    words = {"device": known.get(stage.device, stage.device), "upper": known.get(stage.upper, stage.upper),
             "left_out": stage.left_out, "output_to": stage.output_to, "lower_to": stage.lower_to}
    return {key: word for key, word in words.items() if word} | _numbers(chain, f"{stage.name}.")


def _numbers(chain: Chain, prefix: str) -> dict[str, float]:
    return {path[len(prefix):]: value for path, value in chain.numbers.items()
            if path in chain.given and path.startswith(prefix)}


def _alike(one: Mapping[str, Any], other: Mapping[str, Any]) -> float:
    keys = one.keys() | other.keys()
    return sum(key in one and key in other and one[key] == other[key] for key in keys) / len(keys) if keys else 1.0


def _moved(before: Chain, after: Chain, stages: Mapping[str, str]) -> frozenset[str]:
    places = {stage.name: at for at, stage in enumerate(before.stages)}
    common = [stage.name for stage in after.stages if stage.name in stages]
    stay = longest_rising([places[stages[name]] for name in common])
    return frozenset(name for at, name in enumerate(common) if at not in stay)


def longest_rising(numbers: Sequence[int]) -> frozenset[int]:
    """Positions of a longest run that rises, others between left out; `numbers` are all different."""
    ends: list[int] = []  # position of the least number that a run of each length ends in
    ahead: list[int | None] = []
    for at, number in enumerate(numbers):
        length = bisect_left([numbers[end] for end in ends], number)
        ahead.append(ends[length - 1] if length else None)
        ends[length:length + 1] = [at]
    return frozenset(_back(ends[-1] if ends else None, ahead))


def _back(at: int | None, ahead: Sequence[int | None]) -> Iterable[int]:
    while at is not None:
        yield at
        at = ahead[at]
