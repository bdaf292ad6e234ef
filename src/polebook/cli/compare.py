"""`polebook compare A [B]`: what changed between two chains, and what that did."""

from __future__ import annotations

import argparse
from collections.abc import Generator
from typing import TYPE_CHECKING, Any

from polebook.cli.command import INTERRUPTED, MET, Command, Usage
from polebook.cli.out import Out, Pace

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger
    from polebook.record.changes import Changes
    from polebook.record.posted import Post
    from polebook.record.sides import Side

_ABOUT = """What changed between two chains, by meaning, and what that did to gain, edges,
targets and every other figure, the largest effect first. A comes before B.

Without B the file is compared with what git has of it: with the newest revision
that has another text, or with the one that --rev names. --rev OLD..NEW compares
two revisions. A file that was renamed is followed. git is asked, and writes
nothing.

--post compares with what polebook post wrote beside the file: the newest post,
the one of that number (1 is the newest), date, or beginning of a digest. A post
holds figures alone, so that no changes and no causes are told.

Of several changes each is made by itself, of A (alone), and made as the last,
of B without it (last). Both moves are told for gain, edges and what a target
judges; the mean of the two, in dB or as a ratio, over the whole move is its
share, so that no order counts. Changes of which one alone would be no chain go
together.

examples:
  polebook compare chain.toml
  polebook compare chain.toml --rev HEAD~3
  polebook compare before.toml after.toml --json
  polebook compare chain.toml --post 2026-05-04"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("before", metavar="A", help="a chain file (TOML)")
    parser.add_argument("after", metavar="B", nargs="?", help="another one; without it, A as it was comes before")
    was = parser.add_mutually_exclusive_group()
    was.add_argument("--rev", metavar="REV", help="A as git has it there: HEAD~3, a branch, a tag, part of a hash")
    was.add_argument("--post", metavar="WHICH", nargs="?", const="1",
                     help="what was posted of A: 1 for the newest, a date, or the beginning of a digest")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")


def _prepare(rest: list[str]) -> list[str]:
    """A revision that begins with - is a bad revision, not an option; a file after --post is A."""
    words: list[str] = []
    for at, word in enumerate(rest):
        if at and rest[at - 1] == "--rev":
            words[-1] = f"--rev={word}"
        elif at and rest[at - 1] == "--post" and word.endswith(".toml"):
            words[-1:] = ["--post=1", word]
        else:
            words.append(word)
    return words


def _run(args: argparse.Namespace, out: Out) -> int:
    for option in ("rev", "post"):
        if args.after is not None and getattr(args, option) is not None:
            raise Usage(f"polebook compare: --{option} stands with two files", f"leave B out, or --{option}",
                        "it says what the one file is compared with")
    if args.post is not None:
        return _posted(args, out)
    (before, entry), (after, other) = _sides(args)
    from polebook.book import build  # deferred: a faulty file is told without numpy, 75 ms sooner
    from polebook.cli.built import hand_yield
    from polebook.record.changes import changes

    old, new = build.ledger(before.chain), build.ledger(after.chain)
    hand_yield(old, before.name, out)
    hand_yield(new, after.name, out)
    told = _told(changes(before, after), old, new, out)
    answer = {"format": 1, "command": "compare", "files": [entry, other], **told}
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.compare import compare

        out.write(compare(answer, out.look))
    return INTERRUPTED if answer["stopped"] else MET


def _sides(args: argparse.Namespace) -> list[tuple[Side, dict[str, Any]]]:
    """Before and after: what is compared, and its entry in the answer."""
    if args.after is not None:
        return [_file(args.before), _file(args.after)]
    old, dots, new = (args.rev or "").partition("..")
    if dots and (not old or not new or new.startswith(".")):
        raise Usage(f'polebook compare: "{args.rev}" names no two revisions', "write them like --rev HEAD~3..HEAD~2",
                    "two dots stand between them")
    last = None if dots else _file(args.before)  # what can't be read is told before git is asked
    from polebook.record import revisions as git  # deferred: two files need no git

    first = git.before_now(args.before) if args.rev is None else git.revision(args.before, old)
    return [_revision(args.before, first), last or _revision(args.before, git.revision(args.before, new))]


def _file(path: str) -> tuple[Side, dict[str, Any]]:
    from polebook.record.sides import side  # deferred: --help needs no reader
    from polebook.text import files

    read = side(files.read(path).text, path)
    return read, {"file": path, "digest": read.chain.digest, "revision": None}


def _revision(path: str, there: Any) -> tuple[Side, dict[str, Any]]:
    from polebook.record import revisions as git
    from polebook.record.sides import side

    read = side(git.text_at(path, there), git.place(there))
    return read, {"file": path, "digest": read.chain.digest, "revision": {
        "hash": there.hash, "date": there.date, "subject": there.subject, "name": there.name}}


def _told(found: Changes, before: Ledger, after: Ledger, out: Out) -> dict[str, Any]:
    """The comparison; without the causes where ctrl-c stops it."""
    from polebook.record.compare import compare

    try:
        return _worked(compare(found, before, after), out)
    except KeyboardInterrupt:
        return _worked(compare(found, before, after, lambda: True), out)
    finally:
        out.progress("")


def _worked(work: Generator[tuple[int, int], None, dict[str, Any]], out: Out) -> dict[str, Any]:
    """What the work comes to, with a line of progress where it takes long."""
    pace = Pace()
    while True:
        try:
            done, total = next(work)
        except StopIteration as end:
            result: dict[str, Any] = end.value
            return result
        if pace.due():
            out.progress(f" one change at a time: {done} of {total} (ctrl-c stops)")


def _posted(args: argparse.Namespace, out: Out) -> int:
    from polebook.record.choose import chosen  # deferred: --help needs no reader
    from polebook.record.post import posts
    from polebook.record.posted_names import record_of

    read, entry = _file(args.before)
    post = chosen(posts(args.before), args.post, args.before)
    from polebook.book import build  # deferred as above
    from polebook.cli.built import hand_yield
    from polebook.record.compare import compare_post

    ledger = build.ledger(read.chain)
    hand_yield(ledger, args.before, out)
    was = {"file": record_of(args.before), "digest": post.digest, "post": {
        "date": post.date.isoformat(), "message": post.message, "version": post.version,
        "held_by": _holder(args.before, post)}}
    answer = {"format": 1, "command": "compare", "files": [was, entry], **compare_post(post, ledger)}
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.compare_post import compare_post as text

        out.write(text(answer, out.look))
    return MET


def _holder(path: str, post: Post) -> str | None:
    """The newest revision of the file that says what was posted, where git has one."""
    from contextlib import suppress

    from polebook.problem import ProblemsFound
    from polebook.record.revisions import holding

    with suppress(ProblemsFound):
        there = holding(path, post.digest)
        return there.hash if there else None
    return None


COMMAND = Command(_ABOUT, _arguments, _run, _prepare)
