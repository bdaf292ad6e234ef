"""A plan sought in the background for the text as it is: begun, told so far, ended or stopped with what there is."""

from __future__ import annotations

from collections.abc import Callable, Generator
from dataclasses import replace
from threading import Event
from typing import Any

from polebook.report.apportion_words import moved
from polebook.tui.apportions import Asked, Going, Row, Run, asked, chosen, holds, known, rows, standing
from polebook.tui.control import jobs
from polebook.tui.control.base import Done, at, refuse, say, to_path
from polebook.tui.view import Job, State, Takes


def begin(state: State) -> Done:
    """A run for what is asked. What was shown stays until there is something else."""
    session, here = state.session, state.view.apportion
    if session.chain is None:
        return refuse(state, "there is no chain to plan for", "! tells what is wrong with the file")
    if not known(state).handles:
        return refuse(state, "no part is soldered in", "Tab, then Space on a key of the sheet lets it change")
    if not chosen(state):
        return refuse(state, "no key may change", "Space lets that of the row, / those of its stage, * all")
    if not session.chain.has_targets and not here.favour:
        return refuse(state, "a plan has to know what to reach", "t sets targets, v favours a figure")
    what, text, halt = asked(state), session.history.text, Event()
    work = _steps(what, text, session.path, halt)
    state = jobs.begin(state, Job("apportioning", "apportion", work, Takes(_piece, _ended(work)), halt=halt.set))
    targets = tuple(session.ledger.targets) if session.ledger is not None else ()
    return say(_with(state, going=Going(what, text, targets)), "")


def _steps(what: Asked, text: str, file: str, halt: Event) -> Generator[tuple[int, int, Any], None, None]:
    from polebook.tui.apportion_apart import sought  # deferred: with the engine 40 ms that the first paint does without

    yield from sought(what, text, file, halt)


def _piece(state: State, piece: Any) -> State:
    from polebook.tui.apportion_work import reached_of, run_of  # deferred as above

    going = state.view.apportion.going
    if going is None or piece is None:
        return state
    if "reached" in piece:
        return _with(state, going=replace(going, reached=reached_of(piece), begun=True))
    return _shown(state, run_of(piece, going.asked, going.text))


def _shown(state: State, run: Run) -> State:
    """The state with that plan, at the first key that it moves where its user looks on and does nothing else."""
    state = _with(state, run=run)
    view = state.view
    looks = (view.page, view.focus, view.overlay, view.field, view.writing) == ("apportion", "page", None, None, None)
    first = next(iter(rows(state)), None)
    return to_row(state, first) if looks and first is not None and first.key is not None else state


def to_row(state: State, row: Row) -> State:
    """The state at a row, its key in sight on its sheet."""
    return at(to_path(_with(state, row=row.path), row.path), focus=state.view.focus)


def _ended(work: Generator[Any, None, None]) -> Callable[[State, bool], State]:
    """What it has come to as a message; what is given up is ended in the other process too."""
    def message(state: State, whole: bool) -> State:
        work.close()
        state = _with(state, going=None)
        run = state.view.apportion.run
        if not whole or run is None:
            return at(state, message="apportioning stopped", bad=False)
        return at(state, message=_summary(state, run), bad=False)

    return message


def _summary(state: State, run: Run) -> str:
    trials, starts, values = run.told["trials"], run.told["starts"], moved(run.told)
    text = f"{'stopped: ' if run.told['stopped'] else ''}{trials} trial{'s' * (trials != 1)}" + (
        f" from {starts} start{'s' * (starts != 1)}" if starts else "")
    if standing(state) != "fresh":
        return f"{text}, of before the edit: s runs it again"
    if not holds(state):
        return f"{text}, for what was asked before: s runs it again"
    return f"{text}: Enter puts {values} in as one edit" if values else f"{text}: no value moves"


def _with(state: State, **changed: Any) -> State:
    return at(state, apportion=replace(state.view.apportion, **changed))
