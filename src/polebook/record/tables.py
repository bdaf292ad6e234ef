"""A table of one file against the same table of another: its keys, by what they mean."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from polebook.param import Param
from polebook.quantity import DIMENSIONS
from polebook.record.change import Change, Put, told
from polebook.record.sides import Side
from polebook.text.data import find, same
from polebook.text.spans import Path


@dataclass(frozen=True, slots=True)
class Pair:
    """A table that both files have.

    sort    of its values' changes;  step  names it in steps
    before, after        where it stands in each text
    was, name            how paths to its numbers begin in each file
    params               its keys
    words                (key, whether in the later file) -> what a key that is no number means, absent or not; None
                         for a key that means what it says
    """

    sort: str
    step: tuple[str, str]
    before: Path
    after: Path
    was: str
    name: str
    params: Mapping[str, Param]
    words: Mapping[tuple[str, bool], Any]


@dataclass(slots=True)
class Spelled:
    """How many values are spelled otherwise and mean the same."""

    count: int = 0


def differing(a: Side, b: Side, pair: Pair) -> list[str]:
    """The keys of which the two files say something else, or the same in other words; in the order of the files."""
    old, new = table(a, pair.before), table(b, pair.after)
    keys = dict.fromkeys((*new, *old))
    return [key for key in keys if key not in old or key not in new or not same(old[key], new[key])]


def table(of: Side, path: Path) -> Mapping[str, Any]:
    """The table at `path`; nothing where it is absent."""
    found = find(of.data, path)
    return found if isinstance(found, dict) else {}


def values(a: Side, b: Side, pair: Pair, spelled: Spelled, skip: Collection[str] = ()) -> Iterator[Change]:
    """A change for each key that means something else."""
    for key in differing(a, b, pair):
        if key in skip:
            continue
        if _meaning(a, pair, key, False) == _meaning(b, pair, key, True):
            # a card by its new name is told of the card
            spelled.count += pair.words.get((key, True), raw := table(b, pair.after).get(key)) == raw
        else:
            yield value(a, b, pair, key)


def value(a: Side, b: Side, pair: Pair, key: str) -> Change:
    """The change of one key."""
    here, there = a.spelled((*pair.before, key)), b.spelled((*pair.after, key))
    param = pair.params.get(key)
    path = f"{pair.name}.{key}"
    text = told(path, here, there, param.default if param else "")
    return Change(pair.sort, path, here, there, text, (put(b, pair, key),))


def put(b: Side, pair: Pair, key: str) -> Put:
    """The step that gives a key the value that the later file has."""
    return Put(pair.step, (key,), table(b, pair.after).get(key))


def _meaning(of: Side, pair: Pair, key: str, later: bool) -> Any:
    """What a key says: numbers in SI units with their defaults, words as they are."""
    if (key, later) in pair.words:
        return pair.words[key, later]
    param, path = pair.params[key], f"{pair.name if later else pair.was}.{key}"
    if param.dimension in DIMENSIONS:
        return of.chain.numbers.get(path)
    if param.dimension in ("quantities", "arms"):
        return {name[len(path):]: number for name, number in of.chain.numbers.items() if name.startswith(f"{path}.")}
    return table(of, pair.after if later else pair.before).get(key, param.default or None)
