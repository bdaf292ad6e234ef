"""Cautions and problems in a list; Enter goes to what a row is about."""

from __future__ import annotations

from collections.abc import Mapping

from polebook.problem import Place, Problem, printable
from polebook.session.sheets import content_of
from polebook.session.state import Session, sheets_of
from polebook.text.spans import Path
from polebook.tui.control.base import Done, at, done, say, to_path
from polebook.tui.view import Choice, Overlay, State


def show(state: State) -> Done:
    """The list of them."""
    found = rows(state.session)
    if not found:
        return say(state, "no cautions, no problems")
    faults = len(state.session.problems)
    cautions = len(found) - faults
    words = [f"{count} {word}{'s' if count > 1 else ''}" for count, word in ((faults, "fault"), (cautions, "caution"))
             if count]
    return done(at(state, overlay=Overlay("cautions", ", ".join(words), tuple(found)), field=None))


def rows(session: Session) -> list[Choice]:
    """Faults first, then cautions: value the path that it is about, label what, about why and how to mend it."""
    problems = [*session.problems, *(session.ledger.cautions if session.ledger is not None else ())]
    paths = _paths(session)
    return [Choice(_path(problem.place, paths), printable(problem.what), _about(problem)) for problem in problems]


def go(state: State, path: str) -> Done:
    """To the key or sheet that a row is about."""
    state = at(state, overlay=None)
    if not path:
        return say(state, "this one is about no single key; e opens the file as text")
    return say(to_path(state, path), "")


def _about(problem: Problem) -> str:
    line = f"line {problem.place.line}: " if problem.place is not None and problem.place.line else ""
    return printable(f"{line}{problem.why}; {problem.fix}")


def _path(place: Place | None, paths: Mapping[int, list[tuple[int, str]]]) -> str:
    """The path that stands at a place: the last one of its line that begins at or before it."""
    found = paths.get(place.line, []) if place is not None else []
    before = [path for column, path in found if place is not None and column <= max(place.column, 1)]
    return before[-1] if before else found[0][1] if found else ""


def _paths(session: Session) -> dict[int, list[tuple[int, str]]]:
    """Line of the file -> (column, path) of the headers and keys that begin on it."""
    _, spans = content_of(session.history.text)
    names = sheets_of(session)
    stages = names[1 : names.index("load")]
    begins = [(header.path, header.span) for header in spans.headers.values()]
    begins += [(entry.path, entry.key) for entry in spans.entries.values()]
    found: dict[int, list[tuple[int, str]]] = {}
    for path, span in begins:
        place = spans.at(span, session.path)
        found.setdefault(place.line, []).append((place.column, _words(path, stages)))
    return {line: sorted(row) for line, row in found.items()}


def _words(path: Path, stages: list[str]) -> str:
    """A path of the text as the sheets have it: ("stage", 0, "rc") is "Q1.rc"."""
    steps = [str(step + 1) if isinstance(step, int) else step for step in path]
    if path[0] == "stage" and len(path) > 1 and isinstance(path[1], int) and path[1] < len(stages):
        steps[:2] = [stages[path[1]]]
    return ".".join(steps)
