"""What is known of posts, revisions and bench sweeps, for tests: as it is answered, and anything at random."""

from __future__ import annotations

import random
from collections.abc import Sequence
from datetime import date

import numpy as np

from polebook.problem import Place, Problem
from polebook.record.bench import Overlay
from polebook.record.posted import Post
from polebook.record.posted_figures import figures
from polebook.record.revisions import Revision
from polebook.record.sweeps import Sweep
from polebook.session import state as sessions
from polebook.session.state import Against, Session
from polebook.tui.control.history import taken
from polebook.tui.histories import Benches, Known, Text, Then, wish
from polebook.tui.record_work import answer
from polebook.tui.view import Past

TODAY = date(2026, 12, 1)


def worked(desk, most=60):
    """The desk with all that its page wants found out, as the app's thread would do it between keys."""
    for _ in range(most):
        wanted = wish(desk.state)
        if wanted is None:
            return desk
        desk.state = taken(desk.state, answer(wanted, TODAY))
    raise AssertionError(f"there is no end of wishes: {wanted}")


def random_post(rng: random.Random, session: Session, words: Sequence[str]) -> Post:
    """A post of the session's own figures, or of none, a digest of its own or the chain's."""
    held = {group: {} for group in ("overall", "targets", "lines", "account")}
    digest = f"{rng.randrange(16**8):08x}" * 8
    if session.ledger is not None and rng.random() < 0.6:
        held, digest = figures(session.ledger), rng.choice((digest, session.ledger.chain.digest))
    return Post(date(2026, rng.randrange(1, 13), 3), rng.choice(words), digest, rng.choice(words), held)


def against(rng: random.Random, session: Session, words: Sequence[str]) -> Session:
    """The session with a baseline out of the record."""
    post = random_post(rng, session, words) if rng.random() < 0.6 else None
    known = Against("row", rng.choice(words), rng.choice(words), post, rng.choice(words))
    return sessions.set_against(session, known, None if post is not None else session.good)


def random_past(rng: random.Random, session: Session, words: Sequence[str]) -> Past:
    """Anything that can be known, in any state of finding it out."""
    problem = Problem(Place("x", rng.randrange(3)), rng.choice(words), rng.choice(words), rng.choice(words))
    revisions = tuple(Revision(f"{at:040x}", f"2026-{rng.randrange(1, 13):02d}-03T01:02:03+02:00", rng.choice(words),
                               "x.toml", f"{at % 7:040x}", False) for at in range(rng.choice((0, 1, 4, 40))))
    texts = {one.blob: Text("", rng.choice(("", "ab" * 32)), problem) for one in revisions if rng.random() < 0.6}
    made = tuple(random_post(rng, session, words) for _ in range(rng.choice((0, 1, 9))))
    bad, none = rng.choice((None, problem)), rng.choice((None, problem))
    known = Known((rng.randrange(2), None), made, bad, revisions, none, texts)
    thens = tuple(Then(one.blob, "", rng.choice((None, session.good)), rng.choice((None, problem)),
                       tuple(rng.choice(words) for _ in range(rng.choice((0, 2, 30))))) for one in revisions[:3])
    row = rng.choice(("", "now", "gone", *(one.hash for one in revisions[:3])))
    return Past(rng.randrange(3), row, spread=rng.random() < 0.3, known=rng.choice((None, known, known)), thens=thens)


def swept(hz, gain_db, degrees=None, number=1, at="", label="board 2", apart=""):
    """A sweep that a bench has."""
    sweep = Sweep("x.csv", np.asarray(hz, float), np.asarray(gain_db, float),
                  None if degrees is None else np.asarray(degrees, float), None, ())
    return Overlay(number, label, at, sweep, apart)


__all__ = ["TODAY", "Benches", "against", "random_past", "swept", "worked"]
