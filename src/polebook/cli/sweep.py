"""`polebook sweep FILE PATH RANGE`: one value over a range, and what moves with it."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from polebook.cli.command import INTERRUPTED, MET, Command, Usage
from polebook.cli.out import Out, Pace
from polebook.cli.table_file import check, csv_option, deliver
from polebook.series import NAMES

if TYPE_CHECKING:
    from polebook.plan.ranges import Swept
    from polebook.plan.sweep import Point

_ABOUT = """Put one value of a chain through a range: gain and both edges at each point.
The file is not changed; the value that it has now is marked among the points.

PATH is written as for polebook set: Q1.rc, source.resistance, device.D.beta
RANGE is two values with a colon between, both included: 1k:10k, 0:100p, -15:-5

Steps are of equal ratio. They are of equal size where the range touches or
crosses zero, and for voltages, temperatures, shares and dB that stay dB.
--series walks the values that one can buy.

A point at which the chain has no figures (bias not solved, a node that nothing
holds, no edge) shows dashes, and the reason stands below the table. Ctrl-C
stops, and shows what is done so far.

example:
  polebook sweep chain.toml Q1.rc 1k:10k --series E12 --figure n1.pole"""
POINTS = 25


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("path", metavar="PATH", help="which value, such as Q1.rc")
    parser.add_argument("range", metavar="RANGE", help="first and last value, such as 1k:10k")
    steps = parser.add_mutually_exclusive_group()
    steps.add_argument("--points", metavar="N", help=f"how many values (default {POINTS})")
    steps.add_argument("--series", choices=NAMES, metavar="E12",
                       help=f"the preferred values within the range: {', '.join(NAMES)}")
    parser.add_argument("--figure", metavar="NAME", action="append", default=[],
                        help="a further figure, named as for polebook working: Q1.input_ohm, n1.pole_hz, "
                        "overall.peaking_db; a unique beginning will do; may be given again")
    output = parser.add_mutually_exclusive_group()
    output.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")
    csv_option(output)


def _prepare(rest: list[str]) -> list[str]:
    """A range such as -15:-5 is no option."""
    return [f" {word}" if word[:1] == "-" and ":" in word and word[1:2].isdigit() else word for word in rest]


def _run(args: argparse.Namespace, out: Out) -> int:
    check(args.csv, args.file)
    count = points(args.points)
    from polebook.plan import ranges  # deferred: --help needs no reader
    from polebook.text import files

    text = files.read(args.file).text
    swept = ranges.swept(text, args.file, args.path, args.range.strip(), count, args.series or "")
    answer = _answer(args.file, swept, args.figure, out)
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.sweep import sweep, sweep_csv

        deliver(args.csv, lambda: sweep_csv(answer), lambda: sweep(answer, out.look), args.file, out)
    return INTERRUPTED if answer["stopped"] else MET


def points(typed: str | None) -> int:
    """How many points. Raises Usage where the number is none."""
    from polebook.plan.ranges import MOST_POINTS  # deferred as above

    if typed is None:
        return POINTS
    if not (typed.isdecimal() and typed.isascii() and len(typed) < 9 and 1 <= int(typed) <= MOST_POINTS):
        raise Usage(f'polebook sweep: --points: "{typed}" is no number of points', "write it like --points 50",
                    f"a sweep takes 1 to {MOST_POINTS} of them")
    return int(typed)


def _answer(file: str, swept: Swept, asked: list[str], out: Out) -> dict[str, Any]:
    from polebook.plan import sweep as sweeping  # deferred: a faulty file is told without numpy, 75 ms sooner

    figures = sweeping.resolved(swept.chain, swept.path, swept.values, asked)
    now = None if swept.now is None else next(sweeping.sweep(swept.chain, swept.path, [swept.now], figures))[2]
    done: list[Point] = []
    stopped, pace = False, Pace()
    try:
        for count, total, point in sweeping.sweep(swept.chain, swept.path, swept.values, figures):
            done.append(point)
            if pace.due():
                out.progress(f" {swept.path}: {count} of {total} (ctrl-c stops)")
    except KeyboardInterrupt:
        stopped = len(done) < len(swept.values)
    out.progress("")
    return {
        "format": 1,
        "command": "sweep",
        "files": [{"file": file, "digest": swept.digest}],
        "path": swept.path,
        "unit": _unit(swept),
        "spacing": swept.spacing,
        "gain_unit": "V/V" if swept.chain.source_kind == "voltage" else "V/A",
        "figures": [{"name": figure.name, "unit": figure.unit} for figure in figures],
        "now": None if now is None else _row(now),
        "points": [_row(point) for point in done],
        "total": len(swept.values),
        "stopped": stopped,
    }


def _unit(swept: Swept) -> str:
    from polebook.units import DIMENSIONS

    dimension = swept.param.dimension
    return {"share": "share", "decibel": "dB"}.get(dimension, DIMENSIONS[dimension].unit)


def _row(point: Point) -> dict[str, Any]:
    from math import log10

    return {
        "value": point.value,
        "gain": point.gain,
        "gain_db": 20 * log10(abs(point.gain)) if point.gain else None,
        "lower_edge_hz": point.lower_hz,
        "upper_edge_hz": point.upper_hz,
        **point.figures,
        "why": point.why or None,
    }


COMMAND = Command(_ABOUT, _arguments, _run, _prepare)
