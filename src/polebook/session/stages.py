"""Whole stages, notes and cards of the open file: each function makes one edit, one step of undo.

All raise ProblemsFound with the reason where the edit is refused; the session then stays as it is.
"""

from __future__ import annotations

from dataclasses import replace

from polebook.chain import kind_edits, note_edits, stage_edits, take
from polebook.problem import printable
from polebook.session.opened import Session, apply
from polebook.text import files


def add_stage(session: Session, after_name: str, kind: str, now: float) -> Session:
    """A new stage behind the stage `after_name` ("source": the first; "load": the last), biased for the rail.

    kind may carry the family of its device: "common-source:mosfet".
    """
    return apply(session, stage_edits.add(session.history.text, session.path, after_name, kind)[0], now)


def copy_stage(session: Session, name: str, now: float) -> Session:
    """The stage once more, right behind itself and under a new name."""
    return apply(session, stage_edits.copy(session.history.text, session.path, name)[0], now)


def remove_stage(session: Session, name: str, now: float) -> Session:
    """The stage taken out, with its comments."""
    return apply(session, stage_edits.remove(session.history.text, session.path, name)[0], now)


def move_stage(session: Session, name: str, direction: int, now: float) -> Session:
    """The stage in the place of its neighbour: -1 towards the source, +1 towards the load."""
    return apply(session, stage_edits.move(session.history.text, session.path, name, direction)[0], now)


def rename_stage(session: Session, name: str, new: str, now: float) -> Session:
    """The stage under a new name, what refers to it with it."""
    return apply(session, stage_edits.rename(session.history.text, session.path, name, new)[0], now)


def change_kind(session: Session, name: str, kind: str, now: float) -> Session:
    """The stage as one of another kind, with every key that fits it."""
    return apply(session, kind_edits.change_kind(session.history.text, session.path, name, kind)[0], now)


def toggle_left_out(session: Session, name: str, now: float) -> Session:
    """The stage left out, or in again."""
    return apply(session, stage_edits.toggle_left_out(session.history.text, session.path, name)[0], now)


def set_note(session: Session, sheet: str, text: str, now: float) -> Session:
    """The note of a sheet that may carry one ("Q1", "target", "device.D", "file"); an empty text takes it out."""
    return apply(session, note_edits.set_note(session.history.text, session.path, sheet, text)[0], now)


def take_card(session: Session, name: str, other: str, now: float) -> Session:
    """The card `name` of the chain file at the path `other`, taken over."""
    theirs = files.read(other).text
    edit, _ = take.take_card(session.history.text, session.path, name, theirs, other)
    return apply(session, replace(edit, label=f"card {printable(name)} taken from {printable(other)}"), now)
