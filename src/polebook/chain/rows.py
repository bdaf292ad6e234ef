"""A table of the file against its parameter rows: unknown and missing keys, every value, every default."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from polebook.chain import values
from polebook.chain.desk import Desk, Owner
from polebook.chain.suggest import listed
from polebook.param import Param
from polebook.quantity import DIMENSIONS, parse
from polebook.refusal import quoted

Table = Mapping[str, Any]
Unknown = Callable[[str], tuple[str, str]]  # key -> why, fix
_FEW = 20  # keys that a message lists


@dataclass(slots=True)
class Row:
    """What a table held beside its numbers, which are at the desk."""

    texts: dict[str, str] = field(default_factory=dict)
    flags: dict[str, bool] = field(default_factory=dict)
    counts: dict[str, int] = field(default_factory=dict)


def read(desk: Desk, table: Table, owner: Owner, params: Iterable[Param], unknown: Unknown | None = None) -> Row:
    """Reads `table`: numbers go to the desk, the rest comes back. Lists of keys, arms and tables are left to others."""
    known = {param.key: param for param in params}
    row = Row()
    for key, raw in table.items():
        if key in known:
            _value(desk, raw, known[key], owner, row)
        else:
            why, fix = (unknown or _not_here(desk, known, owner))(key)
            desk.fault((*owner.path, key), f"unknown key {quoted(key)} in {owner.words}", why, fix, "key")
    for param in known.values():
        if param.key not in table:
            _absent(desk, param, owner, row)
    return row


def _not_here(desk: Desk, known: Mapping[str, Param], owner: Owner) -> Unknown:
    def explain(key: str) -> tuple[str, str]:
        keys = f"{owner.words} has the keys {listed(known)}" if len(known) <= _FEW else f"{owner.words} has no such key"
        return keys, nearest_key(desk, key, known)

    return explain


def nearest_key(desk: Desk, key: str, known: Iterable[str]) -> str:
    """The remedy for an unknown key."""
    near = desk.near(key, known)
    return f"write {near}, the nearest known key, or take it out" if near else "take it out"


def _value(desk: Desk, raw: object, param: Param, owner: Owner, row: Row) -> None:
    path = (*owner.path, param.key)
    desk.mark(owner.number(param.key), path)
    if param.dimension in DIMENSIONS:
        value = values.number(desk, raw, param, owner, path)
        if value is not None:
            desk.put(owner.number(param.key), value, path)
    elif param.dimension == "quantities":
        found = values.quantities(desk, raw, param, owner, path)
        row.counts[param.key] = len(found)
        for at, value in enumerate(found):
            desk.put(owner.number(f"{param.key}.{at + 1}"), value, (*path, at))
    elif param.dimension == "flag":
        state = values.flag(desk, raw, param, owner, path)
        if state is not None:
            row.flags[param.key] = state
    elif param.dimension in ("text", "choice") and (param.choices or param.dimension == "text"):
        word = (values.choice if param.choices else values.text)(desk, raw, param, owner, path)
        if word is not None:
            row.texts[param.key] = word
    elif param.dimension == "date":
        if type(raw) is datetime.date:
            row.texts[param.key] = raw.isoformat()
        else:
            desk.fault(
                path,
                f"{quoted(raw)} is not a date",
                f"{param.key} of {owner.words} is a TOML date without a time",
                f"write year, month and day without quotes: {param.key} = 2026-05-04",
            )


def _absent(desk: Desk, param: Param, owner: Owner, row: Row) -> None:
    if param.required:
        example = DIMENSIONS[param.dimension].example if param.dimension in DIMENSIONS else "..."
        if param.choices:
            example = param.choices[0]
        desk.fault(
            (*owner.path, param.key),
            f"{owner.words} has no {param.key}",
            f"{param.key} is required: {param.about}",
            f'add {param.key} = "{example}"',
            "table",
        )
    elif param.default and param.dimension in DIMENSIONS:
        desk.put(owner.number(param.key), parse(param.default, param.dimension), None)
    elif param.default and param.choices:
        row.texts[param.key] = param.default


def as_table(desk: Desk, raw: object, name: str) -> Table | None:
    """`raw` where it is a table; else a fault, and None."""
    if isinstance(raw, dict):
        return raw
    why = (
        f"{name} stands once, and [[{name}]] begins a list"
        if isinstance(raw, list)
        else (f"{quoted(raw)} is {values.kind_of_value(raw)}")
    )
    desk.fault((name,), f"{name} is not a table", why, f"write the header [{name}] and its keys below it", "key")
    return None


def as_tables(desk: Desk, raw: object, name: str) -> list[tuple[int, Table]]:
    """The tables of a list with their positions; what is none is a fault."""
    if isinstance(raw, dict):
        desk.fault(
            (name,),
            f"[{name}] is written with two brackets",
            f"there can be several, so each begins with [[{name}]]",
            f"write the header [[{name}]]",
            "key",
        )
        return []
    if not isinstance(raw, list):
        desk.fault(
            (name,),
            f"{name} is not a list of tables",
            f"{quoted(raw)} is {values.kind_of_value(raw)}",
            f"write each as a table with the header [[{name}]]",
            "key",
        )
        return []
    tables: list[tuple[int, Table]] = []
    for at, item in enumerate(raw):
        if isinstance(item, dict):
            tables.append((at, item))
        else:
            desk.fault(
                (name, at),
                f"{quoted(item)} is not a table",
                f"each {name} is a table of its keys",
                f"write it with the header [[{name}]]",
            )
    return tables
