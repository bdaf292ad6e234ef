"""`polebook spread FILE`: many built chains with parts off by their tolerances, and what they do."""

from __future__ import annotations

import argparse
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from polebook.cli.command import INTERRUPTED, MET, Command, Usage
from polebook.cli.out import Out, Pace
from polebook.cli.quantities import whole
from polebook.cli.table_file import STANDARD, check, csv_option
from polebook.report.look import Look

if TYPE_CHECKING:
    from polebook.chain.model import Chain
    from polebook.plan.spread.model import Request, Result

_ABOUT = """Build the chain many times, every part off by its tolerance, and judge each:
gain, both edges and peaking; how many builds meet the targets; the worst corner
of the tolerances, solved; and which tolerance costs the most yield.

Tolerances are those of [tolerance] and of the stages. The bias of each build is
solved again; a quiescent current that the file states stands. What a build is
off by depends on the seed and its number alone: the same seed gives the same
builds, also after an edit, so that before and after can be compared.

Ctrl-C stops, and shows what is done so far.

examples:
  polebook spread chain.toml --builds 100000 --seed 7
  polebook spread chain.toml --temperature -20:60"""
BAR = 24
_TEMPERATURE = "supply.temperature"


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--builds", metavar="N", help="how many chains to build (default 10000)")
    parser.add_argument("--seed", metavar="N", help="which builds: a whole number (default 1)")
    parser.add_argument("--temperature", metavar="LOW:HIGH",
                        help="spread the temperature too, evenly between two in °C: -20:60; one alone stands")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")
    csv_option(parser, "every build as CSV, units in its heading, at full precision; with a name ending in .csv into "
                       "that file")


def _prepare(rest: list[str]) -> list[str]:
    """A range such as -20:60 is no option."""
    return [f" {word}" if word[:1] == "-" and ":" in word and word[1:2].isdigit() else word for word in rest]


def _run(args: argparse.Namespace, out: Out) -> int:
    check(args.csv, args.file)
    if args.json and args.csv == STANDARD:
        raise Usage("polebook spread: --json and --csv both go to the standard output", "name a file: --csv builds.csv")
    builds, seed = (whole("spread", option, typed, example) for option, typed, example in
                    (("--builds", args.builds, "10000"), ("--seed", args.seed, "1")))
    limits = None if args.temperature is None else temperature(args.temperature)
    from polebook.chain import read

    chain = read.load(args.file)
    from polebook.plan.spread import model  # deferred: a faulty file is told without numpy, 75 ms sooner

    request = model.Request(chain, model.BUILDS if builds is None else builds, model.SEED if seed is None else seed)
    result = done(_at(request, limits), out)
    _tell(args, chain, result, limits, out)
    return MET if result.complete else INTERRUPTED


def temperature(typed: str) -> tuple[float, float]:
    """Both ends of --temperature, °C. Raises Usage with the reason where it is no range."""
    from polebook.quantity import Refused, parse

    parts = typed.strip().split(":")
    try:
        ends = [parse(part.strip(), "temperature") for part in parts]
    except Refused as refused:
        raise Usage(f"polebook spread: --temperature: {refused.what}", "write it like --temperature -20:60",
                    refused.why) from None
    if len(ends) > 2:
        raise Usage(f'polebook spread: --temperature: "{typed.strip()}" is no range',
                    "write it like --temperature -20:60", "a range has two ends")
    return ends[0], ends[-1]


def _at(request: Request, limits: tuple[float, float] | None) -> Request:
    """The request at a temperature, or over a range of it."""
    if limits is None:
        return request
    from polebook.plan.spread.alone import with_numbers
    from polebook.plan.spread.model import check as checked

    asked = replace(request, temperature=limits)
    checked(asked)
    if limits[0] < limits[1]:
        return asked
    return replace(request, chain=with_numbers(request.chain, {_TEMPERATURE: limits[0]}))


def done(request: Request, out: Out) -> Result:
    """The whole spread; after ctrl-c what there is of it. Raises KeyboardInterrupt where that is nothing."""
    from polebook.book.reach import within_reach
    from polebook.plan import pacing
    from polebook.plan.spread import run

    result: Result | None = None
    pace = Pace()
    look = Look(encoding=out.err.encoding or "utf-8")
    try:
        with within_reach(request.chain):
            request, _ = pacing.paced(request)
            for solved, total, result in run.spread(request):
                if pace.due():
                    out.progress(_progress(result, solved / total, look))
    except KeyboardInterrupt:
        if result is None:
            out.progress("")
            raise
    out.progress("")
    assert result is not None  # a request has at least one build
    return result


def _progress(result: Result, share: float, look: Look) -> str:
    """How far it has come, all of it and the builds."""
    bar = look.bar(share, BAR)
    what = f"{result.done} of {result.request.builds} built"
    if result.done == result.request.builds:
        what = "what a tighter part would bring"
    return f" {bar}{look.text('·') * (BAR - len(bar))} {what} (ctrl-c stops)"


def _tell(args: argparse.Namespace, chain: Chain, result: Result, limits: tuple[float, float] | None, out: Out) -> None:
    """The answer as text, JSON or CSV; a file for the CSV is written whole or not at all, behind the text."""
    from polebook.plan.spread_document import document, rows
    from polebook.report.spread_csv import builds_csv

    answer: dict[str, Any] = {"format": 1, "command": "spread", "files": [{"file": args.file, "digest": chain.digest}],
                              **document(result, limits)}
    if args.csv == STANDARD:
        for piece in builds_csv(answer, rows(result)):
            out.write(piece)
        return
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.spread import spread

        out.write(spread(answer, out.look))
    if args.csv:
        from polebook.text import files

        files.save(args.csv, builds_csv(answer, rows(result)))
        if not args.json:
            out.write(f" {out.look.text(args.csv)}: every build as CSV\n")


COMMAND = Command(_ABOUT, _arguments, _run, _prepare)
