"""What changed between two chain files, by meaning: stages, kinds, values, cards, and what moves no figure."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from polebook.chain.said import said, short
from polebook.chain.tables import SECTIONS, TOP
from polebook.devices.registry import FAMILIES
from polebook.record import stage_changes
from polebook.record.change import Change, told
from polebook.record.matched import Matched, matched
from polebook.record.sides import Side
from polebook.record.tables import Pair, Spelled, put, table, values
from polebook.text.data import same
from polebook.text.tokens import ROUGH

_BEHIND = ("target", "preferred", "tolerance")  # told after stages and cards


@dataclass(frozen=True, slots=True)
class Changes:
    """Every change in the order of the later file, and how the two are matched.

    comments  lines of comment that only one of the two has, the greater count of either
    spelled   values spelled otherwise that mean the same
    laid_out  the texts differ, be it in nothing but order and blanks
    """

    before: Side
    after: Side
    matched: Matched
    listed: tuple[Change, ...]
    comments: int
    spelled: int
    laid_out: bool

    @property
    def acting(self) -> tuple[Change, ...]:
        """Those that may move a figure."""
        return tuple(change for change in self.listed if change.acts)

    @property
    def stage_ids(self) -> dict[str, str]:
        """Name of a stage in the later file -> what steps call it: its name in the earlier one, or for a new stage a
        name that is free there."""
        return _ids(self.before, self.after, self.matched)


def changes(before: Side, after: Side) -> Changes:
    """Compares two readings."""
    found = matched(before, after)
    spelled = Spelled()
    listed = tuple(_all(before, after, found, spelled))
    ones, others = _comments(before.text), _comments(after.text)
    comments = max((ones - others).total(), (others - ones).total())
    return Changes(before, after, found, listed, comments, spelled.count, before.text != after.text)


def _all(a: Side, b: Side, found: Matched, spelled: Spelled) -> Iterator[Change]:
    yield from _top(a, b)
    for name in ("supply", "source"):
        yield from _section(a, b, name, spelled)
    yield from _stages(a, b, found, spelled)
    yield from _section(a, b, "load", spelled)
    yield from _cards(a, b, found, spelled)
    for name in _BEHIND:
        yield from _section(a, b, name, spelled)
    yield from _benches(a, b, found)


def _top(a: Side, b: Side) -> Iterator[Change]:
    for param in TOP[1:]:
        here, there = a.spelled((param.key,)), b.spelled((param.key,))
        if here != there:
            if param.key == "note":
                yield _note("note", here, there)
            else:
                yield Change(param.key, param.key, here, there, told(param.key, here, there))


def _note(path: str, here: str, there: str) -> Change:
    done = "changed" if here and there else "put in" if there else "taken out"
    return Change("note", path, here, there, f"{said(path)} {done}")


def _notes(a: Side, b: Side, pair: Pair) -> Iterator[Change]:
    here, there = a.spelled((*pair.before, "note")), b.spelled((*pair.after, "note"))
    if here != there:
        yield _note(f"{pair.name}.note", here, there)


def _section(a: Side, b: Side, name: str, spelled: Spelled) -> Iterator[Change]:
    params = {param.key: param for param in SECTIONS[name]}
    pair = Pair(name, (name, ""), (name,), (name,), name, name, params, {})
    yield from values(a, b, pair, spelled, ("note",))
    yield from _notes(a, b, pair)


def _stages(a: Side, b: Side, found: Matched, spelled: Spelled) -> Iterator[Change]:
    places = {stage.name: at for at, stage in enumerate(a.chain.stages)}
    ids = _ids(a, b, found)
    for at, stage in enumerate(b.chain.stages):
        if stage.name not in found.stages:
            yield stage_changes.added(b, at, ids[stage.name])
            continue
        where = places[found.stages[stage.name]], at
        yield from stage_changes.both(a, b, where, stage.name in found.moved, found.cards, spelled)
        notes = Pair("note", ("", ""), ("stage", where[0]), ("stage", at), "", stage.name, {}, {})
        yield from _notes(a, b, notes)
    kept = set(found.stages.values())
    for at, stage in enumerate(a.chain.stages):
        if stage.name not in kept:
            yield stage_changes.removed(a, at)


def _ids(a: Side, b: Side, found: Matched) -> dict[str, str]:
    taken = {stage.name for stage in a.chain.stages}
    ids: dict[str, str] = {}
    for stage in b.chain.stages:
        name = found.stages.get(stage.name, stage.name)
        while stage.name not in found.stages and name in taken:
            name += "-new"
        taken.add(name)
        ids[stage.name] = name
    return ids


def _cards(a: Side, b: Side, found: Matched, spelled: Spelled) -> Iterator[Change]:
    for name, card in b.chain.cards.items():
        if name not in found.cards:
            yield Change("card added", f"device.{name}", "", card.family, f"card {name} added: {_card(b, name)}")
            continue
        old = found.cards[name]
        if old != name:
            yield Change("card renamed", f"device.{name}", old, name, f"card {old} renamed to {name}")
        families = a.chain.cards[old].family, card.family
        params = {param.key: param for family in families for param in FAMILIES[family]}
        pair = Pair("card", ("device", old), ("device", old), ("device", name), f"device.{old}", f"device.{name}",
                    params, {})
        bound = _bound(a, b, pair, families)
        if bound:
            text = f"card {name}: {families[0]} becomes {families[1]}"
            yield Change("card", f"device.{name}", *families, text, tuple(put(b, pair, key) for key in sorted(bound)))
        yield from values(a, b, pair, spelled, {"note", *bound})
        yield from _notes(a, b, pair)
    kept = set(found.cards.values())
    for name, card in a.chain.cards.items():
        if name not in kept:
            yield Change("card removed", f"device.{name}", card.family, "", f"card {name} removed: {_card(a, name)}")


def _bound(a: Side, b: Side, pair: Pair, families: tuple[str, str]) -> set[str]:
    """The keys that change with a card's family."""
    if families[0] == families[1]:
        return set()
    taken = {param.key for param in FAMILIES[families[0]]} & {param.key for param in FAMILIES[families[1]]}
    keys = {*table(a, pair.before), *table(b, pair.after)}
    return ((keys - taken) | {"family"} | (keys & {"polarity"})) - {"note"}


