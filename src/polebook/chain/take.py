"""A device card taken over from another chain file, with its comments."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from polebook.chain import edits
from polebook.chain.located import PathRefused
from polebook.chain.read import reading_of
from polebook.chain.suggest import listed, nearest
from polebook.problem import Problem, ProblemsFound
from polebook.refusal import quoted
from polebook.text import literal, splice
from polebook.text.blocks import block_of
from polebook.text.data import same
from polebook.text.edit import Edit
from polebook.text.spans import Spans, Unscannable, scan

_FEW = 20  # names that a message lists


def take_card(text: str, file: str, name: str, other_text: str, other: str) -> tuple[Edit, list[Problem]]:
    """The edit of `text` that adds the card `name` of the text `other_text`, and the faults that `text` then has.

    An empty edit where it has the same card already. Raises ProblemsFound where `other` has no such card, `file` has
    another one of that name, either text is no TOML, or the card would add a fault.
    """
    before = reading_of(text, file)
    here = _cards(edits.content(before, text))
    theirs = reading_of(other_text, other)
    card = _wanted(_cards(edits.content(theirs, other_text)), name, other)
    if name in here:
        if same(here[name], card):
            return Edit(()), before.problems
        raise _another(here[name], card, name, file, other)
    try:
        block = _lines(scan(other_text), name)
    except Unscannable as error:
        raise PathRefused(f"card {name} can't be found in the text of {other}", str(error), "copy it by hand") from None
    edit = splice.insert_block(text, ("device", name), block, file)
    return edit, edits.judged(before, edit.apply(text), file)


def _cards(data: Mapping[str, Any]) -> Mapping[str, Any]:
    cards = data.get("device")
    return cards if isinstance(cards, dict) else {}


def _wanted(cards: Mapping[str, Any], name: str, other: str) -> Mapping[str, Any]:
    card = cards.get(name)
    if isinstance(card, dict):
        return card
    near = nearest(name, cards)
    have = f"its cards are {listed(list(cards)[:_FEW])}" if cards else "it has no cards"
    raise PathRefused(f"{other} has no card {quoted(name)}", have,
                      f"did you mean {near}?" if near else "name one of its cards, or another file")


def _another(mine: Any, card: Mapping[str, Any], name: str, file: str, other: str) -> ProblemsFound:
    mine = mine if isinstance(mine, dict) else {}
    apart = [key for key in {**mine, **card} if not same(mine.get(key), card.get(key))]
    told = [f"{key} is {_said(mine, key)} here and {_said(card, key)} there" for key in apart[:3]]
    more = f", and {len(apart) - 3} more keys differ" if len(apart) > 3 else ""
    return PathRefused(f"{file} has another card {name}", f"{listed(told)}{more}",
                       f"rename one of the two, or take [device.{name}] out of {file} first")


def _said(card: Mapping[str, Any], key: str) -> str:
    return quoted(card[key]) if key in card else "absent"


def _lines(spans: Spans, name: str) -> str:
    """The card's block as it stands, or, where it is written inline or with dotted keys, as a table of its own."""
    path = ("device", name)
    if block := block_of(spans, path):
        return spans.text[block.span.start : block.span.end]
    lines = [f"[device.{literal.key(name)}]"]
    for entry in spans.entries.values():
        if entry.path[:2] == path and len(entry.path) == 3:
            value = spans.text[entry.value.start : entry.value.end]
            lines.append(f"{literal.key(str(entry.path[2]))} = {value}")
    return "\n".join(lines)


__all__ = ["take_card"]
