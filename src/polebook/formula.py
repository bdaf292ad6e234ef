"""A figure's formula as data, and its working: the formula with the numbers put in, step by step."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True, slots=True)
class Formula:
    """figure  its name in the ledger's JSON, e.g. "bridges.k"
    text     the formula; where it is "symbol = expression", the workings compute by this very text
    source   where the method is published; "definition" where it is only a definition
    """

    figure: str
    text: str
    source: str


@dataclass(frozen=True, slots=True)
class Number:
    """A number put into a working.

    value   in base SI units;  unit "" for a plain number
    origin  kind "figure": the name of another figure; "file": line and path; "default": the path whose default it
            is; "solution": which solved network it is read from; "constant": what it is
    """

    symbol: str
    value: float
    unit: str
    about: str
    origin: str
    kind: str


@dataclass(frozen=True, slots=True)
class Step:
    """One line of arithmetic: `symbol` = `text`, an expression of the numbers' and earlier steps' symbols.

    result  it comes to the figure itself
    must    "" but for a check: the expression that `text` has to come to; must_value, its value
    """

    symbol: str
    text: str
    value: float
    unit: str
    about: str = ""
    result: bool = False
    must: str = ""
    must_value: float | None = None


@dataclass(frozen=True, slots=True)
class Working:
    """How one figure came about.

    value    as in the ledger: a number, true or false, None where the figure does not apply
    formula  what is computed, or the equation that is solved
    why      of a figure that is null, in plain words
    note     what a reader should know beside it, or ""
    """

    figure: str
    value: float | bool | None
    unit: str
    about: str
    formula: str
    source: str
    numbers: tuple[Number, ...] = ()
    steps: tuple[Step, ...] = ()
    why: str = ""
    note: str = ""

    def document(self) -> dict[str, Any]:
        """The working as plain data, numbers at full precision."""
        return {
            "figure": self.figure, "value": self.value, "unit": self.unit, "about": self.about,
            "formula": self.formula, "source": self.source,
            "numbers": [{"symbol": n.symbol, "value": n.value, "unit": n.unit, "about": n.about, "from": n.origin,
                         "kind": n.kind} for n in self.numbers],
            "steps": [{"symbol": s.symbol, "text": s.text, "value": s.value, "unit": s.unit, "about": s.about,
                       "result": s.result, "must": s.must, "must_value": s.must_value} for s in self.steps],
            "why": self.why, "note": self.note,
        }
