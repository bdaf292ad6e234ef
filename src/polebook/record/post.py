"""The record of a chain: what was posted of it, beside the file; a new post; whether the newest one still holds."""

from __future__ import annotations

import os
from dataclasses import dataclass
from datetime import date
from typing import TYPE_CHECKING, Literal

from polebook import __version__
from polebook.book.asked import Built
from polebook.problem import Place, Problem, ProblemsFound
from polebook.record import posted_read
from polebook.record.posted import Moved, Post, Record
from polebook.record.posted_names import chain_of, record_of
from polebook.text import files

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

State = Literal["none", "current", "older", "otherwise"]


@dataclass(frozen=True, slots=True)
class Posted:
    """What `post` did: the post before, and the new one, None where the one before says all of it already.

    path   of the record;  moved  figures that the new one has otherwise than the one before
    """

    path: str
    new: Post | None
    before: Post | None
    moved: tuple[Moved, ...]


@dataclass(frozen=True, slots=True)
class Standing:
    """How the newest post stands to the file.

    path   of the record
    state  "none" where nothing is posted; "current"; "older" where the file has changed since; "otherwise" where the
           file is the same and polebook has other figures for it by now: `moved`, from the posted to today's
    """

    path: str
    state: State
    newest: Post | None = None
    moved: tuple[Moved, ...] = ()


def posts(path: str | os.PathLike[str]) -> tuple[Post, ...]:
    """What was posted of the chain file at `path`, newest first; () where nothing was.

    Raises ProblemsFound where the record is at fault.
    """
    record = _record(os.fspath(path))
    return record.posts if record else ()


def post(path: str | os.PathLike[str], text: str, message: str, today: date, ledger: Ledger | None = None) -> Posted:
    """Posts the chain of `text`, the text of the file at `path` as it is saved; `today` is the date of the post.

    ledger  that of `text` where it is at hand. Where the file wants a yield that was not handed to it yet, chains are
            built and it is handed, which takes up to some seconds
    Where digest and figures are those of the newest post, only a message that is not its own makes another one.
    Raises ProblemsFound, the record as it was, where the chain has no figures or the record is at fault.
    """
    name = os.fspath(path)
    file = _file(name)
    record = _parsed(name, file) if file else None
    if file and (lost := posted_read.comment(file.text, file.path)):
        raise ProblemsFound([lost], file.text)
    # deferred: to list posts takes no numpy, 75 ms sooner
    from polebook.record import posted_write
    from polebook.record.posted_figures import figures, moved

    of = _whole(ledger or _computed(name, text))
    new = Post(today, message.strip(), of.chain.digest, __version__, figures(of))
    last = record.posts[0] if record else None
    changed = moved(last.figures, new.figures) if last else ()
    target = record_of(name)
    if last and last.digest == new.digest and not changed and new.message in ("", last.message):
        return Posted(target, None, last, ())
    earlier = record.posts if record else ()
    _put(target, file, posted_write.write(Record(os.path.basename(name), (new, *earlier)), target))
    return Posted(target, new, last, changed)


def standing(path: str | os.PathLike[str], ledger: Ledger) -> Standing:
    """How the newest post of the file at `path` stands to its `ledger`; a yield is judged where it was handed to that.

    Raises ProblemsFound where the record is at fault.
    """
    name = os.fspath(path)
    record, target = _record(name), record_of(name)
    if record is None:
        return Standing(target, "none")
    newest = record.posts[0]
    if newest.digest != ledger.chain.digest:
        return Standing(target, "older", newest)
    from polebook.record.posted_figures import figures, moved  # deferred: a file without a record needs none

    changed = moved(newest.figures, figures(ledger))
    if newest.version != __version__:  # a figure that polebook keeps only by now says nothing against the post
        changed = tuple(one for one in changed if one.before is not None)
    if _unbuilt(ledger):
        changed = tuple(one for one in changed if not one.name.startswith("targets.yield."))
    return Standing(target, "otherwise" if changed else "current", newest, changed)


def _record(name: str) -> Record | None:
    """The record of the chain file `name`; None where there is none."""
    file = _file(name)
    return _parsed(name, file) if file else None


def _file(name: str) -> files.FileText | None:
    """The record's file; None where nothing stands at its name. A link is not followed: it could lead anywhere."""
    if chain := chain_of(name):
        raise ProblemsFound([Problem(Place(name), "this is a record, not a chain", "a record has none of its own",
                                     f"name the chain file: {chain}")])
    target = record_of(name)
    if os.path.islink(target):
        raise ProblemsFound([Problem(
            Place(target), "the record is a symbolic link", "a link could have it written anywhere",
            "put the file itself in its place, or take the link away",
        )])
    return files.read(target) if os.path.lexists(target) else None


def _parsed(name: str, file: files.FileText) -> Record:
    """The record, which must be that of `name`: that of another file only where that is there no more (renamed)."""
    record, own = posted_read.read(file.text, file.path), os.path.basename(name)
    other = os.path.join(os.path.dirname(name), record.chain)
    there = record.chain != own and os.path.exists(other)
    if there and not (os.path.exists(name) and os.path.samefile(name, other)):
        raise ProblemsFound([Problem(
            Place(file.path), f"this is the record of {record.chain}, not of {own}",
            "by their names both would have it", f"rename {own}",
        )])
    return record


def _put(target: str, before: files.FileText | None, text: str) -> None:
    """Writes the record, unless somebody else has since it was read."""
    if before is None:
        files.create(target, text)
        return
    if os.path.islink(target) or files.identity(target) != before.identity:
        raise ProblemsFound([Problem(Place(target), "the record has changed while the chain was computed",
                                     "what came in would be lost", "post again")])
    files.save(target, text.replace("\n", before.newline))


def _computed(name: str, text: str) -> Ledger:
    from polebook.book.ledger import ledger  # deferred with the figures
    from polebook.chain import read

    return ledger(read.parse(text, name))


def _whole(of: Ledger) -> Ledger:
    """`of` with the yield that its file wants."""
    if _unbuilt(of):
        from polebook.plan import yielded  # deferred: few files ask for a yield

        for _ in yielded.hand(of):
            pass
    return of


def _unbuilt(of: Ledger) -> bool:
    """Whether the file wants a yield, and nobody has told this ledger of it."""
    return "target.yield" in of.chain.given and of.judged and of.built == Built()
