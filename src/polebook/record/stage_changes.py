"""One stage of a file against the same stage of another: kind, place, name, and every value."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from polebook.chain.model import Chain, Stage
from polebook.chain.said import short
from polebook.record.change import Change, Place, Put, Remove, told
from polebook.record.sides import Side
from polebook.record.tables import Pair, Spelled, differing, put, table, value, values
from polebook.stages.base import slot_of
from polebook.stages.registry import KINDS

_APART = ("name", "kind", "note", "free", "tolerance", "left_out", "arms")
_GAIN = ("gain", "inverting")  # of a block: one value, the sign of a gain in dB standing beside it


def added(b: Side, at: int, name: str) -> Change:
    """A stage that only the later file has; `name` is what steps call it."""
    stage = b.chain.stages[at]
    text = f"{stage.name} added {_behind(b.chain, at)}: {_listed(b, at)}"
    return Change("stage added", stage.name, "", stage.kind, text, (Place(name),))


def removed(a: Side, at: int) -> Change:
    """A stage that only the earlier file has."""
    stage = a.chain.stages[at]
    text = f"{stage.name} removed, was {_where(a.chain, at)}: {_listed(a, at)}"
    return Change("stage removed", stage.name, stage.kind, "", text, (Remove(stage.name),))


def both(a: Side, b: Side, at: tuple[int, int], moved: bool, cards: Mapping[str, str],
         spelled: Spelled) -> Iterator[Change]:
    """What has become of a stage, `at` its places in the two files; cards: name in the later file -> in the earlier."""
    old, new = a.chain.stages[at[0]], b.chain.stages[at[1]]
    pair = _pair(a, b, at, cards)
    if old.name != new.name:
        yield Change("stage renamed", new.name, old.name, new.name, f"{old.name} renamed to {new.name}")
    if moved:
        was, now = _where(a.chain, at[0]), _where(b.chain, at[1])
        text = f"{new.name} moved {_behind(b.chain, at[1])}, was {was}"
        yield Change("stage moved", new.name, was, now, text, (Place(old.name),))
    bound = _bound(a, b, at)
    if bound:
        yield _kind(a, b, pair, at, bound)
    if old.left_out != new.left_out:
        done = "left out" if new.left_out else "taken in"
        yield Change(done, new.name, "", "", f"{new.name} {done}", (put(b, pair, "left_out"),))
    yield from values(a, b, pair, spelled, {*_APART, *bound, *_GAIN})
    yield from _gain(a, b, pair, bound)
    if "arms" not in bound:
        yield from _arms(a, b, pair, old, new, spelled)
    yield from _lists(a, b, pair, spelled)


def _pair(a: Side, b: Side, at: tuple[int, int], cards: Mapping[str, str]) -> Pair:
    old, new = a.chain.stages[at[0]], b.chain.stages[at[1]]
    params = {**KINDS[old.kind].keys(), **KINDS[new.kind].keys(_family(b.chain, new))}
    words: dict[tuple[str, bool], Any] = {}
    for key in ("output_to", "lower_to"):
        words[key, False], words[key, True] = getattr(old, key), getattr(new, key)
    for key in ("device", "upper"):
        name = getattr(new, key)
        words[key, False], words[key, True] = getattr(old, key), cards.get(name, f"+{name}" if name else "")
    return Pair("stage", ("stage", old.name), ("stage", at[0]), ("stage", at[1]), old.name, new.name, params, words)


def _bound(a: Side, b: Side, at: tuple[int, int]) -> set[str]:
    """The keys that change with the kind, or with the family of the device: those that only one of the two takes."""
    old, new = a.chain.stages[at[0]], b.chain.stages[at[1]]
    families = _family(a.chain, old), _family(b.chain, new)
    if old.kind == new.kind and families[0] == families[1]:
        return set()
    taken = set(KINDS[old.kind].keys(families[0])) & set(KINDS[new.kind].keys(families[1]))
    keys = {*table(a, ("stage", at[0])), *table(b, ("stage", at[1]))}
    both_families = {"kind", "device"} if families[0] != families[1] else {"kind"}
    return (keys - taken) | (keys & both_families)


def _kind(a: Side, b: Side, pair: Pair, at: tuple[int, int], bound: set[str]) -> Change:
    old, new = a.chain.stages[at[0]], b.chain.stages[at[1]]
    what = [f"{old.kind} becomes {new.kind}"] if old.kind != new.kind else []
    gone, come = table(a, pair.before), table(b, pair.after)
    slots = {slot_of(key): a.spelled((*pair.before, key)) for key in gone if key in bound and slot_of(key)}
    keys = [key for key in dict.fromkeys((*come, *gone)) if key in bound and key != "kind"]
    for key in keys:
        here, there = a.spelled((*pair.before, key)), b.spelled((*pair.after, key))
        if key in come and key not in gone and slots.get(slot_of(key)) == there:
            continue  # the same part under the name that the other family has for it
        if key in gone and key not in come and any(slot_of(other) == slot_of(key) != "" and
                                                   b.spelled((*pair.after, other)) == here for other in come):
            continue
        if here != there:
            what.append(told(key, here, there))
    steps = tuple(put(b, pair, key) for key in sorted(bound))
    return Change("kind changed", new.name, old.kind, new.kind, f"{new.name}: {', '.join(what)}", steps)


def _gain(a: Side, b: Side, pair: Pair, bound: set[str]) -> Iterator[Change]:
    """The gain of a block with its sign."""
    keys = [key for key in _GAIN if key not in bound]
    if not keys or not set(keys) & set(differing(a, b, pair)):
        return
    if a.chain.numbers.get(f"{pair.was}.gain") == b.chain.numbers.get(f"{pair.name}.gain"):
        return
    here, there = (_signed(side, path) for side, path in ((a, pair.before), (b, pair.after)))
    steps = tuple(put(b, pair, key) for key in keys)
    yield Change("stage", f"{pair.name}.gain", here, there, told(f"{pair.name}.gain", here, there), steps)


def _signed(of: Side, path: tuple[str | int, ...]) -> str:
    turned = " inverting" if table(of, path).get("inverting") is True else ""
    return of.spelled((*path, "gain")) + turned


def _arms(a: Side, b: Side, pair: Pair, old: Stage, new: Stage, spelled: Spelled) -> Iterator[Change]:
    """The arms of a ladder: value by value where they are built alike, else as a whole."""
    if "arms" not in differing(a, b, pair):
        return
    if [(arm.series, set(arm.parts), arm.role) for arm in old.arms] != [
            (arm.series, set(arm.parts), arm.role) for arm in new.arms]:
        here, there = (", ".join(_arm(side, (*path, at)) for at in range(len(stage.arms)))
                       for side, path, stage in ((a, (*pair.before, "arms"), old), (b, (*pair.after, "arms"), new)))
        text = f"arms of {new.name}: {here} become {there}"
        yield Change("stage", f"{new.name}.arms", here, there, text, (put(b, pair, "arms"),))
        return
    for at, arm in enumerate(new.arms):
        for part in arm.parts:
            path, key = f"arms.{arm.number}.{part}", ("arms", at, part)
            here, there = a.spelled((*pair.before, *key)), b.spelled((*pair.after, *key))
            if a.chain.numbers[f"{pair.was}.{path}"] != b.chain.numbers[f"{pair.name}.{path}"]:
                raw = table(b, pair.after)["arms"][at][part]
                full = f"{pair.name}.{path}"
                yield Change("stage", full, here, there, told(full, here, there), (Put(pair.step, key, raw),))
            else:
                spelled.count += here != there


def _arm(of: Side, path: tuple[str | int, ...]) -> str:
    return "(" + " ".join(f"{key} {of.spelled((*path, key))}" for key in table(of, path)) + ")"


def _lists(a: Side, b: Side, pair: Pair, spelled: Spelled) -> Iterator[Change]:
    """What planning may change, and the tolerances of the stage's own parts."""
    if "free" in differing(a, b, pair):
        change = value(a, b, pair, "free")
        yield Change("free", change.path, change.before, change.after, change.text)
    heads = f"{pair.was}.tolerance.", f"{pair.name}.tolerance."
    old, new = ({path[len(head):]: number for path, number in side.chain.numbers.items() if path.startswith(head)}
                for side, head in zip((a, b), heads, strict=True))
    for key in dict.fromkeys((*new, *old)):
        here, there = (_tolerance(side, path, key) for side, path in ((a, pair.before), (b, pair.after)))
        if old.get(key) != new.get(key):
            yield Change("tolerance", f"{heads[1]}{key}", here, there, told(f"{heads[1]}{key}", here, there))
        else:
            spelled.count += here != there


def _tolerance(of: Side, stage: tuple[str | int, ...], key: str) -> str:
    """One of a stage's own tolerances; "arms.1.series_r" may stand as one key or table by table."""
    path = (*stage, "tolerance")
    return of.spelled((*path, key)) or of.spelled((*path, *key.split(".")))


def _where(chain: Chain, at: int) -> str:
    return f"after {chain.stages[at - 1].name}" if at else "first"


def _behind(chain: Chain, at: int) -> str:
    return _where(chain, at) if at else "to the front"


def _listed(of: Side, at: int) -> str:
    """Kind and values of a stage as the file spells them."""
    path = ("stage", at)
    words = [f"{key} {short(of.spelled((*path, key)))}" for key, raw in table(of, path).items()
             if key not in ("name", "kind", "note", "free", "tolerance") and not isinstance(raw, list)]
    return ", ".join((of.chain.stages[at].kind, *words))


def _family(chain: Chain, stage: Stage) -> str:
    return chain.cards[stage.device].family if stage.device else ""
