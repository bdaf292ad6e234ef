"""The choice what becomes of a text that another hand has put in the file's place, and what differs, line by line."""

from __future__ import annotations

from dataclasses import replace

from polebook.problem import printable
from polebook.session.watch import Look
from polebook.tui.control import difference
from polebook.tui.control.base import at, told
from polebook.tui.view import Choice, Overlay, State


def question(state: State, writes: bool = False) -> State:
    """The state with the choice what becomes of the other hand's text. `writes`: the file is to be written."""
    look = state.care.theirs
    if look is None:
        return state
    keep = Choice("mine", "write mine over it", "what was written there meanwhile is lost") if writes else \
        Choice("mine", "keep mine", "the disk stays as it is until w writes this over it")
    stay = Choice("stay", "do nothing now")
    title, refusal = "the file has changed on the disk since it was read", ""
    choices: tuple[Choice, ...] = (
        Choice("read", "read it again", "what is here becomes one edit back: u brings it back"), keep,
        Choice("both", "see both", "what differs, line by line"))
    if look.identity is None:
        title = "the file has gone from the disk"
        choices = (Choice("mine", "write it anew", "with what stands here"), stay)
    elif look.text is None:
        title = "on the disk there is something else in its place"
        refusal = told(look.problem) if look.problem is not None else ""
        choices = (keep, stay)
    return at(state, overlay=Overlay("changed", title, choices, refusal=printable(refusal),
                                     about="write" if writes else ""), field=None)


def both(state: State, overlay: Overlay) -> State:
    """The state with what differs between here and the disk."""
    look = state.care.theirs
    theirs = "" if look is None or look.text is None else look.text
    text = difference.lines(state.session.history.text, theirs)
    title = "what differs: - here, + on the disk"
    return at(state, overlay=Overlay("difference", title, text=text, about=overlay.about))


def care(state: State, look: Look | None, asked: bool = False) -> State:
    """The state with that yet to be decided on, or with nothing."""
    return replace(state, care=replace(state.care, theirs=look, asked=asked))
