"""`polebook audit FILE...`: does each chain reach its targets?"""

from __future__ import annotations

import argparse
from time import monotonic
from typing import TYPE_CHECKING, Any

from polebook.cli.command import FAULT, MET, MISSED, Command
from polebook.cli.out import Out
from polebook.problem import Problem, ProblemsFound

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

_ABOUT = """Does each chain reach its targets? One line a target: wanted, got, margin.

A target for the yield is judged by 10000 built chains from seed 1, the same as
polebook spread makes; a file without one builds nothing.

exit codes: 0 all met, or no targets set; 1 one is missed or not judged; 2 a file is at fault
(the others are judged all the same)"""

QUICK_S, REPAINT_S = 0.4, 0.1  # what is built by then shows no progress; least time between two paints


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
        spread = _built(ledger, file, out) if "target.yield" in chain.given and ledger.judged else None
        document = build.document(ledger, (build.BAND, "targets", *(() if ledger.judged else ("verdict",))))
    except ProblemsFound as found:
        out.found(found)
        problems = [_problem(problem) for problem in found.problems]
        return {"file": file, "digest": None, "targets": None, "spread": None, "exit": FAULT, "problems": problems}
    targets = list(document["targets"] or [])
    if not quiet:
        from polebook.report.audit import audit

        out.write(audit(file, {**document, "spread": spread}, out.look))
    # targets that an unstable chain could not even be asked for are missed, not absent
    unasked = document["targets"] is None and chain.has_targets
    code = MISSED if unasked or any(entry["met"] is not True for entry in targets) else MET
    return {"file": file, "digest": document["chain"]["digest"], "targets": targets, "spread": spread, "exit": code,
            "problems": []}


def _built(ledger: Ledger, file: str, out: Out) -> dict[str, Any] | None:
    """Hands the ledger its yield; what that was found from, None where the chain has no target to build for."""
    from polebook.book.asked import Built
    from polebook.plan import yielded  # deferred: few files ask for a yield

    result, next_s = None, monotonic() + QUICK_S
    try:
        for done, total, so_far in yielded.built(ledger.chain):
            result = so_far
            if (now_s := monotonic()) > next_s:
                next_s = now_s + REPAINT_S
                out.progress(f" {file}: {done} of {total} built (ctrl-c stops)")
        built, row = yielded.answer(result)
        ledger.hand(built)
    except ProblemsFound:  # the chain itself has figures: only its yield is lost
        ledger.hand(Built(None, "its builds can't be computed"))
        row = None
    finally:
        out.progress("")
    return row


def _problem(problem: Problem) -> dict[str, Any]:
    place = problem.place
    where = {"line": place.line, "column": place.column} if place else {"line": None, "column": None}
    return {**where, "what": problem.what, "why": problem.why, "fix": problem.fix, "severity": problem.severity}


COMMAND = Command(_ABOUT, _arguments, _run)
