"""What tests of whole chains share: the program's figures of a chain file, and figures by their names."""

from __future__ import annotations

import os
from copy import copy
from dataclasses import replace
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parent.parent
DEMOS = ROOT / "chains"
WHOLE = bool(os.environ.get("POLEBOOK_WHOLE"))


def of_whole(whole: int, part: int) -> int:
    """How many of a random test's cases are tried: a part of them, all with POLEBOOK_WHOLE=1."""
    return whole if WHOLE else part


def figures(path: str | Path) -> dict[str, Any]:
    """The program's ledger of a chain file, as the dict of its JSON."""
    from polebook.book.build import document, ledger
    from polebook.chain.read import load

    return document(ledger(load(str(path))))


def fresh(session: Any) -> Any:
    """The session with ledgers of its own, as they are now: what is asked of them stands in no other's."""
    own = {id(one): copy(one) for one in (session.ledger, session.good, session.baseline)}
    return replace(session, ledger=own[id(session.ledger)], good=own[id(session.good)],
                   baseline=own[id(session.baseline)])


def row_of(rows: list[dict[str, Any]], **wanted: str) -> dict[str, Any] | None:
    return next((r for r in rows if all(r.get(k) == v for k, v in wanted.items())), None)


def pick(doc: dict[str, Any], name: str) -> Any:
    """A figure by its name: `overall.gain`, `account.upper.lost_db`, `Q1.input_ohm`, `n1.pole_hz`, `Q1.mid.pole_hz`,
    `Q1.cmu.tau_s`, `Q1.cmu.at_input` (of the bridge), `bias.Q1.current_a`."""
    head, _, key = name.rpartition(".")
    if head == "overall":
        return doc["overall"][key]
    if head.startswith("account."):
        return doc["account"][head.removeprefix("account.")][key]
    if head.startswith("bias."):
        row = row_of(doc["bias"], stage=head.removeprefix("bias."))
        assert row is not None, name
        return row[key]
    stage, _, part = head.rpartition(".")
    line = row_of(doc["lines"], name=stage)
    found = [
        row_of(doc["lines"], name=head),
        row_of(doc["nodes"], name=head),
        row_of(doc["parts"], stage=stage, part=part),
    ]
    found.append(row_of(line["bridges"], part=part) if line else None)
    rows = [r for r in found if r is not None and key in r]
    assert rows, f"{name}: no such figure"
    return rows[0][key]
