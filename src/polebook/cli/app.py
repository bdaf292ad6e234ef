"""`polebook FILE`: the app on a terminal; the ledger as text where the output goes elsewhere."""

from __future__ import annotations

import argparse
import gc
import os
import sys
from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

from polebook.cli.command import Command
from polebook.cli.out import Out
from polebook.problem import ProblemsFound

if TYPE_CHECKING:
    from polebook.tui.guardian import Guardian
    from polebook.tui.view import State
from polebook.tui import setting

PLAIN = "--plain"
_ABOUT = """Open a chain file in the terminal app; where the output is no terminal, or TERM is dumb, print its ledger.
A file that does not exist becomes a new chain."""


def asked_for(argv: list[str]) -> bool:
    """Whether these words ask for the app: a file, and at most `--plain`."""
    return len([word for word in argv if word != PLAIN]) == 1


def usable(environ: Mapping[str, str] = os.environ) -> bool:
    """Whether the app can open: a person at both ends, and a terminal that can place its cursor."""
    ends = (sys.__stdin__, sys.__stdout__)
    if sys.stdout is not sys.__stdout__ or any(end is None or end.closed or not end.isatty() for end in ends):
        return False
    return environ.get("TERM", "dumb") not in ("", "dumb", "unknown")


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument(PLAIN, action="store_true", help="nothing but ASCII on the screen")


def _run(args: argparse.Namespace, out: Out) -> int:
    if not usable():
        from polebook.cli.main import load

        show = load("show")
        plain = args.plain or (out.out.isatty() and setting.ascii_only())
        look = replace(out.look, encoding="ascii") if plain else out.look
        return show.run(show.parser("show").parse_args(["--", args.file]), replace(out, look=look))
    gc.disable()  # starting makes many objects and no garbage: a tenth sooner on the screen; `run` collects again
    setting.settle()
    guardian = _locked(args.file)
    try:
        state = _opened(guardian, args.file, args.plain or setting.ascii_only(), setting.colours())
    except ProblemsFound:
        raise
    except Exception as error:
        return _failed(guardian, args.file, error)
    from polebook.tui.app import run  # deferred: a file that can't be read is told without Textual, 200 ms sooner

    return run(state, guardian)


def _locked(path: str) -> Guardian:
    from polebook.tui.guardian import Guardian  # deferred: where it prints, none of it is needed

    return Guardian(path)


def _opened(guardian: Guardian, path: str, plain: bool, colour: bool) -> State:
    """The file open, and what is kept of its unsaved work offered. Raises ProblemsFound, that told with them."""
    from polebook.tui.control import opening  # deferred: where it prints, none of it is needed

    try:
        return guardian.opened(opening(path, plain, colour))
    except ProblemsFound as found:
        guardian.close()
        raise ProblemsFound((*found.problems, *guardian.left()), found.text) from None


def _failed(guardian: Guardian, path: str, error: Exception) -> int:
    """A fault of ours before anything was shown."""
    from polebook.tui import ending  # deferred: it is hardly ever needed

    guardian.close()
    ending.tell(path, guardian, ending.FAULT, guardian.report(ending.report(error)))
    return ending.FAULT


COMMAND = Command(_ABOUT, _arguments, _run)
