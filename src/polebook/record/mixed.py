"""The earlier of two files with some of the changes made: read as a file is, so that it is a chain or is refused."""

from __future__ import annotations

from collections.abc import Iterable
from copy import deepcopy
from typing import Any

import tomli_w

from polebook.chain.model import Chain
from polebook.chain.read import parse
from polebook.chain.tables import SECTIONS
from polebook.record.change import Change, Place, Put, Remove
from polebook.record.changes import Changes

_QUIET = ("note", "free", "tolerance")  # of a stage: they move no figure, and may name keys that a change takes away


class Mixer:
    """Makes chains of the earlier file's content and chosen changes; all is named as in the earlier file."""

    def __init__(self, found: Changes) -> None:
        before, after, self._cards = found.before.data, found.after.data, found.matched.cards
        self._file = found.after.name
        ids = found.stage_ids
        self._old = {stage["name"]: _loud(stage) for stage in before["stage"]}
        self._new = {ids[stage["name"]]: _loud(stage) | {"name": ids[stage["name"]]} for stage in after["stage"]}
        self._stay = {name for stage, name in ids.items()
                      if stage in found.matched.stages and stage not in found.matched.moved}
        self._tables = {name: before.get(name, {}) for name in SECTIONS if name not in ("preferred", "tolerance")}
        self._own = before.get("device", {})
        self._further = {name: card for name, card in after.get("device", {}).items() if name not in self._cards}

    def chain(self, chosen: Iterable[Change]) -> Chain:
        """Raises ProblemsFound where the content is no chain file."""
        return parse(tomli_w.dumps(self.content(chosen)), self._file)

    def content(self, chosen: Iterable[Change]) -> dict[str, Any]:
        """The file's content after the `chosen` of the acting changes. A new card comes with whatever names it."""
        steps = [step for change in chosen for step in change.steps]
        stages, tables, cards = deepcopy((self._old, self._tables, dict(self._own)))
        for step in steps:
            if isinstance(step, Put):
                kind, name = step.table
                _put(stages[name] if kind == "stage" else cards[name] if kind == "device" else tables[kind], step)
        listed = [stages.get(name) or dict(self._new[name]) for name in self._order(steps)]
        for stage in listed:
            for key in stage.keys() & {"device", "upper"}:
                name = stage[key] = self._cards.get(stage[key], stage[key])
                if name not in cards:
                    cards[name] = self._further[name]
        content = {"format": 1, **tables, "stage": listed, "device": cards}
        return {name: table for name, table in content.items() if table}

    def _order(self, steps: Iterable[object]) -> list[str]:
        """The stages in signal order. One that is put in goes behind the nearest ahead of it that has its place."""
        gone = {step.stage for step in steps if isinstance(step, Remove)}
        put = {step.stage for step in steps if isinstance(step, Place)}
        order = [name for name in self._old if name not in gone | put]
        settled = self._stay - gone
        ahead = ""
        for name in self._new:
            if name in put:
                order.insert(order.index(ahead) + 1 if ahead else 0, name)
            if name in put or name in settled:
                ahead = name
        return order


def _loud(stage: dict[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in stage.items() if key not in _QUIET}


def _put(table: dict[str, Any], step: Put) -> None:
    holder: Any = table
    for part in step.path[:-1]:
        holder = holder[part]
    if step.value is None:
        holder.pop(step.path[-1], None)
    else:
        holder[step.path[-1]] = deepcopy(step.value)
