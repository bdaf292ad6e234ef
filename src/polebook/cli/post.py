"""`polebook post FILE`: the chain's figures into the record beside it."""

from __future__ import annotations

import argparse
from datetime import date
from typing import TYPE_CHECKING, Any

from polebook.cli.command import MET, Command
from polebook.cli.out import Out

if TYPE_CHECKING:
    from polebook.record.posted import Post

_ABOUT = """Write what the chain does now into the record beside its file, NAME.posted.toml:
date, message, digest, version of polebook, every target with what was got, the
lines and the account, to 6 digits. The newest post stands first, one figure a
line, so that a diff shows what moved; the earlier ones stay below it.

A chain that is unstable, or misses its targets, is posted as it is. A chain that
was posted last as it is now is not posted again, unless with a message.
polebook audit tells when the record is older than the file.

exit codes: 0 posted, or posted already; 2 a file is at fault, the record as it was

examples:
  polebook post chains/listener.toml -m "c_comp out: the new board does not sing"
  polebook post chains/listener.toml --list"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("-m", "--message", metavar="TEXT", default="", help="why, in a sentence; it stands in the post")
    parser.add_argument("--list", action="store_true", help="the posts so far, newest first; nothing is written")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, figures as posted")


def _run(args: argparse.Namespace, out: Out) -> int:
    entry = _listed(args.file) if args.list else _posted(args.file, args.message, out)
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump({"format": 1, "command": "post", "files": [{"file": args.file, **entry}]}))
        return MET
    from polebook.report import post as report

    out.write((report.listed if args.list else report.posted)({"file": args.file, **entry}, out.look))
    return MET


def _listed(file: str) -> dict[str, Any]:
    from polebook.chain import read  # deferred: --help needs no reader
    from polebook.record import post as record
    from polebook.record.posted_names import record_of

    posts = [_entry(one) for one in record.posts(file)]
    return {"digest": read.load(file).digest, "record": record_of(file), "posts": posts}


def _posted(file: str, message: str, out: Out) -> dict[str, Any]:
    from polebook.chain import read  # deferred: --help needs no reader
    from polebook.record import post as record
    from polebook.text import files

    record.posts(file)  # a record at fault is told before anything is computed
    text = files.read(file).text
    chain = read.parse(text, file)
    from polebook.book import build  # deferred: a faulty file is told without numpy, 75 ms sooner
    from polebook.cli.built import hand_yield

    ledger = build.ledger(chain)
    hand_yield(ledger, file, out)
    done = record.post(file, text, message, date.today(), ledger)
    return {
        "digest": chain.digest, "record": done.path, "new": done.new is not None,
        "post": _entry(done.new or done.before), "before": _entry(done.before) if done.new else None,
        "moved": [{"figure": one.name, "before": one.before, "after": one.after} for one in done.moved],
    }


def _entry(post: Post | None) -> dict[str, Any] | None:
    """A post as plain data."""
    if post is None:
        return None
    figures = {group: rows.get("", rows) for group, rows in post.figures.items()}
    return {"date": post.date.isoformat(), "message": post.message, "digest": post.digest, "version": post.version,
            "figures": figures}


COMMAND = Command(_ABOUT, _arguments, _run)
