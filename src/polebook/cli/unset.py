"""`polebook unset FILE PATH`: one key taken out, everything else as it was."""

from __future__ import annotations

import argparse

from polebook.cli.command import Command
from polebook.cli.edit import change
from polebook.cli.out import Out

_ABOUT = """Take one key out of a chain file, so that its default holds. Every other line stays.

PATH is written as for polebook set: Q1.c_comp, target.peaking, device.D.early_voltage.
Refused where the file would then have a fault that it does not have now."""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("path", metavar="PATH", help="which key, such as Q2.c_comp")


def _run(args: argparse.Namespace, out: Out) -> int:
    from polebook.chain import edits  # deferred: --help needs no reader

    return change(args.file, lambda text: edits.unset(text, args.file, args.path), out)


COMMAND = Command(_ABOUT, _arguments, _run)
