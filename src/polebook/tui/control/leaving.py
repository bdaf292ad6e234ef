"""Writing the file, and leaving: the only thing that asks, and only where work is unsaved."""

from __future__ import annotations

from dataclasses import replace

from polebook.problem import ProblemsFound, printable
from polebook.session import places, watch
from polebook.session.state import ChangedOnDisk, Session, agreed, changed_on_disk, reload, save
from polebook.text.history import History
from polebook.tui.control import fields, notes, writing_judged
from polebook.tui.control.asked import both, care, question
from polebook.tui.control.base import Done, Outcome, at, changed, done, focused, reason, refuse, say
from polebook.tui.view import Care, Choice, Overlay, State

_WRITE = Choice("write", "write the file and leave")
_LOSE = Choice("lose", "leave without writing: what was edited is lost")
_KEEP = Choice("keep", "leave; opening the file again offers what was edited")
_STAY = Choice("stay", "stay")


def write(state: State, over: bool = False) -> Done:
    """The file written, or the reason why not."""
    session = state.session
    if session.saved and not over and not changed_on_disk(session):
        return say(state, "nothing to write: the file is as it stands here")
    try:
        saved = save(session, over)
    except ChangedOnDisk:
        try:
            look = watch.at_once(session.path, session.identity)
        except OSError as error:
            return refuse(state, f"the file can't be looked at ({places.words(error)})", "w tries again")
        if look is None:  # it is as it was after all
            return write(state, over=True)
        return done(question(care(state, look, asked=True), writes=True))
    except ProblemsFound as found:
        return say(state, reason(found), bad=True)
    after = replace(state, session=saved, care=Care(kept=state.care.kept, unkept=state.care.unkept))
    return say(after, f"written: {printable(session.path)}{_faults(saved)}")


def _faults(session: Session) -> str:
    count = len(session.problems)
    return "" if not count else f", with {count} fault{'s' if count > 1 else ''} in it"


def leave(state: State) -> Done:
    """Out, or the question what becomes of the work."""
    if not state.unsaved:
        return state, Outcome.QUIT
    session = state.session
    count = _unwritten(session.history) + (state.text != session.history.text)
    edits = f"{count} edit{'s' if count != 1 else ''}" if session.exists and count else \
        "what stands here is" if session.exists else "a new chain"
    shut = bool(session.held or session.read_only)
    choices = (_KEEP, _LOSE, _STAY) if shut else (_WRITE, _LOSE, _STAY)
    return done(at(state, overlay=Overlay("leave", f"{edits} not written yet", choices), field=None))


def _unwritten(history: History) -> int:
    """Steps since the file held the text; 0 where that was not before them."""
    count = 0
    while history.past and not history.saved:
        history, count = history.undo(), count + 1
    return count if history.saved else 0


def leaving(state: State, value: str) -> Done:
    """What was chosen on leaving."""
    state = at(state, overlay=None)
    if value in ("lose", "keep"):
        return replace(state, care=replace(state.care, keep=value == "keep")), Outcome.QUIT
    if value == "write":
        after, outcome = write(writing_judged.taken_in(state))
        return (after, Outcome.QUIT) if after.session.saved else (_unwritable(after), outcome)
    return done(state)


def _unwritable(state: State) -> State:
    """The state after a save that failed on leaving: why, and the ways out that need no file."""
    if not state.view.bad or state.view.overlay is not None:
        return state
    return at(state, message="", bad=False, overlay=Overlay(
        "leave", "it could not be written", (_KEEP, _LOSE, _STAY), refusal=state.view.message))


def settle(state: State, overlay: Overlay, value: str, now: float) -> Done:
    """What was chosen for a file that another hand has changed; `state` has nothing over the page."""
    look = state.care.theirs
    if value == "both":
        return done(both(state, overlay))
    if value == "read":
        try:
            session = reload(state.session, now)
        except ProblemsFound as found:
            return refuse(state, reason(found))
        return done(changed(care(state, None), session))
    if value != "mine" or look is None:
        return done(state)
    state = care(replace(state, session=agreed(state.session, look)), None)
    if overlay.about == "write" or look.identity is None:
        return write(state)
    return say(state, "kept: w writes what stands here over what is on the disk")


def half_typed(state: State, now: float) -> State:
    """The state with an open note or line of words accepted, as far as it can be: the program is ending.

    A quantity is not: half of one is another one.
    """
    view, row = state.view, focused(state)
    if view.overlay is not None and view.overlay.purpose == "note":
        return notes.press(state, view.overlay, "enter", None, now)[0]
    if view.field is not None and row is not None and row.path == view.field.path and row.key in ("title", "note"):
        return fields.accept(state, view.field, 0, now)[0]
    return state
