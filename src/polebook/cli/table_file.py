"""The option --csv [FILE], and where its table goes."""

from __future__ import annotations

import argparse
import os
from collections.abc import Callable
from typing import Protocol

from polebook.cli.command import Usage
from polebook.cli.out import Out

STANDARD = "-"


class _Options(Protocol):
    def add_argument(
        self, *names: str, metavar: str, nargs: str, const: str, type: Callable[[str], str], help: str
    ) -> object: ...


_PAGE = "as CSV, units in its heading, at full precision; with a name ending in .csv into that file"


def csv_option(options: _Options, told: str = _PAGE) -> None:
    """--csv alone is the standard output; with a name, a file of that name. `told` is its line of help."""
    options.add_argument(
        "--csv", metavar="OUT.csv", nargs="?", const=STANDARD, type=_table_name, help=told,
    )


def _table_name(name: str) -> str:
    """`name` where a table may be written there: no chain file is to be written over by a slip."""
    if name != STANDARD and not name.lower().endswith(".csv"):
        raise argparse.ArgumentTypeError(f'"{name}" does not end in .csv; write --csv last for the standard output')
    return name


def check(name: str | None, chain: str) -> None:
    """Raises Usage where --csv names the chain itself."""
    if name is not None and os.path.realpath(name) == os.path.realpath(chain):
        raise Usage(f'--csv: "{name}" is the chain itself', "choose another name for the table",
                    "the table would be written over it")


def deliver(name: str | None, table: Callable[[], str], text: Callable[[], str], chain: str, out: Out) -> None:
    """The text where no CSV is asked for; the CSV to the standard output, or to its file and the text beside it."""
    if name is None:
        out.write(text())
    elif name == STANDARD:
        out.write(table())
    else:
        from polebook.text import files

        files.save(name, table())
        out.write(text())
        out.write(f" {out.look.text(name)}: the same as CSV\n")
