"""Writing the file, and leaving: the only thing that asks, and only where work is unsaved."""

from __future__ import annotations

from dataclasses import replace

from polebook.problem import ProblemsFound, printable
from polebook.session.state import ChangedOnDisk, Session, reload, save
from polebook.tui.control.base import Done, Outcome, at, changed, done, reason, refuse, say
from polebook.tui.view import Choice, Overlay, State

_LEAVE = (
    Choice("write", "write the file and leave"),
    Choice("lose", "leave without writing: what was edited is lost"),
    Choice("stay", "stay"),
)
_CHANGED = (
    Choice("read", "read it again", "what is here becomes one edit back: u brings it back"),
    Choice("over", "write over it", "what was written there meanwhile is lost"),
    Choice("stay", "do nothing now"),
)


def write(state: State, over: bool = False) -> Done:
    """The file written, or the reason why not."""
    session = state.session
    if session.history.saved and not over:
        return say(state, "nothing to write: the file is as it stands here")
    try:
        saved = save(session, over)
    except ChangedOnDisk as found:
        return done(at(state, overlay=Overlay("changed", told(found), _CHANGED), field=None))
    except ProblemsFound as found:
        return say(state, reason(found), bad=True)
    return say(replace(state, session=saved), f"written: {printable(session.path)}{_faults(saved)}")


def told(found: ProblemsFound) -> str:
    return found.problems[0].what


def _faults(session: Session) -> str:
    count = len(session.problems)
    return "" if not count else f", with {count} fault{'s' if count > 1 else ''} in it"


def leave(state: State) -> Done:
    """Out, or the question what becomes of the work."""
    if state.session.history.saved or not (state.session.exists or state.session.history.text):
        return state, Outcome.QUIT
    count = len(state.session.history.past)
    edits = f"{count} edit{'s' if count != 1 else ''}" if count else "a new chain"
    overlay = Overlay("leave", f"{edits} not written yet", _LEAVE)
    return done(at(state, overlay=overlay, field=None))


def leaving(state: State, value: str) -> Done:
    """What was chosen on leaving."""
    state = at(state, overlay=None)
    if value == "lose":
        return state, Outcome.QUIT
    if value == "write":
        after, outcome = write(state)
        return (after, Outcome.QUIT) if after.session.history.saved else (after, outcome)
    return done(state)


def settle(state: State, value: str, now: float) -> Done:
    """What was chosen for a file that another hand has changed."""
    state = at(state, overlay=None)
    if value == "over":
        return write(state, over=True)
    if value == "read":
        try:
            session = reload(state.session, now)
        except ProblemsFound as found:
            return refuse(state, reason(found))
        return done(changed(state, session))
    return done(state)
