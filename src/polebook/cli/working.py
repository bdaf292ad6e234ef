"""`polebook working FILE FIGURE`: how one figure of the ledger came about."""

from __future__ import annotations

import argparse

from polebook.cli.command import MET, Command
from polebook.cli.out import Out

_ABOUT = """How a figure of the ledger came about: formula, numbers put in, result, and where the
method is published. Without FIGURE, the names of all figures.

FIGURE is written like
  overall.upper_edge_hz   of the chain         Q1.gain               of a line
  n1.pole_hz              of a node            Q1.mid.pole_hz        of an inner one
  Q1.cmu.k                of a bridge          Q2.c_comp.owns_upper  of a part
  bias.Q1.current_a       of a stage's bias    account.upper.lost_db of the account
  target.upper.margin     of a target          poles.1.hz            of a pole
  Q1.rc.leverage.gain     of a part's leverage rail.positive.current_a of a rail
  n1.clip_v               of a level
as the keys of show --json are; a beginning that only one has will do: overall.upper"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("figure", metavar="FIGURE", nargs="?", help="which figure, such as overall.upper_edge_hz")
    parser.add_argument("--json", action="store_true", help="the working as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    from polebook.chain import read

    chain = read.load(args.file)
    from polebook.book import working  # deferred: a faulty file is told without numpy, 75 ms sooner
    from polebook.book.build import ledger
    from polebook.report import working as report
    from polebook.report.jsonout import dump

    of = ledger(chain)
    entry = {"file": args.file, "digest": chain.digest}
    if args.figure is None:
        known = working.names(of)
        answer = {"format": 1, "command": "working", "files": [{**entry, "figures": known}]}
        out.write(dump(answer) if args.json else report.names(known, out.look))
        return MET
    document = working.working(of, args.figure).document()
    answer = {"format": 1, "command": "working", "files": [{**entry, "working": document}]}
    out.write(dump(answer) if args.json else report.working(document, chain.title, args.file, out.look))
    return MET


COMMAND = Command(_ABOUT, _arguments, _run)
