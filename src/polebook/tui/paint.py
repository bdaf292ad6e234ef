"""How much of a row has to be painted anew."""

from __future__ import annotations

from polebook.report.look import cells
from polebook.tui.lines import Line, width


def changed(old: Line, new: Line) -> int:
    """Cells of a row up to the last one that differs; the terminal's row is written from its beginning to there."""
    same = ""
    before, after = [(span.text, span.style) for span in old], [(span.text, span.style) for span in new]
    while before and after:
        (one, style), (other, other_style) = before.pop(), after.pop()
        if style != other_style:
            if one and other:
                break
            before += [(one, style)] if one else []
            after += [(other, other_style)] if other else []
            continue
        size = min(len(one), len(other))
        alike = next((k for k in range(size) if one[len(one) - 1 - k] != other[len(other) - 1 - k]), size)
        same += one[len(one) - alike:]
        if alike < size:
            break
        before += [(one[:len(one) - size], style)] if len(one) > size else []
        after += [(other[:len(other) - size], other_style)] if len(other) > size else []
    return max(width(old), width(new)) - cells(same)
