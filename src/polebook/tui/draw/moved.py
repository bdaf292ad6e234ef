"""What moved against the baseline, as short text: two digits and a sign."""

from __future__ import annotations

from polebook.book.compare import Change
from polebook.report.figures import signed

WIDTH = 5
"""Cells of a column of changes."""


def text(change: Change | None, unit: str = "") -> str:
    """By how much a figure moved: "+0.31", "-11k", "+3"; "" where it did not by as much as would show."""
    if change is None or not change.moved or change.before is None or change.after is None:
        return ""
    delta = change.delta
    if delta is None:
        return ""
    if change.way == "ratio":
        return signed(change.after - change.before, unit or "Hz") if abs(delta - 1.0) >= FAINT else ""
    return signed(delta, {"points": "%"}.get(change.way, unit or "dB"))


FAINT = 5e-5  # of a figure: four digits would not show it
