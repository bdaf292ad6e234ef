"""`polebook parts FILE`: what to buy and solder."""

from __future__ import annotations

import argparse

from polebook.cli.command import MET, Command
from polebook.cli.out import Out
from polebook.cli.table_file import check, csv_option, deliver

_ABOUT = """The fitted parts of a chain: resistors, capacitors and inductors by value and
tolerance, and devices by card, each with its count and where it is used.

A value that is not of the file's preferred series ([preferred]) is marked.
Source, load, wiring and stages left out are not fitted, and said to be."""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    output = parser.add_mutually_exclusive_group()
    output.add_argument("--json", action="store_true", help="the list as JSON")
    csv_option(output)


def _run(args: argparse.Namespace, out: Out) -> int:
    check(args.csv, args.file)
    from polebook.chain import read
    from polebook.plan.parts import parts

    chain = read.load(args.file)
    listed = parts(chain)
    answer = {"format": 1, "command": "parts", "files": [{"file": args.file, "digest": chain.digest}], **listed}
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.parts import parts_csv, parts_text

        deliver(args.csv, lambda: parts_csv(answer), lambda: parts_text(answer, out.look), args.file, out)
    return MET


COMMAND = Command(_ABOUT, _arguments, _run)
