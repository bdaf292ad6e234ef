"""What another hand does to the open file and to its lock: noticed, and offered as soon as nothing is open."""

from __future__ import annotations

from dataclasses import replace

from polebook.problem import printable
from polebook.session.lock import Holder
from polebook.session.recovery import Kept
from polebook.session.state import agreed, reread
from polebook.session.watch import Look
from polebook.tui.control import cautions, recovered, writing
from polebook.tui.control.asked import care, question
from polebook.tui.control.base import at, changed
from polebook.tui.control.writing_judged import without_job
from polebook.tui.view import Overlay, State

_PASSING = frozenset({"new", "start", "cautions"})  # they tell of the text that is read anew
_QUESTIONS = frozenset({"changed", "difference"})


def noticed(state: State, look: Look, now: float) -> State:
    """The state after a look at the disk that found something else in the file's place."""
    session = state.session
    if look.known != session.identity:  # asked before a save or a decision
        return state
    state = _unasked(state)
    if look.text is not None and look.text in (session.history.text, session.history.disk):
        return care(replace(state, session=agreed(session, look)), None)
    if look.text is None:
        state = care(replace(state, session=replace(session, gone=True)), look, asked=True)
        return at(state, message=_loss(look), bad=True)
    return due(care(replace(state, session=replace(session, gone=False)), look), now)


def due(state: State, now: float) -> State:
    """The state with what waits for a decision offered, where nothing is open that it would disturb.

    The disk's text is taken at once where there is nothing here that it could take away, and this one has faults or
    is another's to write.
    """
    view, look = state.view, None if state.care.asked else state.care.theirs
    if look is None and not state.care.kept:
        return state
    passing = view.overlay is None or view.overlay.purpose in _PASSING
    if look is not None and (state.session.held or state.session.problems) and passing and view.field is None \
            and not state.unsaved:
        return _reread(state, look, now)
    if view.overlay is not None or view.field is not None or view.writing is not None:
        return state
    return recovered.ask(state) if state.care.kept else question(care(state, look, asked=True))


def back(state: State, overlay: Overlay) -> State:
    """From the difference to the choice that it was asked for from."""
    if overlay.about == recovered.ABOUT:
        return recovered.ask(state)
    return question(at(state, overlay=None), overlay.about == "write")


def held(state: State, holder: Holder | None, found: tuple[Kept, ...], now: float) -> State:
    """The state after a look at the lock: held by another, or free for us; then with the work that was left behind."""
    words = "" if holder is None else holder.words()
    if words == state.session.held:
        return state
    state = replace(state, session=replace(state.session, held=words))
    if words:
        return at(state, message=refused(words), bad=True)
    state = at(state, message="whoever held the file has left: it can be written here now", bad=False)
    return due(recovered.found(state, found), now)


def refused(words: str) -> str:
    """The message of a file that another has."""
    return f"{words}; edits can't be written"


def unkept(state: State, reason: str) -> State:
    """The state after an attempt to keep unsaved work; told once where it failed."""
    if reason == state.care.unkept:
        return state
    state = replace(state, care=replace(state.care, unkept=reason))
    if not reason:
        return state
    return at(state, message=f"unsaved work can't be kept ({reason}): only w saves it now", bad=True)


def _unasked(state: State) -> State:
    """The state without a choice that is no longer the one to make."""
    over = state.view.overlay
    stale = over is not None and over.purpose in _QUESTIONS and over.about != recovered.ABOUT
    return at(state, overlay=None) if stale else state


def _reread(state: State, look: Look, now: float) -> State:
    """The state with the disk's text, u brings the old one back; the text page opened anew where there are faults."""
    wrote, over = state.view.writing, state.view.overlay
    state = at(without_job(state), writing=None, overlay=None)
    session = reread(state.session, look, now)
    state = care(changed(state, session, "read again from the disk: u brings the old text back"), None)
    if session.problems and wrote is not None:
        state = writing.edit(state)[0]
        page = state.view.writing
        if page is not None:
            state = at(state, writing=replace(page, cursor=min(wrote.cursor, len(session.history.text))))
    elif session.problems and over is not None:
        state = cautions.show(state)[0]
    return state


def _loss(look: Look) -> str:
    if look.identity is None:
        return "gone from the disk: what stands here is kept, and w writes it anew"
    reason = printable(look.problem.what) if look.problem is not None else ""
    return f"on the disk now: {reason}; what stands here is kept"
