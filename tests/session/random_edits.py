"""Random edits of a session, as a user could make them, for the tests of what holds after any of them."""

from __future__ import annotations

import random
from collections.abc import Callable

from polebook.chain.tables import SECTIONS
from polebook.problem import ProblemsFound
from polebook.session import state
from polebook.session.state import Session
from polebook.stages.registry import KINDS

TYPED = ("4k7", "100n", "2p2", "1.5", "60 dB", "5 %", "0", "-3", "", "E12", "true", "Q1", "positive", "1m", "20k",
         "x y", 'a "quoted" \\ note', "cobalt, rc", "4,7k", "über", "10k, 20k")
NAMES = ("Q1", "in", "out", "A_1", "Q9", "n0", "a b", "source")
NOTES = ("", "one line", "two\nlines", 'three """ quotes\n\\ and a tail"', "\n\n", "tab\there\r\nand there")

Made = Callable[[Session, float], Session]


def random_edit(session: Session, rng: random.Random) -> tuple[str, Made]:
    """A stage that the edit is about ("" where it is about another table), and the edit."""
    sheets = state.sheets_of(session)
    names = sheets[1:sheets.index("load")]
    if not names:
        return "", lambda s, now: state.add_stage(s, "source", rng.choice(list(KINDS)), now)
    name = rng.choice(names)
    kind = rng.choice(list(KINDS))
    family = rng.choice(("", *(f":{one}" for one in KINDS[kind].families)))
    rows = state.keys_of(session, rng.choice((*sheets, name, name)))
    row = rng.choice(rows) if rows else None
    typed, new, note = rng.choice(TYPED), rng.choice(NAMES), rng.choice(NOTES)
    way, far = rng.choice((-1, 1)), rng.choice((-10, -1, 1, 10))
    made: list[tuple[str, Made]] = [
        (name, lambda s, now: state.add_stage(s, name, kind + family, now)),
        (name, lambda s, now: state.copy_stage(s, name, now)),
        (name, lambda s, now: state.remove_stage(s, name, now)),
        (name, lambda s, now: state.move_stage(s, name, way, now)),
        (name, lambda s, now: state.rename_stage(s, name, new, now)),
        (name, lambda s, now: state.change_kind(s, name, kind + family, now)),
        (name, lambda s, now: state.toggle_left_out(s, name, now)),
        (name, lambda s, now: state.set_note(s, name, note, now)),
        ("", lambda s, now: state.set_note(s, rng.choice(("file", "target", "load", *sheets)), note, now)),
    ]
    if row is not None:
        owner = row.path.partition(".")[0]
        about = "" if owner in (*SECTIONS, "device") or "." not in row.path else owner
        made += [(about, lambda s, now: state.set_value(s, row.path, typed, now)),
                 (about, lambda s, now: state.step(s, row.path, far, now))] * 4
    return rng.choice(made)


def attempt(session: Session, made: Made, now: float) -> Session:
    """The session after the edit; as it was where that is refused."""
    try:
        return made(session, now)
    except ProblemsFound as found:
        assert found.problems and all(one.what and one.why and one.fix for one in found.problems)
        return session
