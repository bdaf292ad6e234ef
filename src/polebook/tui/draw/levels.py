"""Page 6, levels: the d.c. plan, and signal, noise and clip level from node to node; both where there is room."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from polebook.tui.draw import levels_plan, levels_signal
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line

BOTH = 22
"""Rows from which both banks are drawn."""
LEAST_BANK = 10


@dataclass(frozen=True, slots=True)
class _Bank:
    """What `polebook.tui.draw.pages.Drawn` asks of a page, of half a page."""

    page: Callable[[Scene, int, int, str], list[Line]]
    figures: Callable[[Scene], tuple[str, ...]]
    rows_for_all: Callable[[Scene], int]


_PLAN = _Bank(levels_plan.bank, levels_plan.figures, levels_plan.rows_for_all)
_LEVELS = _Bank(levels_signal.bank, levels_signal.figures, levels_signal.rows_for_all)
_BANKS: Mapping[str, _Bank] = {"plan": _PLAN, "levels": _LEVELS}


def _chosen(scene: Scene) -> _Bank:
    return _BANKS.get(scene.view.bank, _PLAN)


def figures(scene: Scene) -> tuple[str, ...]:
    """The figures of the bank that `b` has chosen."""
    return _chosen(scene).figures(scene)


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells: the chosen bank, or the one over the other."""
    if rows < BOTH:
        return _chosen(scene).page(scene, room, rows, focus)
    spare, below = rows - 1, _LEVELS.rows_for_all(scene)
    above = min(_PLAN.rows_for_all(scene), max(spare - below, LEAST_BANK))
    lines = _PLAN.page(scene, room, above, focus)
    return [*lines, BLANK, *_LEVELS.page(scene, room, min(below, rows - len(lines) - 1), focus)]


def rows_for_all(scene: Scene) -> int:
    """Lines that both banks take."""
    return _PLAN.rows_for_all(scene) + 1 + _LEVELS.rows_for_all(scene)


def want(scene: Scene) -> int:
    """Lines that the chosen bank takes."""
    return _chosen(scene).rows_for_all(scene)
