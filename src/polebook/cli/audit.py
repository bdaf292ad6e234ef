"""`polebook audit FILE...`: does each chain reach its targets, and does its record still hold?"""

from __future__ import annotations

import argparse
import os
from typing import TYPE_CHECKING, Any

from polebook.cli.built import hand_yield
from polebook.cli.command import FAULT, MET, MISSED, Command
from polebook.cli.out import Out
from polebook.problem import Problem, ProblemsFound

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

_ABOUT = """Does each chain reach its targets? One line a target: wanted, got, margin.

A target for the yield is judged by 10000 built chains from seed 1, the same as
polebook spread makes; a file without one builds nothing.

Where there is a record beside a file (polebook post writes it) an audit says when
it is older than the file, or when polebook has other figures for the file by now.
With --posted that counts as missed, and so does a file of which nothing is posted.
The name of a record stands for its chain, so that *.toml may be told.

exit codes: 0 all met, or no targets set; 1 one is missed or not judged, or with
--posted a record does not hold; 2 a file is at fault (the others are judged all
the same)

examples:
  polebook audit chains/*.toml
  polebook audit --posted chains/*.toml"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("files", metavar="FILE", nargs="+", help="chain files (TOML)")
    parser.add_argument("--posted", action="store_true", help="the record of every file must be there, and hold")
    parser.add_argument("--json", action="store_true", help="the verdicts as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    done = [_judge(file, out, args.json, args.posted) for file in _chains(args.files)]
    code: int = max(entry["exit"] for entry in done)
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump({"format": 1, "command": "audit", "files": done, "exit": code}))
    return code


def _chains(files: list[str]) -> list[str]:
    """The files, a record's chain in its place where that is not named as well."""
    from polebook.record.posted_names import chain_of  # deferred: --help needs none of it

    chains = [(file, chain_of(file)) for file in files]
    plain = {os.path.normpath(file) for file, chain in chains if chain is None}
    return [chain or file for file, chain in chains if chain is None or os.path.normpath(chain) not in plain]


def _judge(file: str, out: Out, quiet: bool, strict: bool) -> dict[str, Any]:
    """The entry of one file in the JSON answer; its text is written as soon as it is known, unless `quiet`."""
    from polebook.chain import read

    try:
        chain = read.load(file)
        from polebook.book import build  # deferred: a faulty file is told without numpy, 75 ms sooner

        ledger = build.ledger(chain)  # leverage, which the verdict takes, is more than an audit asks for
        spread = hand_yield(ledger, file, out)
        document = build.document(ledger, (build.BAND, "targets", *(() if ledger.judged else ("verdict",))))
    except ProblemsFound as found:
        out.found(found)
        problems = [_problem(problem) for problem in found.problems]
        return {"file": file, "digest": None, "targets": None, "spread": None, "posted": None, "exit": FAULT,
                "problems": problems}
    posted, problems = _posted(file, ledger, out)
    targets = list(document["targets"] or [])
    if not quiet:
        from polebook.report.audit import audit

        out.write(audit(file, {**document, "spread": spread, "posted": posted}, out.look, strict))
    # targets that an unstable chain could not even be asked for are missed, not absent
    unasked = document["targets"] is None and chain.has_targets
    code = MISSED if unasked or any(entry["met"] is not True for entry in targets) else MET
    if strict and posted["state"] != "current":
        code = FAULT if problems else MISSED
    return {"file": file, "digest": document["chain"]["digest"], "targets": targets, "spread": spread,
            "posted": posted, "exit": code, "problems": problems}


def _posted(file: str, ledger: Ledger, out: Out) -> tuple[dict[str, Any], list[dict[str, Any]]]:
    """How the record stands to the file, and what is wrong with the record."""
    from polebook.record.posted_names import record_of  # deferred: --help needs none of it

    name = record_of(file)
    row: dict[str, Any] = {"state": "none", "record": name, "date": None, "digest": None, "message": None,
                           "version": None, "moved": []}
    if not os.path.lexists(name):
        return row, []
    from polebook.record import post as record  # deferred: few files have a record; saves the others 4 ms

    try:
        standing = record.standing(file, ledger)
    except ProblemsFound as found:
        out.found(found)
        return {**row, "state": "fault"}, [_problem(problem) for problem in found.problems]
    if newest := standing.newest:
        row |= {"date": newest.date.isoformat(), "digest": newest.digest, "message": newest.message,
                "version": newest.version}
    moved = [{"figure": one.name, "posted": one.before, "now": one.after} for one in standing.moved]
    return {**row, "state": standing.state, "moved": moved}, []


def _problem(problem: Problem) -> dict[str, Any]:
    place = problem.place
    where = {"line": place.line, "column": place.column} if place else {"line": None, "column": None}
    return {**where, "what": problem.what, "why": problem.why, "fix": problem.fix, "severity": problem.severity}


COMMAND = Command(_ABOUT, _arguments, _run)
