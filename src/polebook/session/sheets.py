"""The sheets of a file: every key of a line or table, what it is, and the text that stands for it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Any

from polebook.book.ledger import Ledger
from polebook.chain import kinds
from polebook.chain.located import PathRefused, stages
from polebook.chain.paths import locate
from polebook.chain.said import raw_text
from polebook.chain.stage_edits import position
from polebook.chain.stage_lists import tolerance_keys
from polebook.chain.stage_paths import arms_of, family_of
from polebook.chain.tables import BENCH, SECTIONS, TOP
from polebook.devices.registry import FAMILIES
from polebook.param import Param
from polebook.session.opened import Session
from polebook.stages.base import COMMON
from polebook.stages.ladder import ARM, ARM_ROLE, ARM_SERIES, ARM_SHUNT, arm_part
from polebook.stages.registry import KINDS
from polebook.text.spans import Spans, Unscannable, scan
from polebook.text.toml import read

LEANS = 1e-6  # per cent by one per cent: less than this is nothing


@dataclass(frozen=True, slots=True)
class KeyRow:
    """One key of a sheet.

    path       as `set_value` takes it: "Q1.rc"
    text       as the file has it, without quotes; "" where it is absent
    default    what is taken where it is absent, "" for nothing
    choices    words that it may be: of a choice, the cards of a device, the kinds
    leans      whether gain or edges lean on it; None where that is not computed, or the key is no value of a part
    """

    path: str
    key: str
    text: str
    default: str
    unit: str
    role: str
    about: str
    choices: tuple[str, ...]
    sign: str
    dimension: str
    required: bool
    leans: bool | None


@lru_cache(maxsize=4)
def content_of(text: str) -> tuple[Mapping[str, Any], Spans]:
    """What a text says, not to be changed, and where; nothing for a text that is not TOML."""
    data, _ = read(text, "")
    try:
        return (data or {}), scan(text if data is not None else "")
    except Unscannable:
        return (data or {}), Spans(text)


def sheets_of(session: Session) -> list[str]:
    """The names of the sheets in their order: source, stages, load, target, supply, tolerance, preferred, cards, file.

    A stage without a name of its own stands as "#2".
    """
    data, _ = content_of(session.history.text)
    cards = data.get("device")
    names = [f"device.{name}" for name in cards] if isinstance(cards, dict) else []
    return ["source", *stage_sheets(data), "load", "target", "supply", "tolerance", "preferred", *names, "file"]


def stage_sheets(data: Mapping[str, Any]) -> list[str]:
    """The names by which the stages are reached: their own, or "#2" where that leads to none or to several."""
    names = [stage.get("name") for stage in stages(data)]
    return [name if isinstance(name, str) and name and "." not in name and names.count(name) == 1 else f"#{at + 1}"
            for at, name in enumerate(names)]


def keys_of(session: Session, sheet: str) -> list[KeyRow]:
    """Every key of the sheet of that name: a stage's, a table's, "device.D", "bench.1", or "file".

    Empty where there is no such sheet, or where the text is not TOML.
    """
    rows = _keys(session.history.text, sheet)
    leaning = _leaning(session.ledger)
    return list(rows) if leaning is None else [replace(row, leans=leaning.get(row.path)) for row in rows]


@lru_cache(maxsize=64)
def _keys(text: str, sheet: str) -> tuple[KeyRow, ...]:
    """The keys as the text alone tells them: every key pressed asks for them again."""
    data, spans = content_of(text)
    if sheet in SECTIONS:
        return _rows([(f"{sheet}.{param.key}", param, ()) for param in SECTIONS[sheet]], data, spans)
    if sheet == "file":
        return _rows([(param.key, param, ()) for param in TOP], data, spans)
    head, _, name = sheet.partition(".")
    if head == "device" and name:
        return _rows(_card(data, name), data, spans)
    if head == "bench" and name:
        return _rows([(f"{sheet}.{param.key}", param, ()) for param in BENCH], data, spans)
    return _rows(_stage(data, sheet), data, spans)


_Asked = Iterable[tuple[str, Param, tuple[str, ...]]]


def _card(data: Mapping[str, Any], name: str) -> _Asked:
    cards = data.get("device")
    card = cards.get(name) if isinstance(cards, dict) else None
    if not isinstance(card, dict):
        return
    family = card.get("family")
    params = FAMILIES.get(family, ()) if isinstance(family, str) else ()
    if not params:
        params = tuple({param.key: param for rows in FAMILIES.values() for param in rows}.values())
    for param in params:
        yield f"device.{name}.{param.key}", param, tuple(FAMILIES) if param.key == "family" else ()


def _stage(data: Mapping[str, Any], name: str) -> _Asked:
    try:
        at = position(name, data)
    except PathRefused:
        return
    stage = stages(data)[at]
    kind = KINDS.get(stage["kind"]) if isinstance(stage.get("kind"), str) else None
    family = family_of(stage, data)
    params = sorted(kind.keys(family).values() if kind else COMMON, key=_rank)
    own = {param.key for param in params}
    for param in params:
        if param.key == "arms":
            yield from _arms(name, stage)
        elif param.dimension != "table":
            yield f"{name}.{param.key}", param, _choices(param, kind.families if kind else (), data)
    for key in stage:
        if key not in own:
            yield f"{name}.{key}", Param(key, "text", "a key that this kind does not take"), ()
    if kind:
        for key in tolerance_keys(kind, family, arms_of(stage)):
            if key in stage or key.startswith("arms."):
                share = Param(f"tolerance.{key}", "share", f"tolerance of {key}", sign="nonnegative")
                yield f"{name}.tolerance.{key}", share, ()


def _rank(param: Param) -> int:
    """Order of a stage's sheet: what is soldered comes first, then the rest of its numbers, words last."""
    if param.key == "couple":
        return 0
    if param.key in ("stray", "c_load", "allot"):
        return 3
    if param.dimension in ("resistance", "capacitance", "inductance", "arms"):
        return 1
    if param.dimension in ("text", "choice", "flag", "keys", "table"):
        return 4 + (param.key in {common.key for common in COMMON})
    return 2


