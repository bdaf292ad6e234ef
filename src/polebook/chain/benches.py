"""What was measured on hardware: every [[bench]] table."""

from __future__ import annotations

from collections.abc import Collection

from polebook.chain import rows
from polebook.chain.desk import Desk, Owner
from polebook.chain.model import Bench
from polebook.chain.sections import gain_unit, of_source_kind
from polebook.chain.suggest import listed
from polebook.chain.tables import BENCH
from polebook.refusal import quoted


def read(desk: Desk, raw: object, names: Collection[str], source_kind: str) -> tuple[Bench, ...]:
    """Every [[bench]] table; `names` are those of the stages."""
    found = []
    for at, table in rows.as_tables(desk, raw, "bench"):
        number = at + 1
        owner = Owner(("bench", at), f"bench.{number}", f"bench {number}")
        desk.mark(owner.prefix, owner.path)
        row = rows.read(desk, table, owner, of_source_kind(BENCH, source_kind))
        gain_unit(desk, table, source_kind, owner)
        where = row.texts.get("at", "")
        if where and where not in names:
            near = desk.near(where, names)
            desk.fault(
                (*owner.path, "at"),
                f"there is no stage {quoted(where)}",
                f"at of {owner.words} names the stage at whose output it was measured; the stages are {listed(names)}",
                f'write at = "{near}", the nearest' if near else "name one of them, or take at out for the load",
            )
        texts = row.texts
        found.append(
            Bench(
                number,
                texts.get("date", ""),
                texts.get("unit", ""),
                where,
                texts.get("file", ""),
                texts.get("note", ""),
            )
        )
    return tuple(found)
