"""A new chain where there is no file yet: kinds from source to load, then rail, source and load."""

from __future__ import annotations

from dataclasses import replace
from os.path import basename

from polebook.chain import start
from polebook.problem import ProblemsFound, printable
from polebook.quantity import Refused, engineering, letter, parse
from polebook.session.state import new_session
from polebook.tui import keys
from polebook.tui.control import lists
from polebook.tui.control.base import Done, Outcome, at, done, lines, reason, say, to_sheet
from polebook.tui.control.typing import insert, one_line, typed
from polebook.tui.view import Choice, Overlay, State

_ROWS = (
    ("rail", "voltage", "positive rail in V"),
    ("negative", "voltage", "negative rail in V, with its sign; 0 for none"),
    ("source", "resistance", "resistance of the source"),
    ("load", "resistance", "resistance of the load"),
)
_READY = "enough"


def kinds(state: State, picked: tuple[str, ...] = ()) -> State:
    """The list of kinds, with those chosen so far in its title."""
    title = f"new chain {printable(basename(state.session.path))}: its first stage?"
    if picked:
        title = f"new chain: source > {' > '.join(picked)} > next stage?"
    overlay = Overlay("new", title, about=" ".join(picked))
    return lists.opened(state, overlay, rows(picked))[0]


def rows(picked: tuple[str, ...]) -> list[Choice]:
    """The kinds; first what ends the choosing."""
    if picked:
        ready = Choice(_READY, "that is the chain", "go on to rail, source and load")
    else:
        ready = Choice(_READY, "a ready pair", " and ".join(start.DEFAULT))
    return [ready, *lists.kinds()]


def picked(overlay: Overlay) -> tuple[str, ...]:
    return tuple(overlay.about.split())


def chosen(state: State, overlay: Overlay, value: str) -> Done:
    """One more stage, or on to the form."""
    so_far = picked(overlay)
    if value != _READY:
        return done(kinds(state, (*so_far, value)))
    so_far = so_far or start.DEFAULT
    rail = start.default_rail(start.wanted(so_far))
    ohms = start.DIODE_OHM if so_far[0] == "transimpedance" else start.SOURCE_OHM
    values = (f"{rail:g}", "0", letter(ohms, "resistance"), letter(start.LOAD_OHM, "resistance"))
    form = (*(Choice(name, text, about) for (name, _, about), text in zip(_ROWS, values, strict=True)),
            Choice("make", "", "make the chain"))
    last = len(form) - 1
    return done(at(state, overlay=Overlay("start", f"new chain: source > {' > '.join(so_far)} > load", form,
                                          about=" ".join(so_far), row=last)))


def press(state: State, overlay: Overlay, key: str, character: str | None) -> Done:
    """A key in the form: each row is a line of text, the last one makes the chain."""
    last = len(overlay.choices) - 1
    if key in ("escape", "ctrl+c"):
        return done(kinds(state, picked(overlay)))
    if key in ("up", "down", "tab", "shift+tab") or (key == "enter" and overlay.row < last):
        by = -1 if key in ("up", "shift+tab") else 1
        return done(at(state, overlay=_row(overlay, min(max(overlay.row + by, 0), last))))
    if key == "enter":
        return _made(state, overlay)
    if overlay.row == last:
        return done(state)
    text, cursor = _begun(overlay, bool(keys.printing(key, character)))
    found = typed(text, cursor, key, character)
    return done(state if found is None else at(state, overlay=_with(overlay, *found)))


def paste(overlay: Overlay, text: str) -> Overlay:
    if overlay.row == len(overlay.choices) - 1:
        return overlay
    return _with(overlay, *insert(*_begun(overlay, True), one_line(text)))


def _begun(overlay: Overlay, types: bool) -> tuple[str, int]:
    """Text and cursor of the row: what is typed first takes the place of its text, as on a sheet."""
    if overlay.typed or types:
        return overlay.typed, overlay.cursor
    text = overlay.choices[overlay.row].label
    return text, len(text)


def _with(overlay: Overlay, text: str, cursor: int) -> Overlay:
    """The form with another text in its row."""
    form = list(overlay.choices)
    form[overlay.row] = replace(form[overlay.row], label=text)
    return replace(overlay, choices=tuple(form), typed=text, cursor=cursor, refusal="")


def _row(overlay: Overlay, row: int) -> Overlay:
    return replace(overlay, row=row, typed="", cursor=0)


def _made(state: State, overlay: Overlay) -> Done:
    """The chain, or the row that is refused with the reason."""
    values = {}
    for at_row, (name, dimension, _) in enumerate(_ROWS):
        try:
            values[name] = parse(overlay.choices[at_row].label, dimension)
        except Refused as refused:
            told = f"{refused.what}: {refused.why}; {refused.fix}"
            return done(at(state, overlay=replace(_row(overlay, at_row), refusal=told)))
    try:
        text = start.new_chain(picked(overlay), **values)
    except ProblemsFound as found:
        return done(at(state, overlay=replace(overlay, refusal=reason(found))))
    session = new_session(state.session.path, text)
    made = replace(state, session=session)
    made = to_sheet(made, lines(session)[1])
    rail = engineering(values["rail"], "V")
    return say(made, f"{len(picked(overlay))} stages, biased for {rail}; w writes the file")


def given_up(state: State) -> Done:
    """Nothing is made."""
    return state, Outcome.QUIT
