"""The answers to what the history page wants: git asked, records and sweeps read, revisions solved, posts written.

Whatever may wait for a disk stands here, and is done in a thread (`historian`). Nothing of it touches the state.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import date
from os.path import dirname
from time import monotonic
from typing import TYPE_CHECKING

from polebook.problem import Problem, ProblemsFound
from polebook.session.state import new_session
from polebook.tui.histories import MOST, Answer, Benches, Known, Of, Request, Text, Then, Wish

if TYPE_CHECKING:
    from polebook.record.post import Posted
    from polebook.record.posted import Post
    from polebook.record.revisions import Revision

READ_S = 0.2  # of reading at a time


def answer(wish: Wish, today: date) -> Answer:
    """What a wish comes to. `today` is the date of a post."""
    if wish.posting is not None:
        return Answer(wish, posted=_posted(wish.path, wish.posting, today))
    if wish.listing is not None:
        return Answer(wish, known=_listed(wish.path, wish.listing))
    if wish.solving is not None:
        return Answer(wish, then=_solved(wish.path, *wish.solving))
    if wish.benches is not None:
        return Answer(wish, benches=_benches(wish))
    return Answer(wish, texts=_texts(wish.path, wish.reading))


def _listed(path: str, of: Of) -> Known:
    from polebook.record.post import posts
    from polebook.record.revisions import revisions

    made: tuple[Post, ...] = ()
    there: tuple[Revision, ...] = ()
    unposted = ungit = None
    try:
        made = posts(path)
    except ProblemsFound as found:
        unposted = found.problems[0]
    try:
        there = revisions(path, MOST)
    except ProblemsFound as found:
        ungit = found.problems[0]
    return Known(of, made, unposted, there, ungit)


def _texts(path: str, wanted: Sequence[Revision]) -> dict[str, Text]:
    """Of as many revisions as can be read in a moment, one at least."""
    begun, found = monotonic(), {}
    for one in wanted:
        found[one.blob] = _text(path, one)
        if monotonic() - begun > READ_S:
            break
    return found


def _text(path: str, of: Revision) -> Text:
    from polebook.chain.read import parse
    from polebook.record.revisions import place, text_at

    text = ""
    try:
        text = text_at(path, of)
        return Text(text, parse(text, place(of)).digest)
    except ProblemsFound as found:
        return Text(text, problem=found.problems[0])


def _solved(path: str, of: Revision, beside: str, before: Then | None) -> Then:
    from polebook.record.revisions import place, text_at

    try:
        text = text_at(path, of)
    except ProblemsFound as found:
        return Then(of.blob, beside, None, found.problems[0])
    changed = _changes(text, place(of), beside, path)
    if before is not None:
        return replace(before, beside=beside, changes=changed)
    session = new_session(place(of), text)
    return Then(of.blob, beside, session.ledger, session.problems[0] if session.problems else None, changed)


def _changes(before: str, name: str, after: str, path: str) -> tuple[str, ...]:
    """What has changed by meaning; nothing where either is no chain."""
    from polebook.record.changes import changes
    from polebook.record.sides import side

    try:
        return tuple(one.text for one in changes(side(before, name), side(after, path)).listed)
    except ProblemsFound:
        return ()


def _posted(path: str, asked: Request, today: date) -> Posted | Problem:
    from polebook.record.post import post

    try:
        return post(path, asked.text, asked.message, today)
    except ProblemsFound as found:
        return found.problems[0]


def _benches(wish: Wish) -> Benches:
    from polebook.record.bench import overlays

    if wish.benches is None:
        raise ValueError("no benches are asked for")
    chain, of = wish.benches
    return Benches(of, overlays(chain, dirname(wish.path) or "."))
