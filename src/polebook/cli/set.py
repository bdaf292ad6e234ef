"""`polebook set FILE PATH VALUE`: one value changed, everything else as it was."""

from __future__ import annotations

import argparse

from polebook.cli.command import Command
from polebook.cli.edit import change
from polebook.cli.out import Out

_ABOUT = """Change one value in a chain file, or add the key. Comments, order and every other line stay.

PATH is written like
  Q1.rc           a key of a stage           target.upper     of a target
  device.D.beta   of a card                  Q1.tolerance.rc  a stage's own tolerance
  source.couple   of source, load, supply    L1.arms.2.shunt_c  of the second arm of a ladder

An edit that would add a fault is refused, with the reason. One that leaves fewer faults than before is taken;
what remains is listed."""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("path", metavar="PATH", help="which value, such as Q1.rc")
    parser.add_argument("value", metavar="VALUE", help="as in the file, without its quotes: 4k7, 100n, '60 dB'")


def _prepare(rest: list[str]) -> list[str]:
    """A value such as -4k7 is no option: it stands behind FILE and PATH."""
    return [*rest[:2], "--", rest[2]] if len(rest) == 3 and not rest[0].startswith("-") else rest


def _run(args: argparse.Namespace, out: Out) -> int:
    from polebook.chain import edits  # deferred: --help needs no reader

    return change(args.file, lambda text: edits.set_value(text, args.file, args.path, args.value), out)


COMMAND = Command(_ABOUT, _arguments, _run, _prepare)