def choices_at(data: Mapping[str, Any], path: str) -> tuple[str, ...]:
    """The words that the key at `path` may be: cards, families, or the kinds that take the stage's card."""
    head, _, key = path.rpartition(".")
    if head.startswith("device.") and key == "family":
        return tuple(FAMILIES)
    if head not in stage_sheets(data):
        return ()
    stage = stages(data)[position(head, data)]
    kind = KINDS.get(stage["kind"]) if isinstance(stage.get("kind"), str) else None
    if key == "kind":
        family = family_of(stage, data)
        return tuple(one.name for one in KINDS.values() if (family in one.families if family else not one.families))
    param = next((param for param in kind.params if param.key == key), None) if kind else None
    return _choices(param, kind.families, data) if kind and param else ()


def _choices(param: Param, families: tuple[str, ...], data: Mapping[str, Any]) -> tuple[str, ...]:
    if param.key == "kind":
        return tuple(KINDS)
    cards = data.get("device")
    if param.key not in ("device", "upper") or not isinstance(cards, dict):
        return ()
    return tuple(name for name, card in cards.items() if isinstance(card, dict) and card.get("family") in families)


def _arms(name: str, stage: Mapping[str, Any]) -> _Asked:
    """The parts of each arm that may stand beside those that do, then all of one arm more."""
    raw = stage.get("arms")
    arms = raw if isinstance(raw, list) else []
    for number, arm in enumerate([*arms, {}], start=1):
        series = isinstance(arm, dict) and any(param.key in arm for param in ARM_SERIES)
        shunt = isinstance(arm, dict) and any(param.key in arm for param in ARM_SHUNT)
        params = (*ARM_SERIES, ARM_ROLE) if series and not shunt else (*ARM_SHUNT, ARM_ROLE) if shunt and not series \
            else ARM if arm else (*ARM_SERIES, *ARM_SHUNT)
        for param in params:
            yield f"{name}.arms.{number}.{param.key}", param, ()


def _rows(asked: _Asked, data: Mapping[str, Any], spans: Spans) -> tuple[KeyRow, ...]:
    rows = []
    for path, param, choices in asked:
        row = kinds.row(param)
        default = f"{param.default}" if param.choices or param.dimension == "flag" else row.default
        rows.append(KeyRow(path, _short(path), _text(path, data, spans), default, row.unit, param.role, param.about,
                           choices or param.choices or (("true", "false") if param.dimension == "flag" else ()),
                           param.sign, param.dimension, param.required, None))
    return tuple(rows)


def _short(path: str) -> str:
    """The path within its sheet."""
    first, _, rest = path.partition(".")
    return rest.partition(".")[2] if first in ("device", "bench") else rest or first


def _text(path: str, data: Mapping[str, Any], spans: Spans) -> str:
    try:
        return raw_text(data, spans, locate(path, data).path)
    except PathRefused:  # one arm more than there are
        return ""


def _leaning(ledger: Ledger | None) -> dict[str, bool] | None:
    """Path -> whether a figure leans on it, where the ledger's leverage was computed for another reason."""
    if ledger is None or "leverage" not in vars(ledger):
        return None
    lever = ledger.leverage
    arms = {(stage.name, arm_part(arm, key)[0]): f"{stage.name}.arms.{arm.number}.{key}"
            for stage in ledger.chain.stages for arm in stage.arms for key in arm.parts}
    rows = [(arms.get((stage, part), f"{stage}.{part}"), row) for (stage, part), row in lever.parts.items()]
    rows += [(f"{stage}.{key}", row) for (stage, key), (_, row) in lever.currents.items()]
    rows += [(f"device.{card}.{key}", row) for (card, key), (_, row) in lever.cards.items()]
    return {path: any(abs(value) > LEANS for value in row.values() if value is not None) for path, row in rows}
