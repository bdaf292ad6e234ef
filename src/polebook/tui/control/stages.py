"""Edits of whole stages: each key makes one edit, one step of undo."""

from __future__ import annotations

from collections.abc import Callable

from polebook.problem import printable
from polebook.session.state import (
    Session,
    copy_stage,
    keys_of,
    move_stage,
    redo,
    remove_stage,
    toggle_left_out,
    undo,
)
from polebook.tui.control import lists
from polebook.tui.control.base import Done, at, attempt, changed, done, line, lines, refuse, stage
from polebook.tui.view import Overlay, State


def _on_stage(state: State, verb: str, work: Callable[[str], Done]) -> Done:
    """`work` on the selected stage, or the word that source and load are none."""
    name = stage(state)
    if not name:
        return refuse(state, f"{line(state)} can't be {verb}: only a stage can", "← → choose one")
    return work(name)


def add(state: State) -> Done:
    """The list of kinds, to add one after the selected line."""
    after = line(state)
    where = "as the last" if after == "load" else f"after {printable(after)}"
    return lists.opened(state, Overlay("add", f"add a stage {where}", about=after), lists.kinds())


def copy(state: State, now: float) -> Done:
    return _on_stage(state, "copied", lambda name: _made(
        state, lambda: copy_stage(state.session, name, now), +1))


def remove(state: State, now: float) -> Done:
    return _on_stage(state, "removed", lambda name: attempt(
        state, lambda: remove_stage(state.session, name, now)))


def move(state: State, by: int, now: float) -> Done:
    return _on_stage(state, "moved", lambda name: attempt(
        state, lambda: move_stage(state.session, name, by, now), go=name))


def leave_out(state: State, now: float) -> Done:
    return _on_stage(state, "left out", lambda name: attempt(
        state, lambda: toggle_left_out(state.session, name, now)))


def kind(state: State) -> Done:
    """The list of kinds, to change the selected stage's."""
    def opened(name: str) -> Done:
        row = next((row for row in keys_of(state.session, name) if row.key == "kind"), None)
        return lists.choices(state, row) if row is not None else refuse(state, f"{name} has no kind")

    return _on_stage(state, "changed", opened)


def rename(state: State) -> Done:
    """A line to type the selected stage's new name in."""
    def opened(name: str) -> Done:
        shown = "" if name.startswith("#") else name
        return done(at(state, overlay=Overlay(
            "rename", f"rename {printable(name)}", typed=shown, cursor=len(shown), about=name), field=None))

    return _on_stage(state, "renamed", opened)


def _made(state: State, work: Callable[[], Session], by: int) -> Done:
    """An edit that makes a stage, which is then selected: `by` lines further on."""
    after, outcome = attempt(state, work)
    if after.session is state.session:
        return after, outcome
    names = lines(after.session)
    return done(at(after, line=min(max(state.view.line + by, 0), len(names) - 1), key=0))


def added(state: State, after: str, work: Callable[[], Session]) -> Done:
    """The state with a stage added behind the line `after`, and selected."""
    names = lines(state.session)
    state = at(state, line=len(names) - 2 if after == "load" else names.index(after), sheet="")
    return _made(state, work, +1)


def back(state: State, now: float) -> Done:
    """Undo."""
    session, label = undo(state.session)
    if not label and session is state.session:
        return refuse(state, "nothing to undo", "this is the file as it was opened")
    return done(changed(state, session, f"undone: {label}"))


def forth(state: State, now: float) -> Done:
    """Redo."""
    session, label = redo(state.session)
    if not label and session is state.session:
        return refuse(state, "nothing to redo", "u undoes")
    return done(changed(state, session, f"done again: {label}"))
