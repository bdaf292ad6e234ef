"""`polebook draw FILE`: one drawing of a chain as SVG."""

from __future__ import annotations

import argparse
import os

from polebook.cli.bench import unread
from polebook.cli.command import FAULT, Command, Usage
from polebook.cli.out import Out
from polebook.problem import Place, Problem
from polebook.report.svg.drawings import WHAT, drawing, missing

STANDARD = "-"
_ABOUT = """Draw a chain as SVG, readable in black and white:
  response  gain and phase, the edges, the wanted edges as limits, poles, zeros
  account   dB lost at each node against its allotment; who owns each edge
  pulse     the step response with rise, overshoot and settling
  levels    noise floor, smallest and largest signal, clip level, node by node

The same file gives the same drawing, to the byte. A file that is there is
written over where it is a drawing of polebook that nobody has edited, else only
with --force. Without -o, or with -o -, the drawing goes to the standard output.
A sweep of a [[bench]] that was measured at the load lies over the response.

examples:
  polebook draw chain.toml -o response.svg
  polebook draw chain.toml --what levels -o levels.svg"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--what", choices=WHAT, default=next(iter(WHAT)), help="what to draw (default response)")
    parser.add_argument("-o", "--output", metavar="OUT.svg", default=STANDARD, help="the file to write")
    parser.add_argument("--force", action="store_true", help="write over whatever stands there")


def _run(args: argparse.Namespace, out: Out) -> int:
    name = named("draw", args.output, (".svg",))
    from polebook.chain import read  # deferred: --help needs no reader

    chain = read.load(args.file)
    from polebook.record import documents

    if name:
        documents.check([name], args.file, args.force)
    from polebook.book.build import ledger  # deferred: a faulty file is told without numpy, 75 ms sooner
    from polebook.record.bench import overlays
    from polebook.record.curves import drawn

    benches = overlays(chain, os.path.dirname(args.file))
    document = drawn(ledger(chain), benches)
    why = missing(document, args.what)
    if why:
        out.problems([Problem(Place(args.file), why, f"{args.what} is drawn from that",
                              "mend the chain (polebook show tells what is wrong), or draw something else: --what")])
        return FAULT
    text = documents.marked(drawing(document, args.what), "draw")
    if name:
        documents.save({name: text})
        out.write(f" {out.look.text(name)}: {out.look.text(WHAT[args.what][0])}\n")
    else:  # a stream without these characters has them as XML spells them
        out.write(text if out.look.has(text) else text.encode("ascii", "xmlcharrefreplace").decode("ascii"))
    return unread(benches, out)


def named(command: str, name: str, endings: tuple[str, ...]) -> str:
    """The file of -o, "" for the standard output. Raises Usage where its name does not tell that it is a document."""
    if name == STANDARD:
        return ""
    if not name.lower().endswith(endings):
        raise Usage(f'polebook {command}: -o: "{name}" does not end in {" or ".join(endings)}',
                    f"name the file like -o review{endings[0]}; -o - is the standard output",
                    "so that no chain file is written over by a slip")
    return name


COMMAND = Command(_ABOUT, _arguments, _run)
