"""Random states of the app for the drawing tests: random chains, edited and spoilt, and a user anywhere in them."""

from __future__ import annotations

import random
from dataclasses import replace

from polebook.plan.sweep import Point
from polebook.problem import ProblemsFound
from polebook.session import state as sessions
from polebook.session.state import Session
from polebook.text.history import History
from polebook.tui.keys import PAGES
from polebook.tui.lines import STYLES, Line, width
from polebook.tui.view import Choice, Field, Lever, Overlay, Plot, State, Sweep, Times, View, Writing
from tests.book.verdict_cases import CASES
from tests.fuzz_files import spoilt
from tests.helpers import DEMOS
from tests.session.random_edits import attempt, random_edit
from tests.tui.apportion_told import random_apportion
from tests.tui.history_told import against, random_past
from tests.tui.spread_told import random_spread

WORDS = ("", "Q1", "4k7", "a b c", "üΩ漢字 wide", "\x1b[31mred", "x" * 200, "two\nlines\n\n", "\u202eback", "e\u0301")
PURPOSES = ("help", "working", "cautions", "find", "add", "kind", "card", "cards", "sheets", "leave", "new", "changed",
            "recovered", "difference", "note", "rename", "take", "start", "choice", "post")
FRIENDLY = sorted(path.read_text(encoding="utf-8") for path in DEMOS.glob("*.toml")) + sorted(CASES.values())


def random_session(rng: random.Random, number: int) -> Session:
    """A demo chain or a chain of the verdicts, edited at random; now and then with another text laid over it."""
    session = sessions.new_session("chains/some chain.toml", rng.choice(FRIENDLY))
    for at in range(rng.choice((0, 0, 1, 3, 8))):
        session = attempt(session, random_edit(session, rng)[1], float(at))
        if rng.random() < 0.2:
            session = sessions.pin(session)
        elif rng.random() < 0.2 and session.good is not None:
            session = against(rng, session, WORDS)
    if rng.random() < 0.3:
        session = sessions.set_text(session, spoilt(7, number).decode("utf-8", "replace"), 99.0)
    return replace(session, read_only=rng.choice(("", "its folder is not yours")), exists=rng.random() < 0.7)


def random_view(rng: random.Random, session: Session) -> View:
    """A user anywhere, numbers out of range too."""
    sheets = sessions.sheets_of(session)
    sheet = rng.choice(("", "", *sheets, "nothing of the kind"))
    view = View(
        page=rng.choice(tuple(PAGES.values())), line=rng.randrange(-1, 12),
        focus=rng.choice(("sheet", "page")),
        sheet=sheet, key=rng.randrange(-1, 60), figure=rng.randrange(-1, 9), row=rng.randrange(-1, 40),
        upper=rng.random() < 0.6, decibels=rng.random() < 0.6, message=rng.choice(WORDS), bad=rng.random() < 0.3,
        bank=rng.choice(("plan", "levels")),
    )
    if view.page == "leverage":
        view = replace(view, lever=random_lever(rng, session))
    if view.page in ("pulse", "noise"):
        view = replace(view, step=random_times(rng), sag=random_times(rng), noise=random_plot(rng))
    if view.page == "spread":
        view = replace(view, spread=random_spread(rng, session.chain, WORDS))
    if view.page == "apportion":
        view = replace(view, apportion=random_apportion(rng, session, WORDS))
    if view.page == "history":
        view = replace(view, past=random_past(rng, session, WORDS))
    if rng.random() < 0.25:
        return replace(view, writing=random_writing(rng, session))
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


def random_lever(rng: random.Random, session: Session) -> Lever:
    """The leverage page with or without a sweep: of the chain or of another, of any values, some of them computed."""
    figure = rng.choice(("gain", "upper_edge", "lower_edge", "noise", "none"))
    row = rng.choice(("", "Q1.rc", "device.N.beta"))
    chain = session.good.chain if session.good is not None and rng.random() < 0.7 else \
        sessions.new_session("x.toml", rng.choice(FRIENDLY)).chain
    if chain is None or not chain.numbers or rng.random() < 0.3:
        return Lever(figure, row, open=rng.random() < 0.5)
    path = rng.choice(sorted(chain.numbers))
    value = (chain.numbers[path] or 1.0) * 10 ** rng.uniform(-6, 6)
    span, count = 1 + 10 ** rng.uniform(-2, 6), rng.choice((1, 2, 41))
    values = tuple(value * span ** (at / 40) for at in range(count))
    points = tuple(random_point(rng, one) for one in values)
    sweep = Sweep(rng.choice((path, "Q1.gm")), path, chain, random_point(rng, value), values,
                  points[:rng.randrange(count + 1)], rng.randrange(-1, 50))
    return Lever(figure, row, sweep, rng.random() < 0.7)


def random_point(rng: random.Random, value: float) -> Point:
    """A point of a sweep, some of its figures missing, some beyond all bounds."""
    gain, lower, upper = (rng.choice((None, 0.0, 1e-300, 1e300, 10 ** rng.uniform(-3, 9))) for _ in range(3))
    return Point(value, gain if gain is None or rng.random() < 0.7 else -gain, lower, upper, why=rng.choice(WORDS),
                 noise=rng.choice((None, 0.0, 1e-300, 1e300, 10 ** rng.uniform(-12, -3))))


def random_times(rng: random.Random) -> Times:
    """Anywhere on a plot over time, and where nobody can be."""
    def seconds() -> float | None:
        return rng.choice((None, 10 ** rng.uniform(-12, 3), 0.0, -1.0, float("nan"), float("inf"), 1e300))

    return Times(seconds(), seconds(), seconds())


def random_plot(rng: random.Random) -> Plot:
    """Anywhere on the plot of the noise."""
    def hz() -> float | None:
        return rng.choice((None, 10 ** rng.uniform(-9, 14), 1e3, 0.0, -5.0))

    return Plot(hz(), hz(), hz(), rng.choice(("input", "output", "nothing of the kind")), rng.random() < 0.5)


def random_writing(rng: random.Random, session: Session) -> Writing:
    """The text page in the midst of it: judged or not, faults of another text too, a cursor anywhere."""
    text = session.history.text
    for _ in range(rng.choice((0, 1, 5))):
        at = rng.randrange(len(text) + 1)
        piece = rng.choice((*WORDS, "\n", "\r\n", "\t", "[[", '"'))
        text = text[:at] + piece + text[at + rng.choice((0, 0, 1, 40)):]
    after = sessions.set_text(session, text, 0.0) if rng.random() < 0.7 else session
    return Writing(History(text, rng.choice((None, text))), after, rng.choice((None, session.good)),
                   rng.randrange(-1, len(text) + 9), find=rng.choice((None, None, *WORDS)))


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
