"""A stage made one of another kind: what fits is kept under the new kind's names, what does not is taken out and told.

Parts of three-terminal stages are carried over by their general name (`stages.base.SLOTS`), those among op-amp kinds by
their key. Whatever the new kind asks for and the old one did not have comes from a new stage of that kind.
"""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from polebook.chain import start
from polebook.chain.card_choice import Chosen, choose, rail_volts, stated
from polebook.chain.edits import content, judged
from polebook.chain.located import Data, PathRefused, stages
from polebook.chain.read import known_reading
from polebook.chain.stage_edits import Made, card_steps, position
from polebook.chain.stage_lists import tolerance_keys
from polebook.chain.stage_paths import family_of
from polebook.chain.steps import series_of
from polebook.problem import printable
from polebook.quantity import Refused, letter, parse
from polebook.series import nearest
from polebook.stages.base import COMMON, GROUP, SLOTS, Kind, slot_key, slot_of
from polebook.stages.registry import KINDS
from polebook.text import literal
from polebook.text.edit import Edit
from polebook.text.rearrange import batch, remove_block, rename
from polebook.text.spans import Path, scan
from polebook.text.splice import set_value, unset

_OPAMP = frozenset({"noninverting", "inverting_opamp", "transimpedance"})
_BIAS = ("bias_top", "bias_bottom", "bias_single")
_HEADS = frozenset({"name", "kind", "device"})
_COMMON = frozenset(param.key for param in COMMON)


@dataclass(slots=True)
class _Plan:
    """What is to be done: keys renamed, taken out, given a value (a TOML literal), what a label says of it.

    taken_in names two keys of which one took in the other."""

    renamed: dict[str, str] = field(default_factory=dict)
    gone: list[str] = field(default_factory=list)
    given: dict[str, str] = field(default_factory=dict)
    said: list[str] = field(default_factory=list)
    taken_in: tuple[str, ...] = ()

    def after(self, keys: Iterable[str]) -> list[str]:
        """The keys that stand afterwards."""
        return [self.renamed.get(key, key) for key in keys if key not in self.gone] + list(self.given)


def change_kind(text: str, file: str, name: str, word: str) -> Made:
    """The stage `name` as one of the kind `word`, which may carry the family of its device: "common-source:mosfet".

    The card stays where the kind takes it, else one of the file's is taken, else a new one made. Raises ProblemsFound.
    """
    before = known_reading(text, file)
    data = content(before, text)
    at = position(name, data)
    stage = stages(data)[at]
    wanted = start.wanted([word])[0]
    new, family = KINDS[wanted.kind], wanted.family if ":" in word else ""
    old = KINDS.get(stage["kind"]) if isinstance(stage.get("kind"), str) else None
    mine = family_of(stage, data)
    if old is None:
        raise PathRefused(f"{printable(name)} has no kind that is known", "what fits can't be told", "set its kind")
    keeps = mine in new.families and (not family or family == mine)
    chosen = Chosen(str(stage.get("device", "")), mine) if keeps else choose(data, new.name, family, at)
    if new is old and keeps:
        return Edit(()), before.problems
    plan = _planned(stage, (old, mine), (new, chosen.family), _fresh(data, new, chosen, at))
    if chosen.name and stage.get("device") != chosen.name:
        plan.given = {"device": literal.string(chosen.name), **plan.given}
    steps = _steps(("stage", at), stage, plan, new, chosen.family, file)
    label = "; ".join([f"{printable(name)}: {old.name} to {new.name}{chosen.said}", *plan.said])
    edit = batch(text, [*steps, *card_steps(chosen, file)], label)
    return edit, judged(before, edit.apply(text), file)


@dataclass(frozen=True, slots=True)
class _Fresh:
    """A new stage of the kind in this place: key -> TOML literal; what it states for want of a rail; for resistors."""

    rows: Mapping[str, str]
    stated: Mapping[str, str]
    series: str


def _fresh(data: Data, kind: Kind, chosen: Chosen, at: int) -> _Fresh:
    previous = stages(data)[at - 1].get("kind") if at else ""
    block = start.stage_block(kind.name, rail_volts(data, family=chosen.family), "Q1", {chosen.family: chosen.name},
                              min(rail_volts(data, "negative"), 0.0), previous if isinstance(previous, str) else "",
                              chosen.family)
    spans = scan(block)
    keys = tomllib.loads(block)["stage"][0]
    rows = {key: block[span.start : span.end] for key in keys
            if key not in _HEADS and (span := spans.value(("stage", 0, key)))}
    states = stated(data, kind.name, chosen.family)
    return _Fresh(rows | states, states, series_of(data, "resistor"))


def _planned(stage: Mapping[str, Any], old: tuple[Kind, str], new: tuple[Kind, str],
             fresh: _Fresh) -> _Plan:
    plan = _Plan()
    kind, family = new
    offered = kind.keys(family)
    slots = bool(GROUP.get(old[1])) and bool(GROUP.get(family))
    alike = slots or {old[0].topology, kind.topology} <= _OPAMP or old[0] is kind
    for key in stage:
        if key in _COMMON or (key == "device" and kind.families):
            continue
        target = _carried(key, family, slots) if alike else ""
        if target not in offered:
            plan.gone.append(key)
        elif target != key:
            plan.renamed[key] = target
    if slots:
        if family == "mosfet" != old[1] and "rg" in stage:  # a gate at ground opens no mosfet: it gets a divider
            plan.renamed.pop("rg", None)
            plan.gone.append("rg")
        _lower_parts(plan, stage, family, offered, fresh.series)
    _fill(plan, stage, old, new, fresh, alike)
    if plan.renamed:
        plan.said.append(", ".join(f"{key} is {now}" for key, now in plan.renamed.items()))
    gone = [printable(key) for key in plan.gone if key not in plan.taken_in]
    if gone:
        plan.said.append(f"taken out: {', '.join(gone)}")
    given = [key for key in plan.given if key not in plan.taken_in]
    if given:
        plan.said.append(f"given: {', '.join(given)}")
    return plan


