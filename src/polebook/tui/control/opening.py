"""The state that the app begins with."""

from __future__ import annotations

from polebook.session.state import open_file
from polebook.tui.control import cautions, new, writing
from polebook.tui.control.base import at, lines, to_sheet
from polebook.tui.view import State, View


def opening(path: str, plain: bool = False, colour: bool = True) -> State:
    """The file at `path` opened: a new chain is offered where there is none, as text where it has faults.

    Raises ProblemsFound for what is no readable UTF-8 text.
    """
    session = open_file(path)
    return begun(State(session, View(), plain, colour))


def begun(state: State) -> State:
    """The state as an opening shows its session."""
    session = state.session
    if not session.exists and not session.history.text:
        return new.kinds(state)
    state = to_sheet(state, lines(session)[1])
    if session.read_only:
        state = at(state, message=f"read-only: {session.read_only}; edits can't be written", bad=True)
    if not session.problems:
        return state
    return writing.edit(state)[0] if session.history.text.strip() else cautions.show(state)[0]
