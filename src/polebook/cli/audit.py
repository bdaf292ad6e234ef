"""`polebook audit FILE...`: does each chain reach its targets?"""

from __future__ import annotations

import argparse
from typing import Any

from polebook.cli.command import FAULT, MET, MISSED, Command
from polebook.cli.out import Out
from polebook.problem import Problem, ProblemsFound

_ABOUT = """Does each chain reach its targets? One line a target: wanted, got, margin.

exit codes: 0 all met, or no targets set; 1 one is missed or not judged; 2 a file is at fault
(the others are judged all the same)"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("files", metavar="FILE", nargs="+", help="chain files (TOML)")
    parser.add_argument("--json", action="store_true", help="the verdicts as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    done = [_judge(file, out, args.json) for file in args.files]
    code: int = max(entry["exit"] for entry in done)
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump({"format": 1, "command": "audit", "files": done, "exit": code}))
    return code


def _judge(file: str, out: Out, quiet: bool) -> dict[str, Any]:
    """The entry of one file in the JSON answer; its text is written as soon as it is known, unless `quiet`."""
    from polebook.chain import read

    try:
        chain = read.load(file)
        from polebook.book import build  # deferred: a faulty file is told without numpy, 75 ms sooner

        ledger = build.ledger(chain)  # leverage, which the verdict takes, is more than an audit asks for
        document = build.document(ledger, (build.BAND, "targets", *(() if ledger.judged else ("verdict",))))
    except ProblemsFound as found:
        out.found(found)
        problems = [_problem(problem) for problem in found.problems]
        return {"file": file, "digest": None, "targets": None, "exit": FAULT, "problems": problems}
    targets = list(document["targets"] or [])
    if not quiet:
        from polebook.report.audit import audit

        out.write(audit(file, document, out.look))
    # targets that an unstable chain could not even be asked for are missed, not absent
    unasked = document["targets"] is None and chain.has_targets
    code = MISSED if unasked or any(entry["met"] is not True for entry in targets) else MET
    return {"file": file, "digest": document["chain"]["digest"], "targets": targets, "exit": code, "problems": []}


def _problem(problem: Problem) -> dict[str, Any]:
    place = problem.place
    where = {"line": place.line, "column": place.column} if place else {"line": None, "column": None}
    return {**where, "what": problem.what, "why": problem.why, "fix": problem.fix, "severity": problem.severity}


COMMAND = Command(_ABOUT, _arguments, _run)
