"""The text page: the file as text, faults by line, undo within it; leaving it is one edit."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import replace

from polebook.chain.paths import PathRefused, locate
from polebook.session.opened import whole
from polebook.session.sheets import content_of
from polebook.session.state import Session, keys_of, sheets_of
from polebook.text.edit import Edit, Splice
from polebook.text.history import History
from polebook.text.toml import LARGEST
from polebook.tui import keys
from polebook.tui.control import leaving
from polebook.tui.control import writing_find as finding
from polebook.tui.control import writing_text as places
from polebook.tui.control.base import Done, at, changed, done, focused, refuse, say, sheet, to_path
from polebook.tui.control.writing_judged import judged, session_of, taken_in, without_job
from polebook.tui.view import State, Writing
from polebook.tui.written import character_of, path_at
from polebook.tui.written import places as fault_places

_ENDS = re.compile(r"\r\n|\r|\n")
_NEW_LINE = ("enter", "ctrl+j", "shift+enter")


def edit(state: State) -> Done:
    """The file as text, open at its first fault, else at the focused key."""
    session = state.session
    text = session.history.text
    begin = next(iter(fault_places(text, session.problems)), None)
    cursor = places.held(text, _of_key(state) if begin is None else begin)
    writing = Writing(History(text, session.history.disk), session, session.good, cursor)
    return done(at(state, writing=writing, field=None, overlay=None))


def _of_key(state: State) -> int:
    """The character where the value of the focused key begins, else what holds it; 0 where nothing does."""
    text = state.session.history.text
    data, spans = content_of(text)
    row = focused(state)
    try:
        path = locate(row.path if row is not None else sheet(state), data).path
    except PathRefused:
        return 0
    found = character_of(text, spans.place(path, ""))
    value = spans.value(path)
    if value is None or found is None:
        return found or 0
    opening = text[value.start : value.start + 3]
    return found + (3 if opening in ('"""', "'''") else opening[:1] in ("'", '"'))


def press(state: State, writing: Writing, key: str, character: str | None, now: float) -> Done:
    """A key on the text page: text, until Esc."""
    writing = replace(writing, cursor=places.held(writing.history.text, writing.cursor))
    if writing.find is not None:
        writing, its = finding.press(writing, key, character)
        if its:
            return done(at(state, writing=writing))
    if key in _OWN:
        return _OWN[key](at(state, writing=writing), writing, now)
    text, cursor = writing.history.text, writing.cursor
    if added := keys.printing(key, character):
        return _edited(state, writing, cursor, cursor, added, "type", now)
    if key in _NEW_LINE:
        after, outcome = _edited(state, writing, cursor, cursor, state.session.newline, "type", now)
        return _run_ended(after), outcome
    if (taken := places.taken(text, cursor, key)) is not None:
        return _edited(state, writing, *taken, "", key, now)
    if (to := places.moved(text, cursor, writing.column, key)) is not None:
        return done(at(state, writing=replace(writing, cursor=to[0], column=to[1], run=writing.run + 1)))
    return done(at(state, writing=writing))


def paste(state: State, writing: Writing, text: str, now: float) -> Done:
    """Pasted text, its line ends as the file has them."""
    if writing.find is not None:
        return done(at(state, writing=finding.paste(writing, text)))
    cursor = places.held(writing.history.text, writing.cursor)
    added = state.session.newline.join(_ENDS.split(text.encode("utf-8", "ignore").decode("utf-8")))
    if len(writing.history.text) + len(added) > LARGEST:
        return refuse(state, f"the paste has {len(added)} characters: the file would be over 512 KiB",
                      "paste less of it")
    return _edited(state, writing, cursor, cursor, added, "", now)


def _edited(state: State, writing: Writing, start: int, end: int, added: str, run: str, now: float) -> Done:
    """The text with `added` in the place of its characters from start to end; edits of one run are one step."""
    history = writing.history
    step = Edit.of([Splice(start, history.text[start:end], added)])
    after = history.apply(step, now, f"{run} {writing.run}" if run else "")
    moved = replace(writing, history=after, cursor=start + len(added), column=None)
    return done(at(state, writing=moved) if after is history else judged(state, moved))


def _run_ended(state: State) -> State:
    writing = state.view.writing
    return state if writing is None else at(state, writing=replace(writing, run=writing.run + 1))


def _undo(state: State, writing: Writing, now: float) -> Done:
    past = writing.history.past
    if not past:
        return say(state, "nothing to take back: the text is as the page was opened with it")
    return _stepped(state, writing, writing.history.undo(), past[-1].edit.inverse())


