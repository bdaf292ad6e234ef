"""One row of a parameter table: the reader, the help and the sheets are all fed from these."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Param:
    """A key that a table of the chain file may carry.

    key        name in the file
    dimension  a name from `polebook.quantity.DIMENSIONS` for numbers; else "text", "choice", "flag",
               "quantities" (a list of numbers of `of`), "keys" (a list of key names), "arms", "table"
    about      what it is, one short line in the trade's terms
    role       "low" or "high" for a reactive part, else ""
    sign       "positive", "nonnegative" (zero: the part is not there), "nonzero" or "any"
    default    text shown and read when the key is absent; "" for none
    required   the reader asks for it
    choices    for "choice"
    of         dimension of the elements of "quantities"
    """

    key: str
    dimension: str
    about: str
    role: str = ""
    sign: str = "positive"
    default: str = ""
    required: bool = False
    choices: tuple[str, ...] = ()
    of: str = ""
