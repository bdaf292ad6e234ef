"""`polebook card FILE NAME --from OTHER`: a device card taken over from another chain file."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from polebook.cli.command import Command
from polebook.cli.edit import change
from polebook.cli.out import Out

if TYPE_CHECKING:
    from polebook.problem import Problem
    from polebook.text.edit import Edit

_ABOUT = """Take the table [device.NAME] over from another chain file, its comments with
it. It goes after the last card of FILE; every other line stays.

Refused where FILE has another card of that name. Where it has the same one,
nothing is changed.

example:
  polebook card new.toml VF --from chains/wire-break-listener.toml"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="the chain file that gets the card (TOML)")
    parser.add_argument("name", metavar="NAME", help="the card's name, as in [device.NAME]")
    parser.add_argument("--from", dest="other", metavar="OTHER", required=True, help="the chain file that has it")


def _run(args: argparse.Namespace, out: Out) -> int:
    from polebook.chain import take  # deferred: --help needs no reader
    from polebook.text import files

    theirs = files.read(args.other).text

    def taking(text: str) -> tuple[Edit, list[Problem]]:
        return take.take_card(text, args.file, args.name, theirs, args.other)

    return change(args.file, taking, out, "it has this card already")


COMMAND = Command(_ABOUT, _arguments, _run)