def _carried(key: str, family: str, slots: bool) -> str:
    slot = slot_of(key) if slots else ""
    return slot_key(slot, family) if slot else key


def _lower_parts(plan: _Plan, stage: Mapping[str, Any], family: str, offered: Mapping[str, Any],
                 resistors: str) -> None:
    """Where a kind takes no bypassed lower resistor its one resistor takes that in, so that the current stays."""
    held = next((key for key in SLOTS["r_low_bypassed"].names if key in stage and key in plan.gone), "")
    own, target = next((key for key in SLOTS["r_low"].names if key in stage), ""), slot_key("r_low", family)
    if not held or target not in offered:
        return
    try:
        ohms = parse(stage[held], "resistance") + (parse(stage[own], "resistance") if own else 0.0)
    except Refused:  # not a value that could be added: the file has a fault there, which is told
        return
    value = letter(nearest(ohms, resistors), "resistance")
    plan.given[target] = literal.string(value)
    plan.taken_in = (held, target)
    plan.said.append(f"{target} takes in {held}: {value}")


def _fill(plan: _Plan, stage: Mapping[str, Any], old: tuple[Kind, str], new: tuple[Kind, str], fresh: _Fresh,
          alike: bool) -> None:
    """Gives what the new kind needs: of a wholly different kind all of a new stage, else what the old one had not."""
    kind, family = new
    there = set(plan.after(stage))
    needed = {param.key for param in kind.params_for(family) if param.required}
    if not alike:
        needed = set(fresh.rows)
    elif GROUP.get(family):
        had = {slot_of(key) for key in old[0].keys(old[1])}
        if "r_out" not in had:
            needed.add(slot_key("r_out", family))
        bias = {slot_key(slot, family) for slot in _BIAS}
        carried = {slot_of(key) for key in stage} & set(_BIAS)
        # without bias resistors the control of a common-base kind is straight at ground, that of others hangs free
        if not bias & there and (carried or not had & set(_BIAS) or old[0].topology == "common_control"):
            needed |= bias
        if "c_control" not in had and bias & (there | needed):
            needed.add(slot_key("c_control", family))
        if family != old[1]:  # another device: where there is no rail its current has to be stated
            needed |= set(fresh.stated)
    plan.given.update({key: value for key, value in fresh.rows.items() if key in needed and key not in there})


def _steps(at: Path, stage: Mapping[str, Any], plan: _Plan, kind: Kind, family: str,
           file: str) -> list[Callable[[str], Edit]]:
    """One step a key, each on the text that the one before it leaves."""
    steps: list[Callable[[str], Edit]] = [lambda now: set_value(now, (*at, "kind"), literal.string(kind.name), file)]
    for key in plan.gone:
        steps.append(_out((*at, key), file))
    for key, name in plan.renamed.items():
        steps.append(_named((*at, key), name, file))
    for key, value in plan.given.items():
        steps.append(_given((*at, key), value, file))
    steps += _tolerance_steps((*at, "tolerance"), stage, plan, tolerance_keys(kind, family, ()), file)
    return steps + _free_steps((*at, "free"), stage, plan, kind.keys(family), file)


def _tolerance_steps(path: Path, stage: Mapping[str, Any], plan: _Plan, known: list[str],
                     file: str) -> list[Callable[[str], Edit]]:
    table = stage.get("tolerance")
    if not isinstance(table, dict):
        return []
    left = set(plan.after(stage))
    names = {str(key): plan.renamed.get(key, str(key)) for key in table}
    kept = {key: name for key, name in names.items() if key not in plan.gone and name in known and name in left}
    if table and not kept:
        return [_out(path, file)]
    gone = [_out((*path, key), file) for key in table if key not in kept]
    return gone + [_named((*path, key), name, file) for key, name in kept.items() if name != key]


def _free_steps(path: Path, stage: Mapping[str, Any], plan: _Plan, offered: Mapping[str, Any],
                file: str) -> list[Callable[[str], Edit]]:
    listed_keys = stage.get("free")
    if not isinstance(listed_keys, list):
        return []
    kept = {at: plan.renamed.get(key, key) for at, key in enumerate(listed_keys)
            if isinstance(key, str) and key not in plan.gone and plan.renamed.get(key, key) in offered}
    if listed_keys and not kept:
        return [_out(path, file)]
    steps = [_given((*path, at), literal.string(str(name)), file) for at, name in kept.items()
             if listed_keys[at] != name]
    return steps + [_out((*path, at), file) for at in reversed(range(len(listed_keys))) if at not in kept]


def _out(path: Path, file: str) -> Callable[[str], Edit]:
    """Takes out a key with its value, or a table with all in it."""
    def step(now: str) -> Edit:
        spans = scan(now)
        if spans.header(path):
            return remove_block(now, path, file)
        if path in spans.values:
            return unset(now, path, file)
        inner = [entry.path for entry in spans.entries.values() if entry.path[: len(path)] == path]
        return batch(now, [_out(one, file) for one in inner], "") if inner else unset(now, path, file)

    return step


def _named(path: Path, name: str, file: str) -> Callable[[str], Edit]:
    return lambda now: rename(now, path, name, file)


def _given(path: Path, value: str, file: str) -> Callable[[str], Edit]:
    return lambda now: set_value(now, path, value, file)


__all__ = ["change_kind"]
