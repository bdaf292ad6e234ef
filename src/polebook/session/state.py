"""The session's face: the open file, and every change that a user can make to it."""

from __future__ import annotations

from polebook.session.baselines import Against, SincePost, moved, posted, set_against, since, stands
from polebook.session.opened import (
    ChangedOnDisk,
    Session,
    agreed,
    apply,
    changed_on_disk,
    new_session,
    open_file,
    pin,
    redo,
    reload,
    reread,
    save,
    set_text,
    undo,
    unpin,
    whole,
)
from polebook.session.sheets import KeyRow, keys_of, sheets_of
from polebook.session.stages import (
    add_stage,
    change_kind,
    copy_stage,
    move_stage,
    remove_stage,
    rename_stage,
    set_note,
    take_card,
    toggle_left_out,
)
from polebook.session.values import set_value, step

__all__ = [
    "Against", "ChangedOnDisk", "KeyRow", "Session", "SincePost", "add_stage", "agreed", "apply", "change_kind",
    "changed_on_disk", "copy_stage", "keys_of", "move_stage", "moved", "new_session", "open_file", "pin", "posted",
    "redo", "reload", "remove_stage", "rename_stage", "reread", "save", "set_against", "set_note", "set_text",
    "set_value", "sheets_of", "since", "stands", "step", "take_card", "toggle_left_out", "undo", "unpin", "whole",
]
