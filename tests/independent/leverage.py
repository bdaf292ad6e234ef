"""Leverage by its definition: the file's number moved a little to either side, and everything solved again.

A part that the file states (or a stated current, or a figure of a card) is moved in the file's table, so that bias,
cards and small-signal figures follow; a device's own figure is moved in the network alone. Steps of a millionth in
50-digit arithmetic leave an error of some 1e-12.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from tests.independent.linear import mp
from tests.independent.quantity import number
from tests.independent.solved import Solved

STEP = 1e-6
LEVEL = mp.log(2) / 2

Path = tuple[str | int, ...]


def moved(table: Any, path: Path, factor: float) -> tuple[Any, float, float]:
    """The table with one of its numbers multiplied; the number before and after."""
    key, *rest = path
    copy = list(table) if isinstance(table, list) else dict(table)
    if rest:
        copy[key], before, after = moved(table[key], tuple(rest), factor)
    else:
        before = number(table[key], str(key))
        copy[key] = after = before * factor
    return copy, before, after


def path_of(doc: Mapping[str, Any], stage: str, part: str) -> Path | None:
    """Where the file states a part of the ledger; None for a device's own figure and for a default."""
    if stage in ("source", "load"):
        return (stage, part) if part in doc.get(stage, {}) else None
    for i, table in enumerate(doc.get("stage", [])):
        if table["name"] != stage:
            continue
        arm = re.fullmatch(r"arm(\d+)(?:\.([rlc]))?", part)
        if arm:
            keys = table["arms"][int(arm[1]) - 1]
            key = next(k for k in keys if k != "role" and (arm[2] is None or k.endswith(f"_{arm[2]}")))
            return "stage", i, "arms", int(arm[1]) - 1, key
        return ("stage", i, part) if part in table else None
    return None


class Leverage:
    """Leverage on the gain and on the edges given (Hz) of one chain file's table."""

    def __init__(self, doc: Mapping[str, Any], edges: Mapping[str, float | None]) -> None:
        self.doc, self.solved = doc, Solved(doc)
        self.names = [name for name, _ in self.solved.drawing.lines]
        self.edges = {name: self._edge(self.solved, f) for name, f in edges.items() if f is not None}
        self.absent = [name for name, f in edges.items() if f is None]

    def _excess(self, of: Solved, x: Any) -> Any:
        return mp.log(abs(of.h(mp.exp(x)) / of.gain)) + LEVEL

    def _edge(self, of: Solved, f: Any) -> Any:
        """ln of the edge near f, to some 30 digits, by secants."""
        x0, x1 = mp.log(mp.mpf(f)), mp.log(mp.mpf(f)) + mp.mpf("1e-7")
        f0 = self._excess(of, x0)
        for _ in range(30):
            f1 = self._excess(of, x1)
            if abs(f1) < mp.mpf(10) ** -30 or f1 == f0:
                return x1
            x0, x1, f0 = x1, x1 - f1 * (x1 - x0) / (f1 - f0), f1
        raise ArithmeticError("the edge was lost")

    def _figures(self, of: Solved) -> dict[str, Any]:
        return {"gain": mp.log(abs(of.gain))} | {name: self._edge(of, mp.exp(x)) for name, x in self.edges.items()}

    def _slope(self, low: Solved, high: Solved, run: Any) -> dict[str, float | None]:
        a, b = self._figures(low), self._figures(high)
        return {k: float((b[k] - a[k]) / run) for k in a} | dict.fromkeys(self.absent)

    def of_key(self, path: Path) -> dict[str, float | None]:
        """d ln(figure)/d ln(number of the file), bias and all."""
        low, _, below = moved(self.doc, path, 1 - STEP)
        high, _, above = moved(self.doc, path, 1 + STEP)
        return self._slope(Solved(low), Solved(high), mp.log(mp.mpf(above) / mp.mpf(below)))

    def of_element(self, stage: str, part: str) -> dict[str, float | None]:
        """d ln(figure)/d ln(element), nothing else moving."""
        key = (self.names.index(stage), part)
        low, high = (Solved(self.doc, {key: 1 + sign * mp.mpf(STEP)}) for sign in (-1, 1))
        return self._slope(low, high, mp.log(1 + mp.mpf(STEP)) - mp.log(1 - mp.mpf(STEP)))

    def of_row(self, stage: str, part: str) -> dict[str, float | None]:
        """Of a row of the ledger's parts."""
        path = path_of(self.doc, stage, part)
        return self.of_element(stage, part) if path is None else self.of_key(path)