def _card(of: Side, name: str) -> str:
    """A card's values as the file spells them."""
    path = ("device", name)
    words = [f"{key} {short(of.spelled((*path, key)))}" for key in table(of, path) if key not in ("note", "family")]
    return ", ".join((of.chain.cards[name].family, *words))


def _benches(a: Side, b: Side, found: Matched) -> Iterator[Change]:
    """Measurements, those that are alike left out; what is left is paired in the order of the files."""
    names = {old: new for new, old in found.stages.items()}
    old = [{**bench, **({"at": names.get(bench["at"], bench["at"])} if "at" in bench else {})}
           for bench in a.data.get("bench", ())]
    new = list(b.data.get("bench", ()))
    gone = [at for at, bench in enumerate(old) if not any(same(bench, other) for other in new)]
    come = [at for at, bench in enumerate(new) if not any(same(bench, other) for other in old)]
    for at, there in enumerate(come):
        done = "changed" if at < len(gone) else "added"
        yield Change("bench", f"bench.{there + 1}", "", "", f"bench {there + 1} {done}{_bench(b, there)}")
    for here in gone[len(come):]:
        yield Change("bench", f"bench.{here + 1}", "", "", f"bench {here + 1} removed{_bench(a, here)}")


def _bench(of: Side, at: int) -> str:
    bench = of.chain.benches[at]
    words = ", ".join(short(word) for word in (bench.unit, bench.date) if word)
    return f" ({words})" if words else ""


def _comments(text: str) -> Counter[str]:
    """Every comment of a text."""
    return Counter(match[0].strip() for match in ROUGH.finditer(text) if match[0].startswith("#"))
