"""Work of an earlier run that was not written: offered when the file is opened again, taken as one edit, or dropped."""

from __future__ import annotations

from dataclasses import replace

from polebook.session import recovery
from polebook.session.instance import clock, host
from polebook.session.recovery import Kept
from polebook.session.state import apply, whole
from polebook.tui.control import difference
from polebook.tui.control.base import Done, at, changed, done, lines, say, to_sheet
from polebook.tui.control.opening import begun
from polebook.tui.control.writing_judged import without_job
from polebook.tui.view import Choice, Overlay, State

ABOUT = "kept"  # overlays about it
_LEFT = "it stays kept, and is offered at the next opening"


def found(state: State, kept: tuple[Kept, ...]) -> State:
    """The state with that work to be decided on."""
    return replace(state, care=replace(state.care, kept=kept))


def ask(state: State) -> State:
    """The state with the choice what becomes of the newest of it."""
    kept = state.care.kept
    if not kept:
        return state
    one = kept[0]
    more = f" (1 of {len(kept)})" if len(kept) > 1 else ""
    away = "" if one.who.host == host() else f" on {one.who.host[:40]}"
    title = f"unsaved work, kept {clock(one.when)}{away}{more}"
    disk = state.session.history.disk
    base = "" if disk is None else recovery.digest(disk)
    since = "" if one.base == base else "the file has gone since" if disk is None else \
        "there was no file then" if not one.base else "the file has changed since: look at what differs first"
    choices = (
        Choice("take", "take it", "one edit: u brings back what is here now"),
        Choice("see", "see what differs", "line by line"),
        Choice("drop", "drop it", "it is deleted"),
        Choice("later", "decide later", _LEFT),
    )
    return at(state, overlay=Overlay("recovered", title, choices, refusal=since, about=ABOUT), field=None)


def chosen(state: State, value: str, now: float) -> Done:
    """What was chosen for the newest of it; `state` has nothing over the page."""
    if not state.care.kept:
        return done(state)
    one, *rest = state.care.kept
    if value == "see":
        text = difference.lines(state.session.history.text, one.text)
        title = f"what differs: - here, + kept {clock(one.when)}"
        return done(at(state, overlay=Overlay("difference", title, text=text, about=ABOUT)))
    if value == "later":
        return say(_next(found(state, ()), False), _LEFT)
    state = found(state, tuple(rest))
    if value == "drop":
        recovery.drop(one)
        return say(_next(state, False), "dropped")
    told = f"taken as it was at {clock(one.when)}: w writes it, u takes it back"
    return say(_next(_taken(state, one, now), True), told)


def _taken(state: State, one: Kept, now: float) -> State:
    """The kept work in the session, as one edit."""
    state = at(without_job(state), writing=None)
    edit = whole(state.session.history.text, one.text, f"work kept {clock(one.when)} taken")
    session = apply(state.session, edit, now)
    first = not state.session.history.text
    state = changed(state, session)
    if first:
        state = to_sheet(state, lines(session)[1])
    return replace(state, care=replace(state.care, taken=(*state.care.taken, one)))


def _next(state: State, taken: bool) -> State:
    """The next work that waits; else what an opening shows, where there is no text, or one with faults was taken."""
    if state.care.kept:
        return ask(state)
    session = state.session
    empty = not session.exists and not session.history.text
    return begun(state) if empty or (taken and session.problems) else state
