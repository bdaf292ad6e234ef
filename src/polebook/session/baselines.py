"""Baselines that are taken from the record: a revision's whole ledger, or the figures that a post holds."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

from polebook.book.compare import Change, Changes, Moves, Number, Way, changes
from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.problem import ProblemsFound
from polebook.record.posted import WHOLE, Post
from polebook.session.opened import Session, unpin

_ACCOUNTS: Mapping[str, tuple[str, str]] = {
    f"{figure}_{end}_db": (end, f"{figure}_db") for end in ("upper", "lower") for figure in ("lost", "left")}
_FOLLOWS = "left_upper_db"  # of a node: not held, but what is allotted less what is lost
_TWO_ROUNDED = 2e-4  # dB by which the difference of two figures of four decimals may be off, and one digit more
_TARGETS = {"supply_current_a": ("current", "got_a"), "swing_v": ("swing", "got_v")}


@dataclass(frozen=True, slots=True)
class Against:
    """What is told of a baseline that was taken from the record; a pin has none of it.

    row     the history's row
    name    "post 2 of 2026-11-03", "3f2a1c9e";  short  "post 2", "3f2a1c9e"
    post    the figures, where the baseline is a post; None of a revision, whose ledger is the session's baseline
    holder  the revision that holds the chain of the post, as a reader is shown it; "" where none is known
    """

    row: str
    name: str
    short: str
    post: Post | None = None
    holder: str = ""


@dataclass(frozen=True, slots=True)
class SincePost(Moves):
    """What moved from a post to a ledger, of the figures that a post holds; what it does not hold has not moved."""

    post: Post

    def _told(self, key: tuple[str, str], way: Way, get: Callable[[Ledger], Number]) -> Change | None:
        # deferred: nothing is compared with a post before the first screen
        from polebook.record.posted_figures import rounded, same

        before = held(self.post, *key)
        if before is None:
            return None
        try:
            with within_reach(self.after.chain):
                after = get(self.after)
        except (KeyError, ProblemsFound):
            return None
        alike = after is not None and (same(key[1], before, rounded(key[1], after)) or (
            key[1] == _FOLLOWS and abs(after - before) <= _TWO_ROUNDED))
        return Change(after if alike else before, after, way)


def held(post: Post, group: str, figure: str) -> float | None:
    """What a post holds of a figure, by the group and name that `Moves` has for it; None for nothing."""
    kind, _, name = group.partition(" ")
    figures = post.figures
    if kind in ("line", "node"):
        return _left(figures["lines"].get(name, {}), figure)
    if kind:
        return None
    if figure in _ACCOUNTS:
        end, key = _ACCOUNTS[figure]
        return _number(figures["account"].get(end, {}).get(key))
    if figure in _TARGETS:
        target, key = _TARGETS[figure]
        return _number(figures["targets"].get(target, {}).get(key))
    return _number(figures["overall"].get(WHOLE, {}).get(figure))


def got(post: Post, target: str) -> float | None:
    """What a post has for a target, in the unit that a reader has it in: dB, per cent, else SI."""
    row = post.figures["targets"].get(target, {})
    return next((_number(value) for key, value in row.items() if key.startswith("got_")), None)


def met(post: Post, target: str) -> bool | None:
    """Whether a target was met, by a post; None where it was not judged."""
    found = post.figures["targets"].get(target, {}).get("met")
    return found if isinstance(found, bool) else None


def since(session: Session, post: Post) -> Moves | None:
    """What moved from a post to the figures of now; None where there are none."""
    return None if session.ledger is None else SincePost(session.ledger, post)


def moved(session: Session) -> Moves | None:
    """What moved against the baseline; None without a baseline or without a ledger."""
    if session.against is not None and session.against.post is not None:
        return since(session, session.against.post)
    if session.baseline is None or session.ledger is None:
        return None
    found: Changes = changes(session.baseline, session.ledger)
    return found


def posted(session: Session) -> Post | None:
    """The post that is the baseline; None where that is none."""
    return session.against.post if session.against is not None else None


def stands(session: Session) -> bool:
    """Whether there is a baseline."""
    return session.baseline is not None or session.against is not None


def set_against(session: Session, against: Against, ledger: Ledger | None) -> Session:
    """The session with a baseline from the record; the ledger is a revision's, None of a post."""
    return replace(unpin(session), against=against, baseline=ledger)


def _left(row: Mapping[str, float | bool | str], figure: str) -> float | None:
    """A figure of a line's row; what is left of an allotment is not held, but follows."""
    if figure == _FOLLOWS:
        allotted, lost = _number(row.get("allotted_upper_db")), _number(row.get("lost_upper_db"))
        return None if allotted is None or lost is None else allotted - lost
    return _number(row.get(figure))


def _number(value: float | bool | str | None) -> float | None:
    return value if isinstance(value, float) else None
