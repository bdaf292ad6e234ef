"""What every page with a plot and a cursor does with the same keys: along it, nearer, aside, to its ends."""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeVar

from polebook.tui.control.base import Done, Work, stepping
from polebook.tui.view import State

Move = TypeVar("Move")


def window_keys(moved: Callable[[State, Move, int], Done], zoomed: Callable[[State, int], Done], along: Move,
                panned: Move, to_end: Move) -> dict[str, Work]:
    """Action -> work: `moved` does one of the page's own moves by a step (-1, 1); `zoomed` goes nearer, further."""
    def moving(move: Move, step: int) -> Work:
        return lambda state, now: moved(state, move, step)

    return {
        "figure before": moving(along, -1),
        "figure after": moving(along, 1),
        "zoom in": stepping(zoomed, 1),
        "zoom out": stepping(zoomed, -1),
        "pan left": moving(panned, -1),
        "pan right": moving(panned, 1),
        "first line": moving(to_end, -1),
        "last line": moving(to_end, 1),
    }
