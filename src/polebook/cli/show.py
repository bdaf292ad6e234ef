"""`polebook show FILE`: the ledger as text or JSON."""

from __future__ import annotations

import argparse

from polebook.cli.command import MET, Command, Usage
from polebook.cli.out import Out
from polebook.report.pages import LEDGER, PAGES

_ABOUT = """Print the ledger of a chain file: targets, lines, nodes, account and cautions.

--page shows one bank of figures at length:
  lines    gain, loading, resistances, and the Miller split of every bridge
  nodes    resistance, capacitance, pole and loss of every node
  parts    every part: value, time constant, owned share of both edges
  bias     currents and voltages, the d.c. plan
  account  what each node loses of what it was allotted
  all      everything"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--page", choices=[name for name in PAGES if name != LEDGER], help="one bank of figures")
    parser.add_argument("--at", metavar="HZ", help="each line's gain, phase and loss at one frequency, such as 100k")
    parser.add_argument("--json", action="store_true", help="the whole ledger as JSON, at full precision")


def frequency(text: str) -> float:
    """The frequency of --at in Hz. Raises Usage with the reason where it is none."""
    from polebook.quantity import Refused, parse

    try:
        hertz = parse(text, "frequency")
    except Refused as refused:
        raise Usage(f"polebook show: --at: {refused.what}", refused.fix, refused.why) from None
    if hertz <= 0:
        raise Usage(f'polebook show: --at: "{text}" is not above 0 Hz', "give a frequency such as --at 100k")
    return hertz


def _run(args: argparse.Namespace, out: Out) -> int:
    hertz = None if args.at is None else frequency(args.at)
    from polebook.chain import read

    chain = read.load(args.file)
    from polebook.book import build  # deferred: a faulty file is told without numpy, 75 ms sooner

    ledger = build.ledger(chain)
    document = dict(build.document(ledger))
    if hertz is not None:
        document["at"] = build.at(ledger, hertz)
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(document))
    else:
        from polebook.report.pages import page

        out.write(page(document, args.page or LEDGER, out.look, args.file))
    return MET


COMMAND = Command(_ABOUT, _arguments, _run)
