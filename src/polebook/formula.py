"""A figure's formula as data: what the workings print, and where the method stands in print."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Formula:
    """figure  its name in the ledger's JSON, e.g. "lines.k"
    text     the formula, with the symbols of the ledger
    source   where the method is published; "definition" where it is only a definition
    """

    figure: str
    text: str
    source: str
