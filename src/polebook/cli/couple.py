"""`polebook couple FILE --lower 20`: coupling and bypass capacitors for a lower edge."""

from __future__ import annotations

import argparse
from typing import Any

from polebook.cli.command import MET, Command
from polebook.cli.out import Out
from polebook.cli.quantities import names, quantity
from polebook.cli.table_file import check, csv_option, deliver

_ABOUT = """Size the coupling and bypass capacitors of a chain for a wanted lower edge with
the least total capacitance: solved on the chain itself, taken from the file's
series ([preferred] capacitor), verified by a full ledger. The edge as proposed
is never above the wanted one.

At the least total every capacitor owns of the edge what it has of the
capacitance, so that no farad would serve better elsewhere. None gets a corner
of its own above the wanted edge, and the response may rise at its lower end by
no more than target.peaking (0.1 dB without one), or than it does today.

Beside the proposal stand today's values and two rules: every corner at the n-th
part of the edge; and every corner where n like ones, each behind a buffer, make
the edge.

--free names the capacitors that may change: Q1.couple,Q1.ce,load.couple.
Without it these are the ones that a `free` of the file lists; without that all
that are couplings or bypasses. The file is changed only with --write.

example:
  polebook couple chain.toml --lower 20"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--lower", metavar="HZ", help="the wanted lower edge (default: target.lower of the file)")
    parser.add_argument("--free", metavar="KEY,...", default="", help="capacitors that may change, such as Q1.couple")
    parser.add_argument("--write", action="store_true", help="put the proposal into the file")
    output = parser.add_mutually_exclusive_group()
    output.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")
    csv_option(output)


def _run(args: argparse.Namespace, out: Out) -> int:
    check(args.csv, args.file)
    wanted = None if args.lower is None else quantity("couple", "--lower", args.lower, "frequency")
    from polebook.chain import read  # deferred: --help needs no reader
    from polebook.text import files

    text = files.read(args.file).text
    chain = read.parse(text, args.file)
    from polebook.plan.couple import couple  # deferred: a faulty file is told without numpy, 75 ms sooner

    found = couple(text, args.file, wanted, names(args.free))
    edit = found.proposal.edit
    if args.write and edit:
        files.save(args.file, edit.apply(text))
    answer: dict[str, Any] = {
        "format": 1, "command": "couple",
        "files": [{"file": args.file, "digest": chain.digest, **found.document(),
                   "written": args.write and bool(edit)}],
    }
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.couple import couple_csv, couple_text

        deliver(args.csv, lambda: couple_csv(answer), lambda: couple_text(answer, out.look), args.file, out)
    return MET


COMMAND = Command(_ABOUT, _arguments, _run)
