"""The working of the focused figure, over the page."""

from __future__ import annotations

from polebook.problem import ProblemsFound
from polebook.report.look import Look
from polebook.tui.control.base import Done, at, done, reason, refuse, say
from polebook.tui.control.figures import focused
from polebook.tui.view import Overlay, State

_WIDTH = 74


def show(state: State) -> Done:
    """The working: formula, numbers put in, result, where the method is published."""
    name = focused(state)
    if state.session.ledger is None or not name:
        return refuse(state, "there is no figure to account for", "! tells what is wrong with the file")
    from polebook.book.working import working  # deferred: the first paint needs none of it
    from polebook.report.working import working as page

    try:
        document = working(state.session.ledger, name).document()
    except ProblemsFound as found:
        return say(state, reason(found), bad=True)
    look = Look(encoding="ascii" if state.plain else "utf-8", width=_WIDTH)
    lines = page(document, "", "", look).rstrip("\n").split("\n")
    first = next((number for number, line in enumerate(lines) if line.startswith(f" {name} ")), 0)
    lines = lines[first:]  # without the heading, which the title line of the app has
    return done(at(state, overlay=Overlay("working", f"working of {name}", text=tuple(lines), about=name), field=None))
