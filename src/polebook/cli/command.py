"""What a command is, and the parser that every command gets."""

from __future__ import annotations

import argparse
from collections.abc import Callable
from dataclasses import dataclass
from typing import NoReturn

from polebook.cli.out import Out

MET, MISSED, FAULT, INTERRUPTED, NO_READER = 0, 1, 2, 130, 141


class Usage(Exception):
    """The command line itself is at fault. `fix` says how to mend it."""

    def __init__(self, what: str, fix: str, why: str = "") -> None:
        super().__init__(what)
        self.what, self.why, self.fix = what, why, fix


class Parser(argparse.ArgumentParser):
    """An argument parser whose faults are Usage, so that they are told like any other fault."""

    def error(self, message: str) -> NoReturn:
        raise Usage(f"{self.prog}: {message}", f"{self.prog} --help tells what it takes")


@dataclass(frozen=True, slots=True)
class Command:
    """`arguments` fills a parser; `run` does the work and returns the exit code; `prepare` sees the words first."""

    about: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace, Out], int]
    prepare: Callable[[list[str]], list[str]] = list

    def parser(self, name: str) -> Parser:
        """The parser of `polebook NAME`."""
        parser = Parser(
            prog=f"polebook {name}",
            description=self.about,
            formatter_class=argparse.RawDescriptionHelpFormatter,
            allow_abbrev=False,
        )
        self.arguments(parser)
        return parser
