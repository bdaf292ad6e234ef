"""A key press on the state: the one way in. Pure but for writing and reading files, which some keys are there for."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from polebook.session.state import pin, stands, unpin
from polebook.tui import keys
from polebook.tui.control import (
    cautions,
    fields,
    help,
    history,
    leaving,
    lists,
    moving,
    notes,
    overlays,
    pages,
    stages,
    working,
    writing,
)
from polebook.tui.control.base import Done, Outcome, Work, at, done, refuse, say, stepping, still
from polebook.tui.control.typing import one_line
from polebook.tui.view import Overlay, State

VALUE_S = 1.0  # a letter this soon after a digit belongs to a value
_IN_VALUES = frozenset("fpnuµmkKMGTRF")


def press(state: State, key: str, character: str | None, now: float) -> Done:
    """The state after a key, and what the shell must do.

    key and character are Textual's: a name ("enter", "ctrl+c", "u"), and the character that it prints, or None.
    now is in seconds, of a clock that never goes back.
    """
    state = at(state, message="", bad=False)
    if key in _EVERYWHERE:
        return state, _EVERYWHERE[key]
    if key == "ctrl+q":
        return leaving.leave(state)
    if state.view.overlay is not None:
        return overlays.press(state, state.view.overlay, key, character, now)
    if state.view.field is not None:
        return fields.press(state, key, character, now)
    if state.view.writing is not None:
        return writing.press(state, state.view.writing, key, character, now)
    text = keys.printing(key, character)
    if text and (begun := _begins(state, text, now)) is not None:
        return begun
    action = keys.ACTIONS.get(keys.name_of(key, character))
    if action is None:
        return refuse(state, f"no key does that: {text}", "? shows every key") if text else done(state)
    if text != ".":  # which moves a figure or a cursor at most: 2.2k may still be meant
        state = at(state, digit_at=float("-inf"))
    return (pages.own(state, action) or _WORK[action])(state, now)


def paste(state: State, text: str, now: float) -> Done:
    """Pasted text: into what is open, or as the focused key's value where it begins like one."""
    state = at(state, message="", bad=False)
    if state.view.overlay is not None:
        return overlays.paste(state, state.view.overlay, text)
    if state.view.field is not None:
        return fields.paste(state, state.view.field, text)
    if state.view.writing is not None:
        return writing.paste(state, state.view.writing, text, now)
    line = one_line(text)
    if state.view.focus == "sheet" and line and (fields.opens(state, line[0]) or line[0] in "+-"):
        return fields.start(state, line)
    return refuse(state, "there is no field to paste into", "Enter opens one")


def _begins(state: State, text: str, now: float) -> Done | None:
    """What a character does as part of a value; None where it is a command."""
    if state.view.focus == "sheet":
        return fields.start(state, text) if fields.opens(state, text) else None
    if text.isdecimal():
        return moving.page(state, text, now)
    if text in _IN_VALUES and 0.0 <= now - state.view.digit_at <= VALUE_S:
        return refuse(at(state, digit_at=now), f"{text} after a digit reads like a value",
                      "Tab goes to the sheet, where values are typed")
    return None


def _pin(state: State, now: float) -> Done:
    if stands(state.session):
        against = state.session.against
        told = "unpinned" if against is None else f"{against.name} is the baseline no more; p pins today's figures"
        return say(replace(state, session=unpin(state.session)), told)
    if state.session.ledger is None:
        return refuse(state, "there are no figures to pin", "! tells what is wrong with the file")
    return say(replace(state, session=pin(state.session)), "pinned: figures that move from here on show by how much")


def _act(state: State, now: float) -> Done:
    return fields.start(state) if state.view.focus == "sheet" else moving.act_on_page(state)


def _band(state: State, now: float) -> Done:
    upper = not state.view.upper
    return say(at(state, upper=upper, figure=0, row=0), f"{'upper' if upper else 'lower'} end of the band")


def _decibels(state: State, now: float) -> Done:
    return done(at(state, decibels=not state.view.decibels))


def _find(state: State, now: float) -> Done:
    return lists.opened(state, Overlay("find", "find a key"), lists.all_keys(state.session))


def _sheets(state: State, now: float) -> Done:
    found = lists.sheets(state.session)
    here = next((row for row, one in enumerate(found) if one.value and one.value == state.view.sheet), 0)
    return lists.opened(state, Overlay("sheets", "sheets"), found, here)


def _help(state: State, now: float) -> Done:
    return done(at(state, overlay=help.overlay(state)))


_EVERYWHERE = {"ctrl+z": Outcome.SUSPEND, "ctrl+l": Outcome.REPAINT}
_LAST = 10**6

_WORK: Mapping[str, Work] = {
    "page": lambda state, now: done(state),  # with the page focused a digit is one; with the sheet a value
    "page before": stepping(moving.turn, -1),
    "page after": stepping(moving.turn, 1),
    "line before": stepping(moving.step_line, -1),
    "line after": stepping(moving.step_line, 1),
    "first line": stepping(moving.select, 0),
    "last line": stepping(moving.select, _LAST),
    "row before": stepping(moving.step_row, -1),
    "row after": stepping(moving.step_row, 1),
    "figure before": stepping(moving.step_figure, -1),
    "figure after": stepping(moving.step_figure, 1),
    "focus": still(moving.focus),
    "back": still(moving.back),
    "find": _find,
    "act": _act,
    "step up": lambda state, now: fields.stepped(state, 1, now),
    "step down": lambda state, now: fields.stepped(state, -1, now),
    "decade up": lambda state, now: fields.stepped(state, 10, now),
    "decade down": lambda state, now: fields.stepped(state, -10, now),
    "take out": fields.take_out,
    "sheets": _sheets,
    "add": still(stages.add),
    "copy": stages.copy,
    "remove": stages.remove,
    "move back": lambda state, now: stages.move(state, -1, now),
    "move on": lambda state, now: stages.move(state, 1, now),
    "rename": still(stages.rename),
    "kind": still(stages.kind),
    "leave out": stages.leave_out,
    "note": still(notes.edit),
    "text": still(writing.edit),
    "choose": still(moving.no_choice),
    **dict.fromkeys(sorted(pages.PLOT), still(moving.no_plot)),
    "undo": stages.back,
    "redo": stages.forth,
    "write": still(leaving.write),
    "leave": still(leaving.leave),
    "suspend": lambda state, now: (state, Outcome.SUSPEND),
    "repaint": lambda state, now: (state, Outcome.REPAINT),
    "pin": _pin,
    "post": still(history.post),
    "benches": still(history.overlaid),
    "working": still(working.show),
    "decibels": _decibels,
    "band": _band,
    "cautions": still(cautions.show),
    "help": _help,
}
if set(_WORK) != set(keys.ACTIONS.values()):
    raise ValueError("a key of the table does nothing, or work has no key")
