"""Keys that change what is looked at: pages, lines, keys, figures, the sheet or the page."""

from __future__ import annotations

from collections.abc import Mapping

from polebook.tui.control import jobs, pages
from polebook.tui.control.base import Done, at, done, line, lines, refuse, rows, to_sheet
from polebook.tui.control.figures import names_of
from polebook.tui.keys import PAGES
from polebook.tui.view import Page, State

_ORDER: tuple[Page, ...] = tuple(pages.PAGES)
_OF_DIGIT: Mapping[str, Page] = dict(zip(PAGES, _ORDER, strict=True))


def page(state: State, digit: str, now: float) -> Done:
    """The page of a digit."""
    return done(_opened(at(state, digit_at=now), _OF_DIGIT[digit]))


def turn(state: State, by: int) -> Done:
    """The page before or after."""
    to = min(max(_ORDER.index(state.view.page) + by, 0), len(_ORDER) - 1)
    return done(_opened(state, _ORDER[to]))


def _opened(state: State, page: Page) -> State:
    """The state on that page, at its first row."""
    return pages.PAGES[page].opened(at(state, page=page, row=0, figure=0))


def select(state: State, to: int) -> Done:
    """Line number `to`, as far as there is one; the same key where its sheet has it."""
    names = lines(state.session)
    to = min(max(to, 0), len(names) - 1)
    if to == state.view.line and not state.view.sheet:
        return done(state)
    found = rows(state)
    key = found[min(state.view.key, len(found) - 1)].key if found else ""
    focus = state.view.focus
    return done(at(to_sheet(state, names[to], key), focus=focus))


def step_line(state: State, by: int) -> Done:
    return select(state, min(state.view.line, len(lines(state.session)) - 1) + by)


def step_row(state: State, by: int) -> Done:
    """The key or row before or after."""
    view = state.view
    if view.focus == "sheet":
        count = len(rows(state))
        return done(at(state, key=min(max(min(view.key, count - 1) + by, 0), max(count - 1, 0))))
    number = pages.ways(state).rows
    if number is None:
        return step_line(state, by)
    count = number(state)
    return done(at(state, row=min(max(min(view.row, count - 1) + by, 0), max(count - 1, 0))))


def step_figure(state: State, by: int) -> Done:
    """The figure before or after in the row of the page."""
    if state.view.focus == "sheet":
        return refuse(state, "figures are chosen on the page", "Tab goes there")
    count = len(names_of(state))
    return done(at(state, figure=min(max(min(state.view.figure, count - 1) + by, 0), max(count - 1, 0))))


def focus(state: State) -> Done:
    """From the sheet to the page, and back."""
    return done(at(state, focus="page" if state.view.focus == "sheet" else "sheet"))


def back(state: State) -> Done:
    """One step back: what runs stopped; to the line's own sheet, to the ledger, to the sheet."""
    view = state.view
    if jobs.watched(state) is not None:
        return done(jobs.halted(state))
    if view.sheet:
        return done(to_sheet(state, line(state)))
    if view.page != "ledger":
        return done(at(state, page="ledger", row=0, figure=0))
    return done(at(state, focus="sheet"))


def act_on_page(state: State) -> Done:
    """Enter on a row of the page: the key that makes it, else the line's sheet."""
    return pages.ways(state).act(state)


def no_choice(state: State) -> Done:
    """A key of the page that chooses what may change, on another page."""
    return refuse(state, "keys are chosen for a plan", "9 is its page")


def no_plot(state: State) -> Done:
    """A key of a plot on a page that has none."""
    return refuse(state, f"the {state.view.page} page has no plot", "3 is the response")