def _redo(state: State, writing: Writing, now: float) -> Done:
    future = writing.history.future
    if not future:
        return say(state, "nothing was taken back that could be done again")
    return _stepped(state, writing, writing.history.redo(), future[-1].edit)


def _stepped(state: State, writing: Writing, history: History, step: Edit) -> Done:
    """The text after a step back or on, the cursor behind what it put in last."""
    *before, last = step.splices
    cursor = last.start + len(last.inserted) + sum(len(one.inserted) - len(one.removed) for one in before)
    return done(judged(state, replace(
        writing, history=history, cursor=cursor, column=None, run=writing.run + 1)))


def _as_begun(state: State, writing: Writing, now: float) -> Done:
    """The text that the page was opened with, as one more step: nothing is lost by it."""
    begun = writing.history
    while begun.past:
        begun = begun.undo()
    step = whole(writing.history.text, begun.text, "")
    if not step:
        return say(state, "nothing was written: the text is as the page was opened with it")
    history = writing.history.apply(step, now)
    cursor = places.held(history.text, step.splices[0].start)
    after = judged(state, replace(writing, history=history, cursor=cursor, column=None, run=writing.run + 1))
    return say(after, "as the page was opened; ctrl+u brings back what was written")


def _fault(by: int) -> Callable[[State, Writing, float], Done]:
    """To the fault after or before the cursor; from the last to the first."""
    def work(state: State, writing: Writing, now: float) -> Done:
        faults = writing.after.problems
        found = fault_places(writing.history.text, faults)
        if not found:
            return say(state, "no faults" if not faults else "no fault stands on a line of its own")
        here = [at > writing.cursor if by > 0 else at < writing.cursor for at in found]
        number = (here.index(True) if by > 0 else len(found) - 1 - here[::-1].index(True)) if any(here) else \
            0 if by > 0 else len(found) - 1
        return say(at(state, writing=replace(
            writing, cursor=places.held(writing.history.text, found[number]), column=None, run=writing.run + 1)), "")
    return work


def _find(state: State, writing: Writing, now: float) -> Done:
    return done(at(state, writing=replace(writing, find="")))


def _write(state: State, writing: Writing, now: float) -> Done:
    """The file written, the page open still; closed only for the question what becomes of another hand's changes."""
    after, outcome = leaving.write(replace(without_job(state), session=session_of(state, writing)))
    if after.view.overlay is not None:
        return at(after, writing=None), outcome
    session = after.session
    return at(after, writing=replace(
        writing, after=session, history=writing.history.marked(session.history.disk))), outcome


def _leave(state: State, writing: Writing, now: float) -> Done:
    """The page closed, what was written taken in as one edit; the key under the cursor is the focused one."""
    session = session_of(state, writing)
    go = _under(state, session, writing)
    closed = at(without_job(state), writing=None)
    faults = len(session.problems)
    count = f"{faults} fault{'s' if faults > 1 else ''}"
    if session.history.text == state.session.history.text:
        told = f"{count}: e comes back to the text" if faults else ""
        return say(to_path(closed, go) if go else closed, told, bad=bool(faults))
    if not faults:
        return done(changed(closed, session, "text edited", go))
    after = changed(closed, session, go=go)
    if not content_of(session.history.text)[0]:  # its stages are hidden, not gone: the selected line is kept for them
        after = at(after, line=state.view.line, key=state.view.key)
    return say(after, f"text edited, {count} in it: u takes it back, e mends it", bad=True)


def _under(state: State, session: Session, writing: Writing) -> str:
    """The path under the cursor where a sheet shows it and it is not the focused key; "" else."""
    path, row = path_at(writing.history.text, writing.cursor), focused(state)
    known = [*sheets_of(session), *(one.key for one in keys_of(session, "file"))]
    shown = any(path == name or path.startswith(f"{name}.") for name in known)
    return path if shown and (row is None or path != row.path) else ""


_OWN: Mapping[str, Callable[[State, Writing, float], Done]] = {
    "escape": _leave,
    "ctrl+c": _leave,
    "ctrl+u": _undo,
    "ctrl+y": _redo,
    "ctrl+g": _as_begun,
    "ctrl+n": _fault(1),
    "ctrl+p": _fault(-1),
    "ctrl+f": _find,
    "ctrl+s": _write,
}
__all__ = ["edit", "paste", "press", "taken_in"]
