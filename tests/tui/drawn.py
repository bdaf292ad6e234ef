"""Random states of the app for the drawing tests: random chains, edited and spoilt, and a user anywhere in them."""

from __future__ import annotations

import random
from dataclasses import replace

from polebook.problem import ProblemsFound
from polebook.session import state as sessions
from polebook.session.state import Session
from polebook.tui.lines import STYLES, Line, width
from polebook.tui.view import Choice, Field, Overlay, State, View
from tests.book.verdict_cases import CASES
from tests.fuzz_files import spoilt
from tests.helpers import DEMOS
from tests.session.random_edits import attempt, random_edit

WORDS = ("", "Q1", "4k7", "a b c", "üΩ漢字 wide", "\x1b[31mred", "x" * 200, "two\nlines\n\n", "\u202eback", "e\u0301")
PURPOSES = ("help", "working", "cautions", "find", "add", "kind", "card", "cards", "sheets", "leave", "new", "changed",
            "note", "rename", "take", "start", "choice")
FRIENDLY = sorted(path.read_text(encoding="utf-8") for path in DEMOS.glob("*.toml")) + sorted(CASES.values())


def random_session(rng: random.Random, number: int) -> Session:
    """A demo chain or a chain of the verdicts, edited at random; now and then with another text laid over it."""
    session = sessions.new_session("chains/some chain.toml", rng.choice(FRIENDLY))
    for at in range(rng.choice((0, 0, 1, 3, 8))):
        session = attempt(session, random_edit(session, rng)[1], float(at))
        if rng.random() < 0.2:
            session = sessions.pin(session)
    if rng.random() < 0.3:
        session = sessions.set_text(session, spoilt(7, number).decode("utf-8", "replace"), 99.0)
    return replace(session, read_only=rng.choice(("", "its folder is not yours")), exists=rng.random() < 0.7)


def random_view(rng: random.Random, session: Session) -> View:
    """A user anywhere, numbers out of range too."""
    sheets = sessions.sheets_of(session)
    sheet = rng.choice(("", "", *sheets, "nothing of the kind"))
    view = View(
        page=rng.choice(("ledger", "nodes")), line=rng.randrange(-1, 12), focus=rng.choice(("sheet", "page")),
        sheet=sheet, key=rng.randrange(-1, 60), figure=rng.randrange(-1, 9), row=rng.randrange(-1, 40),
        upper=rng.random() < 0.6, decibels=rng.random() < 0.6, message=rng.choice(WORDS), bad=rng.random() < 0.3,
    )
    if rng.random() < 0.3:
        keys = sessions.keys_of(session, rng.choice(sheets))
        path = rng.choice(keys).path if keys else "Q1.rc"
        return replace(view, field=Field(path, rng.choice(WORDS), rng.randrange(-1, 9), rng.choice(WORDS)))
    if rng.random() < 0.5:
        choices = tuple(Choice(rng.choice(WORDS), rng.choice(WORDS), rng.choice(WORDS))
                        for _ in range(rng.choice((0, 1, 4, 60))))
        text = tuple(rng.choice(WORDS) for _ in range(rng.choice((0, 3, 90))))
        return replace(view, overlay=Overlay(
            rng.choice(PURPOSES), rng.choice(WORDS), choices, text, rng.choice(WORDS), rng.randrange(-1, 9),
            rng.randrange(-1, 70), rng.choice(WORDS), rng.choice(WORDS)))
    return view


def random_state(rng: random.Random, number: int) -> State:
    session = random_session(rng, number)
    return State(session, random_view(rng, session), plain=rng.random() < 0.3)


def random_size(rng: random.Random) -> tuple[int, int]:
    """Any size, the usual ones more often."""
    return rng.choice(((80, 24), (140, 45), (60, 16), (rng.randrange(1, 60), rng.randrange(1, 16)),
                       (rng.randrange(60, 240), rng.randrange(16, 80)), (1, 1), (61, 70), (200, 16)))


def faults(state: State, columns: int, rows: int, lines: list[Line]) -> list[str]:
    """What is wrong with a drawn screen: its size, an unknown style, a character that no terminal should get."""
    wrong = [] if len(lines) == rows else [f"{len(lines)} lines for {rows}"]
    for number, line in enumerate(lines):
        text = "".join(span.text for span in line)
        if width(line) != columns:
            wrong.append(f"line {number} has {width(line)} cells for {columns}: {text!r}")
        if not text.isprintable() or "\u202e" in text or (state.plain and not text.isascii()):
            wrong.append(f"line {number} has a character that it should not: {text!r}")
        wrong += [f"line {number} has the style {span.style!r}" for span in line if span.style not in STYLES]
    return wrong


__all__ = ["ProblemsFound", "faults", "random_session", "random_size", "random_state", "random_view"]
