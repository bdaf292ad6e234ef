"""Edits of whole stages: an intention about the amplifier -> one edit of the text, and no fault added.

Each function returns the edit, with a label in plain words, and the faults that the file then still has. Each raises
ProblemsFound where there is no such stage, where the text is not TOML, or where the edit would add a fault.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import replace

from polebook.chain import start, start_stages
from polebook.chain.card_choice import Chosen, choose, parted, rail_volts, stated
from polebook.chain.edits import content, judged
from polebook.chain.located import Data, PathRefused, no_start, stage_names, stages
from polebook.chain.read import Reading, known_reading
from polebook.chain.tables import RESERVED
from polebook.problem import Problem, ProblemsFound, printable
from polebook.stages.base import GROUP
from polebook.text import literal
from polebook.text.edit import Edit
from polebook.text.rearrange import batch, copy_block, move_block, remove_block
from polebook.text.spans import Path, scan
from polebook.text.splice import insert_block, set_value, unset

Made = tuple[Edit, list[Problem]]
_NODE = re.compile(r"n[0-9]+")


def position(name: str, data: Data) -> int:
    """Number from 0 of the stage of that name, or of "#2", the second one. Raises PathRefused for none of them."""
    found = [at for at, stage in enumerate(stages(data)) if stage.get("name") == name or name == f"#{at + 1}"]
    if not found:
        raise no_start(name, data)
    if len(found) > 1:
        raise PathRefused(f"{len(found)} stages are named {printable(name)}", "an edit must lead to one of them",
                          "name it by position, for example #2")
    return found[0]


def add(text: str, file: str, after: str, word: str) -> Made:
    """A new stage, biased for the rail, behind the stage `after` ("source": the first, "load" or "": the last).

    word is a kind, or a kind and the family of its device: "common-source:mosfet". A card of the family is added where
    none stands.
    """
    before = known_reading(text, file)
    data = content(before, text)
    wanted = start.wanted([word])[0]
    there = stages(data)
    at = 0 if after == "source" else len(there) if after in ("", "load") else position(after, data) + 1
    chosen = choose(data, wanted.kind, wanted.family if ":" in word else "", at)
    letter = start_stages.LETTER.get(chosen.family, "L" if wanted.kind == "ladder" else "B")
    name = fresh_name(f"{letter}1", stage_names(data))
    previous = there[at - 1].get("kind") if at else ""
    block = start.stage_block(wanted.kind, rail_volts(data), name, {chosen.family: chosen.name}, _negative(data),
                              previous if isinstance(previous, str) else "", chosen.family)
    block += "".join(f"{key} = {value}\n" for key, value in stated(data, wanted.kind, chosen.family).items()
                     if f"\n{key} " not in block)
    behind = there[at - 1].get("name", f"#{at}") if at else "the source"
    label = f"{name} added after {_shown(behind)}: {wanted.kind}{chosen.said}"
    steps = [lambda now: insert_block(now, ("stage", at), block, file), *card_steps(chosen, file)]
    if chosen.family in GROUP and (next_one := parted(data, at)):
        path, owner, value = next_one
        steps.insert(0, lambda now: set_value(now, path, value, file))
        label += f"; {printable(owner)} gets a couple, so that it takes no bias away"
    return _done(before, text, batch(text, steps, label), file, _opened(there, at))


def card_steps(chosen: Chosen, file: str) -> list[Callable[[str], Edit]]:
    """What adds the card, where it is a new one."""
    return [lambda now: insert_block(now, ("device", chosen.name), chosen.block, file)] if chosen.block else []


def _negative(data: Data) -> float:
    return min(rail_volts(data, "negative"), 0.0)


def copy(text: str, file: str, name: str) -> Made:
    """The stage once more right behind itself, under a new name; without its allotment where that is too much."""
    before = known_reading(text, file)
    data = content(before, text)
    at = position(name, data)
    new = fresh_name(name if not name.startswith("#") else "Q1", stage_names(data))
    label = f"{printable(name)} copied as {new}"
    steps = [
        lambda now: copy_block(now, ("stage", at), file),
        lambda now: set_value(now, ("stage", at + 1, "name"), literal.string(new), file),
    ]
    try:
        return _done(before, text, batch(text, steps, label), file, _opened(stages(data), at + 1))
    except ProblemsFound:
        if "allot" not in stages(data)[at]:
            raise
    steps.append(lambda now: unset(now, ("stage", at + 1, "allot"), file))
    return _done(before, text, batch(text, steps, f"{label}, without its allot"), file,
                 _opened(stages(data), at + 1))


def remove(text: str, file: str, name: str) -> Made:
    """The stage taken out with its comments."""
    before = known_reading(text, file)
    data = content(before, text)
    at = position(name, data)
    if len(stages(data)) == 1:
        raise PathRefused(f"{printable(name)} is the only stage", "a chain has at least one",
                          "add another one first, or leave this one out")
    if measured := _benches(data, name):
        raise PathRefused(f"{printable(name)} can't be removed",
                          f"{_bench_words(measured)} measured at its output, and would be without a place",
                          "leave the stage out, or take `at` or the whole of that bench out first")
    edit = remove_block(text, ("stage", at), file)
    return _done(before, text, replace(edit, label=f"{printable(name)} removed"), file,
                 {at: -1, **{number: number - 1 for number in range(at + 1, len(stages(data)))}})


def move(text: str, file: str, name: str, direction: int) -> Made:
    """The stage with its comments in the place of its neighbour: direction -1 towards the source, +1 the load."""
    before = known_reading(text, file)
    data = content(before, text)
    at, count = position(name, data), len(stages(data))
    to = at + direction
    if not 0 <= to < count:
        end = "first" if to < 0 else "last"
        raise PathRefused(f"{printable(name)} is the {end} stage", "there is no stage to change places with",
                          f"move it towards the {'load' if to < 0 else 'source'}")
    edit = move_block(text, ("stage", at), to, file)
    label = f"{printable(name)} moved towards the {'source' if direction < 0 else 'load'}"
    return _done(before, text, replace(edit, label=label), file, {at: to, to: at})


def rename(text: str, file: str, name: str, new: str) -> Made:
    """The stage under another name, and every bench that was measured at its output with it."""
    before = known_reading(text, file)
    data = content(before, text)
    at = position(name, data)
    path: Path = ("stage", at, "name")
    new = new.strip()
    following = _benches(data, name)
    paths: list[Path] = [path, *(("bench", number, "at") for number in following)]
    edit = batch(text, [_renaming(one, new, file) for one in paths], "")
    follow = f", {_bench_words(following)} with it" if following else ""
    return _done(before, text, replace(edit, label=f"{printable(name)} renamed {printable(new)}{follow}"), file, {})


def _renaming(path: Path, new: str, file: str) -> Callable[[str], Edit]:
    def step(now: str) -> Edit:
        span = scan(now).value(path)
        single = span is not None and now[span.start] == "'" and now[span.start : span.start + 3] != "'''"
        plain = single and "'" not in new and new.isprintable()
        return set_value(now, path, f"'{new}'" if plain else literal.string(new), file)

    return step


def toggle_left_out(text: str, file: str, name: str) -> Made:
    """The stage left out, kept in the file; or in again."""
    before = known_reading(text, file)
    data = content(before, text)
    at = position(name, data)
    path: Path = ("stage", at, "left_out")
    if stages(data)[at].get("left_out") is True:
        edit = replace(unset(text, path, file), label=f"{printable(name)} in again")
    else:
        edit = replace(set_value(text, path, "true", file), label=f"{printable(name)} left out")
    return _done(before, text, edit, file)


def fresh_name(like: str, taken: Collection[str]) -> str:
    """A name that no stage has yet: the letters of `like` and the number after the highest one."""
    stem = like.rstrip("0123456789") or like
    numbers = [int(name[len(stem):]) for name in taken
               if name.startswith(stem) and name[len(stem):].isdecimal() and len(name) < len(stem) + 10]
    number = max(numbers, default=1 if stem in taken else 0) + 1
    found = f"{stem}{number}"
    while found in taken or found in RESERVED or _NODE.fullmatch(found):
        number += 1
        found = f"{stem}_{number}"
    return found


def _benches(data: Data, name: str) -> list[int]:
    raw = data.get("bench")
    tables = raw if isinstance(raw, list) else []
    return [at for at, bench in enumerate(tables) if isinstance(bench, dict) and bench.get("at") == name]


def _bench_words(numbers: list[int]) -> str:
    words = ", ".join(str(number + 1) for number in numbers)
    return f"bench {words}"


def _shown(name: object) -> str:
    return printable(str(name))


def _opened(there: Sequence[object], at: int) -> dict[int, int]:
    """The numbers of the stages where one comes in at number `at`."""
    return {number: number + 1 for number in range(at, len(there))}


def _done(before: Reading, text: str, edit: Edit, file: str, moves: Mapping[int, int] | None = None) -> Made:
    return edit, judged(before, edit.apply(text), file, moves)
