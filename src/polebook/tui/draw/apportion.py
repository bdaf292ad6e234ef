"""Page 9, apportion: the keys that may change, and what a plan makes of them and of the targets."""

from __future__ import annotations

from polebook.tui.apportions import holds, rows, standing
from polebook.tui.draw.apportion_keys import keys
from polebook.tui.draw.apportion_told import LEAST, aside, head, running
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.keys import Hint
from polebook.tui.lines import Line, Span

WANT, DECENT = 14, 12
ASIDE = 38  # cells of what stands beside the keys
BOTH = 2 * ASIDE  # from which on it has them all
GAP = 2


def page(scene: Scene, room: int, size: int, focus: str = "") -> list[Line]:
    """At most `size` lines of at most `room` cells."""
    side = ASIDE + max(room - BOTH - GAP, 0) // 8 if room >= BOTH else max(room * 2 // 5, LEAST)
    left = room - side - GAP
    one = keys(scene, left, size - 1)
    if not one:
        return [head(scene, room), *((Span(" "), *line) for line in aside(scene, room - 1, size - 1))][:max(size, 0)]
    other = aside(scene, side, size - 1)
    tall = max(len(one), len(other))
    both = zip(one + [BLANK] * (tall - len(one)), other + [BLANK] * (tall - len(other)), strict=True)
    return [head(scene, room), *((*scene.pen.fitted(first, left + GAP), *second) for first, second in both)][:size]


def hints(scene: Scene) -> tuple[Hint, ...]:
    """What can be pressed on the page, by what it would do."""
    state = scene.state
    run, busy = scene.view.apportion.run, running(state)
    halting = state.job is not None and state.job.halting
    first: list[Hint] = [("Esc", "give it up" if halting else "stop")] if busy else []
    if not busy and holds(state):
        first = [("Enter", "accept")] if run is not None and run.edit else []
        first.append(("s", "run again"))
    elif not busy:
        first = [("Enter", "run" if standing(state) == "none" else "run again")]
    choose: list[Hint] = [("* /", "all, stage")] if rows(state) else []
    told: list[Hint] = [("=", "in words")] if run is not None and not busy else []
    return (*first, *([("Space", "choose")] if choose else []), ("v V", "favour"), *told, *choose, ("[ ]", "seed"),
            ("Tab", "sheet"), ("?", "help"))
