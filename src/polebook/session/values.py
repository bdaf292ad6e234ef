"""Single keys of the open file: typed, taken out, stepped."""

from __future__ import annotations

from dataclasses import replace

from polebook.chain import edits, kind_edits, ladder_edits, note_edits, stage_edits, steps
from polebook.chain.located import PathRefused, stages
from polebook.chain.paths import locate
from polebook.chain.said import change, raw_text, said, short
from polebook.chain.stage_edits import position
from polebook.session.opened import Session, apply
from polebook.session.sheets import choices_at, content_of, stage_sheets
from polebook.text.edit import Edit


def set_value(session: Session, path: str, typed: str, now: float) -> Session:
    """The session with the key at `path` ("Q1.rc") set as typed; an empty text takes an optional key out.

    A stage's name and kind are changed with all that hangs on them, and a text that stands already changes nothing.
    Raises ProblemsFound with the reason.
    """
    text, file = session.history.text, session.path
    data, spans = content_of(text)
    typed = typed.strip()
    if edit := _whole_stage(text, file, path, typed):
        return apply(session, edit, now)
    if path.endswith("note") and "\n" in typed:
        sheet = path.removesuffix("note").removesuffix(".") or "file"
        return apply(session, note_edits.set_note(text, file, sheet, typed)[0], now)
    if ".arms." in path and (edit := ladder_edits.arm(text, file, path, typed)) is not None:
        return apply(session, edit, now)
    if not data:
        return apply(session, edits.set_value(text, file, path, typed)[0], now)
    found = locate(path, data)
    before = raw_text(data, spans, found.path)
    if typed == before:
        return session
    if typed:
        edit = edits.set_value(text, file, path, typed)[0]
    elif found.param and found.param.required:
        raise PathRefused(f"{said(path)} can't be taken out", f"it is required: {found.param.about}",
                          f"type another value; it is {short(before)}")
    else:
        edit = edits.unset(text, file, path)[0]
    return apply(session, replace(edit, label=change(path, before, typed)), now)


def _whole_stage(text: str, file: str, path: str, typed: str) -> Edit | None:
    """The edit of a name or kind that a stage has already; None for any other key."""
    owner, _, key = path.partition(".")
    if key not in ("name", "kind") or not typed:
        return None
    data, _ = content_of(text)
    if owner not in stage_sheets(data):
        return None
    before = stages(data)[position(owner, data)].get(key)
    if not isinstance(before, str) or typed == before:
        return None
    make = stage_edits.rename if key == "name" else kind_edits.change_kind
    return make(text, file, owner, typed)[0]


def step(session: Session, path: str, direction: int, now: float) -> Session:
    """The session with the key at `path` stepped: +1 or -1 to the next value, +10 or -10 by a decade.

    Steps of one key that follow each other within a second are one step of undo. Raises ProblemsFound.
    """
    text, file = session.history.text, session.path
    data, _ = content_of(text)
    choices = choices_at(data, path)
    if path.endswith(".kind") and choices:
        here = raw_text(data, content_of(text)[1], locate(path, data).path)
        word = steps.chosen(here, choices, direction)
        return apply(session, kind_edits.change_kind(text, file, path.partition(".")[0], word)[0], now)
    edit = steps.step(text, file, path, direction, choices)
    run = f"step {path}"
    label = ""
    if session.history.joins(run, now):
        begun, begun_spans = content_of(session.history.before_last())
        after, after_spans = content_of(edit.apply(text))
        label = change(path, raw_text(begun, begun_spans, locate(path, begun).path),
                       raw_text(after, after_spans, locate(path, after).path))
    return apply(session, edit, now, run, label)
