"""The pages, once for keys: which rows the arrows go through, what Enter does, what other keys do there."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from polebook.tui.control import apportion, history, levels, leverage, noise, pulse, response, spread
from polebook.tui.control.base import Done, Work, at, done, to_path
from polebook.tui.control.figures import parts_of
from polebook.tui.view import Page, State


@dataclass(frozen=True, slots=True)
class Ways:
    """What keys do on a page.

    rows  how many rows `up` and `down` go through; None: they choose the line
    act   Enter with the page focused
    own   action -> what it does here instead, with the page focused; those of PLOT whatever has the focus
    always  actions of `own` that need no focus either
    opened  the state as the page is come to
    """

    rows: Callable[[State], int] | None
    act: Callable[[State], Done]
    own: Mapping[str, Work] = field(default_factory=dict)
    always: frozenset[str] = frozenset()
    opened: Callable[[State], State] = lambda state: state


def _to_sheet(state: State) -> Done:
    return done(at(state, focus="sheet"))


def _to_part(state: State) -> Done:
    """To the key that makes the row."""
    found = parts_of(state)
    return done(to_path(state, found[min(state.view.row, len(found) - 1)])) if found else _to_sheet(state)


PLOT = frozenset({"zoom in", "zoom out", "pan left", "pan right", "next curve", "curve before", "single lines"})
"""Actions that only a page with a plot has."""

PAGES: Mapping[Page, Ways] = {
    "ledger": Ways(None, _to_sheet),
    "nodes": Ways(lambda state: len(parts_of(state)), _to_part),
    "response": Ways(None, response.act, response.OWN, opened=history.looked),
    "pulse": Ways(pulse.rows, pulse.act, pulse.OWN, frozenset({"band"})),
    "noise": Ways(noise.rows, noise.act, noise.OWN),
    "levels": Ways(None, levels.act, levels.OWN, frozenset({"band"})),
    "leverage": Ways(leverage.rows, _to_sheet, leverage.OWN),
    "spread": Ways(spread.rows, spread.act, spread.OWN),
    "apportion": Ways(apportion.rows, _to_sheet, apportion.OWN, frozenset({"choose"})),
    "history": Ways(history.count, history.act, history.OWN, opened=history.looked),
}


def ways(state: State) -> Ways:
    """Those of the page in sight."""
    return PAGES[state.view.page]


def own(state: State, action: str) -> Work | None:
    """What an action does on the page in sight, where that is not what it does elsewhere."""
    found = ways(state)
    return found.own.get(action) if action in PLOT | found.always or state.view.focus == "page" else None
