"""What every key's work is made of: where the user stands, messages, and the state after an edit."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from enum import Enum, auto
from typing import Any

from polebook.book.compare import changes
from polebook.problem import Problem, ProblemsFound, printable
from polebook.quantity import DIMENSIONS
from polebook.report.figures import signed
from polebook.session.state import KeyRow, Session, keys_of, sheets_of
from polebook.tui.apportions import followed
from polebook.tui.view import State


class Outcome(Enum):
    """What only the shell can do."""

    NONE = auto()
    QUIT = auto()
    SUSPEND = auto()
    REPAINT = auto()


Done = tuple[State, Outcome]
Work = Callable[[State, float], Done]
"""What a key does at a time in seconds."""


def still(work: Callable[[State], Done]) -> Work:
    """Work that does not ask the time."""
    return lambda state, now: work(state)


def stepping(work: Callable[[State, int], Done], step: int) -> Work:
    """Work that goes a step one way or the other."""
    return lambda state, now: work(state, step)


def at(state: State, **changed: Any) -> State:
    """The state with the user elsewhere: fields of `View`."""
    return replace(state, view=replace(state.view, **changed))


def done(state: State) -> Done:
    return state, Outcome.NONE


def say(state: State, text: str, bad: bool = False) -> Done:
    """The state with a message."""
    return done(at(state, message=text, bad=bad))


def refuse(state: State, what: str, fix: str = "") -> Done:
    """The state with the message of something that can't be done, and how it can."""
    return say(state, f"{what}: {fix}" if fix else what, bad=True)


def told(problem: Problem) -> str:
    """A problem in one line: what, why, and how to mend it."""
    return "; ".join(part for part in (f"{problem.what}: {problem.why}" if problem.why else problem.what, problem.fix)
                     if part)


def reason(found: ProblemsFound) -> str:
    """Problems in one line: the first, and how many more there are."""
    first, *more = found.problems
    return told(first) + (f" (and {len(more)} more)" if more else "")


def lines(session: Session) -> list[str]:
    """The sheets of the lines: source, stages, load."""
    sheets = sheets_of(session)
    return sheets[: sheets.index("load") + 1]


def line(state: State) -> str:
    """The selected line."""
    names = lines(state.session)
    return names[min(max(state.view.line, 0), len(names) - 1)]


def stage(state: State) -> str:
    """The selected stage; "" where the source or the load is selected."""
    name = line(state)
    return "" if name in ("source", "load") else name


def sheet(state: State) -> str:
    """The sheet that is shown."""
    return state.view.sheet or line(state)


def rows(state: State) -> list[KeyRow]:
    """The keys of the sheet that is shown."""
    return keys_of(state.session, sheet(state))


def focused(state: State) -> KeyRow | None:
    """The focused key; None on a sheet without keys."""
    found = rows(state)
    return found[min(max(state.view.key, 0), len(found) - 1)] if found else None


def to_sheet(state: State, name: str, key: str = "") -> State:
    """The state with the sheet of that name shown and focused, at the key where it has it."""
    names = lines(state.session)
    state = at(state, line=names.index(name), sheet="") if name in names else at(state, sheet=name)
    found = rows(state)
    place = next((number for number, row in enumerate(found) if row.key == key), first_value(found))
    return at(state, focus="sheet", key=place, field=None, overlay=None, row=0)


def first_value(found: Sequence[KeyRow]) -> int:
    """The first key that holds a quantity, so that a value typed at once goes to one; else the first key."""
    held = [number for number, row in enumerate(found) if row.dimension in DIMENSIONS]
    return next((number for number in held if found[number].text), held[0] if held else 0)


def to_path(state: State, path: str) -> State:
    """The state at the key of a path: "Q1.rc", "target.upper", "device.D.beta", or at a sheet by its name."""
    names = sorted(sheets_of(state.session), key=len, reverse=True)
    for name in names:
        if path == name or path.startswith(f"{name}."):
            return to_sheet(state, name, path[len(name) + 1 :])
    return to_sheet(state, "file", path)


def changed(state: State, session: Session, said: str = "", go: str = "") -> State:
    """The state after an edit: the same line and key by name where they still stand, and what the edit moved.

    said  the message, else the edit's own label;  go  the line or sheet to show
    """
    if session is state.session:
        return state
    before, name, key = state.session, line(state), focused(state)
    if state.view.line >= len(lines(before)):  # a text that is no TOML hides its stages: the number is what is known
        name, key = "", None
    after = replace(state, session=session)
    names = lines(session)
    place = names.index(name) if name in names else min(state.view.line, len(names) - 1)
    shown = state.view.sheet if state.view.sheet in sheets_of(session) else ""
    after = at(after, line=place, sheet=shown, apportion=followed(after.view.apportion, before, session))
    if go:
        after = to_path(after, go)
    found = [row.key for row in rows(after)]
    if not go and key is not None and key.key in found:
        after = at(after, key=found.index(key.key))
    after = at(after, key=min(after.view.key, max(len(found) - 1, 0)))
    moved = moved_words(before, session)
    text = said or label(session)
    return at(after, message=f"{text}   {moved}" if moved else text, bad=session.ledger is None)


def label(session: Session) -> str:
    """What the last step did."""
    past = session.history.past
    return past[-1].edit.label if past else ""


def moved_words(before: Session, after: Session) -> str:
    """By how much gain and edges moved, or why there are no figures; "" where nothing did."""
    if after.ledger is None:
        return f"no figures: {printable(after.problems[0].what)}" if after.problems else ""
    if before.ledger is None:
        return ""
    moved = changes(before.ledger, after.ledger)
    words = []
    for figure, name, unit in (("gain_db", "gain", "dB"), ("lower_edge_hz", "lower", "Hz"),
                               ("upper_edge_hz", "upper", "Hz")):
        change = moved.overall(figure)
        if change is not None and change.moved and change.before is not None and change.after is not None:
            text = signed(change.after - change.before, unit)
            if text:
                prefix = text[-1] if text[-1].isalpha() else ""
                words.append(f"{name} {text.removesuffix(prefix)} {prefix}{unit}")
    return ", ".join(words)


def attempt(state: State, work: Callable[[], Session], said: str = "", go: str = "") -> Done:
    """The state after an edit, or the reason why it is refused."""
    try:
        session = work()
    except ProblemsFound as found:
        return say(state, reason(found), bad=True)
    return done(changed(state, session, said, go))
