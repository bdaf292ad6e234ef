"""`polebook report FILE`: a design review of a chain as Markdown, with its drawings beside it."""

from __future__ import annotations

import argparse
import os
from datetime import date
from typing import TYPE_CHECKING, Any

from polebook.cli.bench import against_the_plan, unread
from polebook.cli.command import INTERRUPTED, Command, Usage
from polebook.cli.draw import STANDARD, named
from polebook.cli.out import Out
from polebook.cli.quantities import whole
from polebook.cli.spread import done

if TYPE_CHECKING:
    from polebook.chain.model import Chain
    from polebook.record.bench import Overlay

_ABOUT = """Write a design review of a chain as Markdown: verdict, targets, cautions, lines,
nodes, owners of the edges, poles, step response, noise, levels, leverage, parts,
and the workings of the figures that the verdict leans on. Four drawings (SVG)
go beside it: review-response.svg, -account, -pulse and -levels for review.md.

The same file gives the same review, to the byte: it carries no date but that of
--date. Every [[bench]] of the file stands in it against the plan; --spread adds
what the tolerances do to ten thousand built chains.

Files that are there are written over where they are polebook's own and nobody
has edited them, else only with --force: remarks in a review are not lost.
Without -o, or with -o -, the review goes to the standard output, and no drawing
is made.

examples:
  polebook report chain.toml -o review.md
  polebook report chain.toml -o review.md --spread --date 2026-05-04"""
_ENDINGS = (".md", ".markdown")
SEED = 1  # of the builds that benches are judged by, as polebook bench has it


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("-o", "--output", metavar="OUT.md", default=STANDARD, help="the file to write")
    parser.add_argument("--spread", action="store_true", help="build the chain many times, as polebook spread does")
    parser.add_argument("--builds", metavar="N", help="with --spread: how many chains to build (default 10000)")
    parser.add_argument("--seed", metavar="N", help="with --spread: which builds: a whole number (default 1)")
    parser.add_argument("--date", metavar="DAY", help="the date that the review carries, such as 2026-05-04")
    parser.add_argument("--force", action="store_true", help="write over whatever stands there")


def _run(args: argparse.Namespace, out: Out) -> int:
    name, day = named("report", args.output, _ENDINGS), _day(args.date)
    builds = whole("report", "--builds", args.builds, "10000")
    seed = whole("report", "--seed", args.seed, "1")
    if not args.spread and (builds, seed) != (None, None):
        raise Usage("polebook report: --builds and --seed belong to --spread", "add --spread, or leave them away")
    from polebook.chain import read  # deferred: --help needs no reader

    chain = read.load(args.file)
    from polebook.record import documents
    from polebook.report.svg.drawings import WHAT, drawing

    stem = os.path.splitext(name)[0]
    pictures = {what: f"{stem}-{what}.svg" for what in WHAT} if name else {}
    documents.check([*filter(None, [name]), *pictures.values()], args.file, args.force)
    from polebook.book.build import ledger  # deferred: a faulty file is told without numpy, 75 ms sooner
    from polebook.cli.built import hand_yield
    from polebook.record.review import review
    from polebook.report.review import review as told

    of = ledger(chain)
    row = hand_yield(of, args.file, out)
    spread = _spread(chain, builds, seed, out) if args.spread else None
    if args.spread and spread is None:
        out.tell("stopped: no review is written")
        return INTERRUPTED
    bench, benches = _benches(chain, args.file, out) if chain.benches else (None, ())
    document = review(of, args.file, day, built=row, bench=bench, benches=benches, spread=spread)
    text = documents.marked(told(document, {what: os.path.basename(path) for what, path in pictures.items()}), "report")
    if not name:
        out.write(text if out.look.has(text) else "".join(f"{out.look.text(line)}\n" for line in text.splitlines()))
        return unread(benches, out)
    drawn = {path: documents.marked(drawing(document, what), "draw") for what, path in pictures.items()}
    documents.save({**drawn, name: text})
    listed = ", ".join(os.path.basename(path) for path in pictures.values())
    out.write(f" {out.look.text(name)}: the review; beside it {out.look.text(listed)}\n")
    return unread(benches, out)


def _benches(chain: Chain, file: str, out: Out) -> tuple[dict[str, Any], tuple[Overlay, ...]]:
    """What `polebook bench` answers unasked, and the sweeps."""
    from polebook.record.compared import document  # deferred: few files have a bench

    found = against_the_plan(chain, file, None, SEED, out)
    answer = {"files": [{"file": file, "seed": SEED, "gain_unit": "V/V" if chain.source_kind == "voltage" else "V/A",
                         "benches": [document(one) for one in found]}]}
    return answer, tuple(one.overlay for one in found if one.overlay is not None)


def _day(typed: str | None) -> str:
    """The date as typed, "" for none. Raises Usage where it is no day."""
    if typed is None:
        return ""
    try:
        return date.fromisoformat(typed.strip()).isoformat()
    except ValueError:
        raise Usage(f'polebook report: --date: "{typed}" is no date', "write it like --date 2026-05-04",
                    "a date is year, month and day") from None


def _spread(chain: Chain, builds: int | None, seed: int | None, out: Out) -> dict[str, Any] | None:
    """What the spread came to; None where it was stopped, for half a spread has no place in a review."""
    from polebook.plan.spread import model  # deferred: few reviews ask for one
    from polebook.plan.spread_document import document

    result = done(model.Request(chain, model.BUILDS if builds is None else builds,
                                model.SEED if seed is None else seed), out)
    return document(result, None) if result.complete else None


COMMAND = Command(_ABOUT, _arguments, _run)
