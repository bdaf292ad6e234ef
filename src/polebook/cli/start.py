"""`polebook start FILE`: a new chain that computes at once."""

from __future__ import annotations

import argparse

from polebook.cli.command import MET, Command, Usage
from polebook.cli.out import Out

_ABOUT = """Write a new chain that computes at once: stages of the kinds you name, biased
for the rail with preferred values, and cards with typical figures that you
replace by those of your devices. A file that is there is never written over.

polebook kinds lists the kinds. A FET stage takes a junction FET;
common-source:mosfet takes the other sort. Without --rail it is 12 V, and 250 V
where a valve is among the kinds.

examples:
  polebook start new.toml
  polebook start new.toml --kinds common-source,cascode,emitter-follower"""
# option -> dimension, what the message calls it
_QUANTITIES = {"rail": "voltage", "negative": "voltage", "source": "resistance", "load": "resistance"}


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="the file to write (TOML)")
    parser.add_argument("--kinds", metavar="KIND,...", help="kinds of stages from source to load "
                        "(default common-emitter,emitter-follower)")
    parser.add_argument("--rail", metavar="V", help="positive rail, 3 V to 600 V")
    parser.add_argument("--negative", metavar="V", help="negative rail, with its sign (default none)")
    parser.add_argument("--source", metavar="OHM", help="source resistance (default 600R; with a transimpedance "
                        "stage first, a photodiode of 10M)")
    parser.add_argument("--load", metavar="OHM", help="load resistance (default 10k)")


def _prepare(rest: list[str]) -> list[str]:
    """--negative -12V is a value, not an option."""
    done: list[str] = []
    for word in rest:
        if done and done[-1] == "--negative":
            done[-1] = f"--negative={word}"
        else:
            done.append(word)
    return done


def _run(args: argparse.Namespace, out: Out) -> int:
    given = {name: quantity(name, getattr(args, name)) for name in _QUANTITIES if getattr(args, name) is not None}
    from polebook.chain import read, start  # deferred: --help needs no reader
    from polebook.text import files

    kinds = start.DEFAULT if args.kinds is None else [word for word in args.kinds.split(",") if word.strip()]
    text = start.new_chain(kinds, **given)
    chain = read.parse(text, args.file)
    files.create(args.file, text)
    from polebook.book import build  # deferred: what can't be written is told without numpy, 75 ms sooner

    overall = build.overall(build.ledger(chain))
    from polebook.report.start import started

    names = [(stage.name, stage.kind) for stage in chain.stages]
    out.write(started(args.file, names, chain.numbers["supply.positive"], overall, out.look))
    return MET


def quantity(option: str, typed: str) -> float:
    """The value of an option in SI units. Raises Usage with the reason where it is none."""
    from polebook.quantity import Refused, parse

    try:
        return parse(typed, _QUANTITIES[option])
    except Refused as refused:
        raise Usage(f"polebook start: --{option}: {refused.what}", refused.fix, refused.why) from None


COMMAND = Command(_ABOUT, _arguments, _run, _prepare)
