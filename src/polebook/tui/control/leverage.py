"""Keys of the leverage page's ranking: rows, the figure that ranks them, Enter that sweeps one. Its plot is `swept`."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from polebook.book.reach import within_reach
from polebook.problem import ProblemsFound
from polebook.session.state import sheets_of
from polebook.tui.control import jobs, swept, working
from polebook.tui.control.base import Done, Work, at, done, focused, line, lines, refuse, say, stepping, still, to_sheet
from polebook.tui.draw.levers import AIMS, Mover, aim, chosen, ranked
from polebook.tui.draw.scene import Scene
from polebook.tui.view import State


def movers(state: State) -> Sequence[Mover]:
    """The rows; none without figures."""
    scene = Scene(state)
    if scene.ledger is None:
        return []
    try:
        with within_reach(scene.chain):
            return ranked(scene)
    except ProblemsFound:  # figures beyond what can be computed
        return []


def rows(state: State) -> int:
    """How many rows the page has."""
    return len(movers(state))


def _act(state: State, now: float) -> Done:
    """Sweeps the part of the row; on its plot sets the part to the value at the cursor, or sweeps it again."""
    if state.view.lever.open and state.view.lever.sweep is not None:
        return swept.act(state, state.view.lever.sweep, now)
    found = movers(state)
    if not found:
        return refuse(state, *swept.NO_FIGURES)
    mover = found[chosen(Scene(state), found)]
    return swept.begin(_to(state, mover), mover)


def _lever(state: State, **changed: Any) -> State:
    return at(state, lever=replace(state.view.lever, **changed))


def _to(state: State, mover: Mover) -> State:
    """The state at a row, its key in sight on its sheet."""
    state = _lever(state, row=mover.name)
    if mover.sheet not in sheets_of(state.session):  # figures of before a fault
        return state
    return at(to_sheet(state, mover.sheet, mover.key), focus=state.view.focus)


def _row(state: State, by: int) -> Done:
    """The row before or after."""
    found = movers(state)
    if not found:
        return done(state)
    to = min(max(chosen(Scene(state), found) + by, 0), len(found) - 1)
    return done(_lever(_to(state, found[to]), open=False))


def _line(state: State, to: int) -> Done:
    """Another line, and of its rows the one with the greatest leverage."""
    names = lines(state.session)
    name = names[min(max(to, 0), len(names) - 1)]
    key = focused(state)
    state = at(to_sheet(state, name, key.key if key is not None else ""), focus=state.view.focus)
    first = next((mover for mover in movers(state) if mover.sheet == name), None)
    return done(state if first is None else _lever(_to(state, first), open=False))


def _step_line(state: State, by: int) -> Done:
    return _line(state, lines(state.session).index(line(state)) + by)


def _figure(state: State, by: int) -> Done:
    """The figure before or after, by which the rows are ranked."""
    keys = [one.key for one in AIMS]
    to = keys[(keys.index(aim(state.view.lever.figure).key) + by) % len(keys)]
    return say(_lever(state, figure=to), f"ranked by leverage on the {aim(to).word}")


def _band(state: State) -> Done:
    """The other end of the band, and its edge."""
    upper = not state.view.upper
    return _figure(_lever(at(state, upper=upper), figure="upper_edge" if upper else "lower_edge"), 0)


def _along(state: State, by: int) -> Done:
    """The figure before or after; on the plot its cursor."""
    sweep = state.view.lever.sweep
    return swept.move(state, sweep, by) if state.view.lever.open and sweep is not None else _figure(state, by)


def _end(state: State, last: bool) -> Done:
    """The source or the load; on the plot its ends."""
    sweep = state.view.lever.sweep
    if state.view.lever.open and sweep is not None:
        return swept.move(state, sweep, len(sweep.values) * (1 if last else -1))
    return _line(state, len(lines(state.session)) - 1 if last else 0)


def _back(state: State) -> Done:
    """One step back: the job stopped, the ranking, the ledger."""
    if jobs.watched(state) is not None:
        return done(jobs.stopped(state))
    if state.view.lever.open:
        return done(_lever(state, open=False))
    return done(at(state, page="ledger", row=0, figure=0))


def _working(state: State) -> Done:
    """The working of the leverage; of what is no part of the network there is none."""
    found = movers(state)
    mover = found[chosen(Scene(state), found)] if found else None
    if mover is not None and not mover.known:
        return refuse(state, f"{mover.label} is no part of the network, so its leverage has no working",
                      "the parts that it moves have one")
    return working.show(state)


def _single(state: State) -> Done:
    """One more figure that the sweep follows; of the ranking there is nothing to single out."""
    if state.view.lever.open and state.view.lever.sweep is not None:
        return swept.follow(state, state.view.lever.sweep)
    return refuse(state, "single lines are curves of the response", "3 is its page")


OWN: Mapping[str, Work] = {
    "act": _act,
    "row before": stepping(_row, -1),
    "row after": stepping(_row, 1),
    "line before": stepping(_step_line, -1),
    "line after": stepping(_step_line, 1),
    "first line": lambda state, now: _end(state, False),
    "last line": lambda state, now: _end(state, True),
    "figure before": stepping(_along, -1),
    "figure after": stepping(_along, 1),
    "next curve": stepping(_figure, 1),
    "curve before": stepping(_figure, -1),
    "band": still(_band),
    "back": still(_back),
    "working": still(_working),
    "single lines": still(_single),
    "zoom in": lambda state, now: swept.zoom(state, 0.5),
    "zoom out": lambda state, now: swept.zoom(state, 2.0),
    "pan left": lambda state, now: swept.pan(state, -0.25),
    "pan right": lambda state, now: swept.pan(state, 0.25),
}
"""Action -> what it does on this page."""
