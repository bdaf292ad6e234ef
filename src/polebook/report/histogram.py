"""A histogram as a few lines of text: bars on an axis, with a mark where a limit lies."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.report.document import Entry
from polebook.report.look import Look

ROWS = 3
_BLOCKS, _PLAIN = " ▁▂▃▄▅▆▇█", " ....:::#"  # by eighths of a row
_AXIS, _PLAIN_AXIS = "─▲", "-^"


def histogram(bins: Entry, limits: Sequence[float], look: Look) -> list[str]:
    """One column a bin. A bin that holds anything shows something; a limit is marked where it lies within."""
    counts = bins["counts"]
    rich = look.has(_BLOCKS + _AXIS)
    blocks, axis_of = (_BLOCKS, _AXIS) if rich else (_PLAIN, _PLAIN_AXIS)
    top = max(counts, default=0)
    heights = [max(round(8 * ROWS * count / top), 1) if count else 0 for count in counts]
    rows = ["".join(blocks[min(max(height - 8 * row, 0), 8)] for height in heights) for row in reversed(range(ROWS))]
    axis = [axis_of[0]] * len(counts)
    for limit in limits:
        at = place(bins, limit)
        if at is not None:
            axis[at] = axis_of[1]
    return [f"  {row}".rstrip() for row in rows if row.strip()] + [f"  {''.join(axis)}"]


def place(bins: Entry, limit: float) -> int | None:
    """The column that a limit lies in, None where it lies beyond either end."""
    low, high = bins["from"], bins["to"]
    if not low <= limit <= high:
        return None
    return min(int((limit - low) / (high - low) * len(bins["counts"])), len(bins["counts"]) - 1)
