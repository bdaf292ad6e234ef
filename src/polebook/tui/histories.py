"""What the history page shows: posts and revisions as rows, what is still to be found out of them, and what came of it.

All of it is asked for as a `Wish`, and answered by whoever may wait for a disk or for git (`record_work`).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import TYPE_CHECKING

from polebook.book.ledger import Ledger
from polebook.chain.model import Bench, Chain
from polebook.problem import Problem
from polebook.text.files import Identity

if TYPE_CHECKING:  # what asks git, and reads sweeps, is imported where it is done: the first paint needs none of it
    from polebook.record.bench import Overlay
    from polebook.record.post import Posted
    from polebook.record.posted import Post
    from polebook.record.revisions import Revision
    from polebook.tui.view import State

NOW = "now"
SHOWN = 8  # digits of a digest that are shown
MOST = 100  # revisions that are listed
KEPT = 12  # revisions whose figures are kept
_KEPT_ROWS = 4  # lists: of now, of before an edit
REST_S = 0.12  # between a key and what is computed for the row that it came to

Of = tuple[int, Identity | None]
"""How often it was asked, and which file."""


@dataclass(frozen=True, slots=True)
class Text:
    """The file in a revision. digest: of its chain, "" where it is none; then `problem` is the first fault."""

    text: str
    digest: str = ""
    problem: Problem | None = None


@dataclass(frozen=True, slots=True)
class Then:
    """A revision solved. ledger: None where it has none, for the reason `problem`.

    beside   the text that it was compared with;  changes  from it to that one, by meaning, one a line
    """

    blob: str
    beside: str
    ledger: Ledger | None
    problem: Problem | None
    changes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Known:
    """What stands beside the file. unposted, ungit: why posts or revisions can't be told, None where they can.

    texts  by blob, of the revisions that have been read
    """

    of: Of
    posts: tuple[Post, ...]
    unposted: Problem | None
    revisions: tuple[Revision, ...]
    ungit: Problem | None
    texts: Mapping[str, Text] = field(default_factory=dict)

    @property
    def unread(self) -> tuple[Revision, ...]:
        """Revisions whose text has not been read, the newest first; one for each text."""
        return tuple({one.blob: one for one in reversed(self.revisions) if one.blob not in self.texts}.values())[::-1]


@dataclass(frozen=True, slots=True)
class Benches:
    """The sweeps that the benches of the file name, as of how many askings."""

    of: tuple[int, tuple[Bench, ...]]
    overlays: tuple[Overlay, ...]


@dataclass(frozen=True, slots=True)
class Request:
    """What is to be posted: the text as it is saved, and why."""

    text: str
    message: str


@dataclass(frozen=True, slots=True)
class Wish:
    """Something to be found out or done: exactly one of what follows `rest`, the seconds that it may wait.

    listing  posts and revisions as of then;  reading  texts of revisions
    solving  a revision, beside a text, with what was solved of it before;  posting  a post
    benches  the sweeps of a chain, as of then
    """

    path: str
    rest: float = 0.0
    listing: Of | None = None
    reading: tuple[Revision, ...] = ()
    solving: tuple[Revision, str, Then | None] | None = None
    posting: Request | None = None
    benches: tuple[Chain, tuple[int, tuple[Bench, ...]]] | None = None


@dataclass(frozen=True, slots=True)
class Answer:
    """What a wish came to."""

    wish: Wish
    known: Known | None = None
    texts: Mapping[str, Text] = field(default_factory=dict)
    then: Then | None = None
    posted: Posted | Problem | None = None
    benches: Benches | None = None


@dataclass(frozen=True, slots=True)
class Row:
    """A row of the page: the file as it stands here, a post, or a revision.

    name   "now", "post 2", "3f2a1c9e";  day  "" of now;  text  message or subject
    digest  "" while it is not known, or where there is none;  same  names of what has the same chain
    """

    key: str
    name: str
    day: str
    text: str
    digest: str
    same: tuple[str, ...] = ()
    post: Post | None = None
    revision: Revision | None = None

    @property
    def full(self) -> str:
        """The name that it has as a baseline."""
        return f"{self.name} of {self.day}" if self.post is not None else self.name


def rows(state: State) -> list[Row]:
    """What there is to choose from: now, then posts and revisions, the newest first."""
    session = state.session
    digest = session.chain.digest if session.chain is not None else ""
    saved = "not written yet" if state.unsaved else "as it is saved" if session.exists else "nothing yet"
    return list(_rows(state.view.past.known, digest, saved))


@lru_cache(_KEPT_ROWS)
def _rows(known: Known | None, digest: str, saved: str) -> tuple[Row, ...]:
    found = [] if known is None else _merged(_posts(known), _revisions(known))
    every = [Row(NOW, NOW, "", _standing(known, saved, digest, found), digest), *found]
    alike: dict[str, list[str]] = {}
    for row in every:
        alike.setdefault(row.digest, []).append(row.name)
    return tuple(replace(row, same=tuple(name for name in alike[row.digest] if row.digest and name != row.name))
                 for row in every)


def chosen(state: State, found: list[Row]) -> Row:
    """The chosen row; the first where that is gone."""
    return next((row for row in found if row.key == state.view.past.row), found[0])


def then_of(state: State, row: Row) -> Then | None:
    """The figures of a revision, where they are there."""
    if row.revision is None:
        return None
    return next((one for one in state.view.past.thens if one.blob == row.revision.blob), None)


def _posts(known: Known) -> list[Row]:
    count = len(known.posts)
    return [Row(f"post {count - at} {one.digest}", f"post {at + 1}", one.date.isoformat(), one.message, one.digest,
                post=one) for at, one in enumerate(known.posts)]


def _revisions(known: Known) -> list[Row]:
    return [Row(one.hash, one.short, one.day, one.subject,
                known.texts[one.blob].digest if one.blob in known.texts else "", revision=one)
            for one in known.revisions]


def _merged(posts: list[Row], revisions: list[Row]) -> list[Row]:
    """Both by date, each in its own order. Of one day a post comes behind the revisions from the one on that holds its
    chain: it is committed after it was made."""
    result: list[Row] = []
    while posts and revisions:
        post, there = posts[0], revisions[0]
        later = post.day > there.day or (post.day == there.day and not any(
            one.digest == post.digest for one in revisions if one.day == post.day))
        result.append((posts if later else revisions).pop(0))
    return [*result, *posts, *revisions]


def _standing(known: Known | None, saved: str, digest: str, found: list[Row]) -> str:
    """How the text here stands to the file and to the newest post."""
    if known is None or known.unposted is not None:
        return saved
    if not digest:
        return f"{saved}, with faults"
    if not known.posts:
        return f"{saved}, never posted"
    if known.posts[0].digest == digest:
        return f"{saved}, posted"
    again = next((row.name for row in found if row.post is not None and row.digest == digest), "")
    return f"{saved}, other than post 1" + (f", as {again}" if again else "")


def wish(state: State) -> Wish | None:
    """The next thing to be found out for what is in sight, or to be done; None for nothing."""
    past, session = state.view.past, state.session
    if past.post is not None:
        return Wish(session.path, posting=past.post)
    if state.view.page == "history" or past.take:
        known = past.known
        if known is None or known.of != (past.asked, session.identity):
            return Wish(session.path, listing=(past.asked, session.identity))
        found = rows(state)
        for row in (next((one for one in found if one.key == past.take), None), chosen(state, found)):
            if row is not None and row.revision is not None:
                then = then_of(state, row)
                if then is None or then.beside != session.history.text:
                    return Wish(session.path, 0.0 if past.take else REST_S,
                                solving=(row.revision, session.history.text, then))
        if known.unread:
            return Wish(session.path, reading=known.unread)
    if state.view.page == "response" and (asked := benched(state)) is not None and (
            past.benches is None or past.benches.of != asked) and session.chain is not None:
        return Wish(session.path, benches=(session.chain, asked))
    return None


def benched(state: State) -> tuple[int, tuple[Bench, ...]] | None:
    """Which sweeps the file has, as of how many askings; None for none."""
    chain = state.session.chain
    files = () if chain is None else tuple(one for one in chain.benches if one.file)
    return (state.view.past.asked, files) if files else None


def overlays(state: State) -> tuple[Overlay, ...]:
    """The sweeps to be drawn: those of the file as it is now, or of before as long as they are being looked for."""
    past = state.view.past
    return past.benches.overlays if past.overlaid and past.benches is not None and benched(state) is not None else ()
