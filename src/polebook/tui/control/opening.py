"""The state that the app begins with."""

from __future__ import annotations

from polebook.session.state import open_file
from polebook.tui.control import cautions, new
from polebook.tui.control.base import at, lines, to_sheet
from polebook.tui.view import State, View


def opening(path: str, plain: bool = False, colour: bool = True) -> State:
    """The file at `path` opened: a new chain is offered where there is none, its faults are listed where it has any.

    Raises ProblemsFound for what is no readable UTF-8 text.
    """
    session = open_file(path)
    state = State(session, View(), plain, colour)
    if not session.exists and not session.history.text:
        return new.kinds(state)
    state = to_sheet(state, lines(session)[1])
    if session.read_only:
        state = at(state, message=f"read-only: {session.read_only}; edits can't be written", bad=True)
    return cautions.show(state)[0] if session.problems else state
