"""What a text that is being written comes to: judged in the keystroke where that is quick, else once no key comes."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from polebook.book.ledger import Ledger
from polebook.session.opened import as_on_disk
from polebook.session.state import Session, set_text
from polebook.tui.control import jobs
from polebook.tui.control.base import at
from polebook.tui.view import Job, State, Takes, Writing

QUICK_CHARACTERS, QUICK_STAGES = 6000, 16  # up to here a text is judged in the keystroke
PAUSE_S = 0.12  # without a key, before a longer one is


def judged(state: State, writing: Writing) -> State:
    """The state with a changed text on its page, and what it comes to, now or in the background."""
    session, text, good = state.session, writing.history.text, writing.after.good
    if writing.judged or text == session.history.text or _quick(text):
        after = writing.after if writing.judged else _after(session, text, good)
        return at(without_job(state), writing=replace(writing, after=after))
    job = Job("judging of the text", state.view.page, _work(session, text, good), _TAKES, rest=PAUSE_S)
    return jobs.begin(at(state, writing=writing), job)


def taken_in(state: State) -> State:
    """The state with the text page closed and what was written there in the session, as one edit."""
    writing = state.view.writing
    if writing is None:
        return state
    return replace(at(without_job(state), writing=None), session=session_of(state, writing))


def session_of(state: State, writing: Writing) -> Session:
    """The session with what is being written in it."""
    if writing.judged:
        return as_on_disk(writing.after, state.session)
    return _after(state.session, writing.history.text, writing.after.good)


def without_job(state: State) -> State:
    """The state without the judging of a text; other work goes on."""
    return jobs.stopped(state) if state.job is not None and state.job.takes is _TAKES else state


def _quick(text: str) -> bool:
    return len(text) <= QUICK_CHARACTERS and text.count("kind") <= QUICK_STAGES


def _after(session: Session, text: str, good: Ledger | None) -> Session:
    """The session with that text; where it has faults the last good figures are those that were seen last."""
    after = set_text(session, text, 0.0)
    return after if after is session or after.ledger is not None else replace(after, good=good)


def _work(session: Session, text: str, good: Ledger | None) -> Iterator[tuple[int, int, Session]]:
    yield 1, 1, _after(session, text, good)


def _taken(state: State, after: Session) -> State:
    """The state with a judgement, where it is that of the text as it is."""
    writing = state.view.writing
    if writing is None or writing.history.text != after.history.text:
        return state
    return at(state, writing=replace(writing, after=after))


_TAKES = Takes(_taken, lambda state, whole: state)
