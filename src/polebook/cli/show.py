"""`polebook show FILE`: the ledger as text or JSON."""

from __future__ import annotations

import argparse

from polebook.cli.command import MET, Command, Usage
from polebook.cli.out import Out
from polebook.cli.table_file import check, csv_option, deliver
from polebook.report.pages import DIRECT, HISS, LEDGER, PAGES, STEP

_ABOUT = """Print the ledger of a chain file: targets, lines, nodes, account and cautions.

--page shows one bank of figures at length:
  lines    gain, loading, resistances, and the Miller split of every bridge
  nodes    resistance, capacitance, pole and loss of every node
  parts    every part: value, time constant, owned share of both edges
  times    time constants ranked, and the edges that their sums estimate
  poles    poles and zeros, each with the stage that makes it
  leverage what 1 % more of a part, card figure or stated current moves
  noise    who makes the noise, its density over frequency, its total
  pulse    the step response: rise, overshoot, settling, sag, group delay
  levels   the d.c. plan; then signal, noise and clip level from node to node
  bias     the d.c. plan: currents, voltages, heat, and what each rail feeds
  account  what each node loses of what it was allotted
  all      everything"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--page", choices=[name for name in PAGES if name != LEDGER], help="one bank of figures")
    parser.add_argument("--at", metavar="HZ", help="each line's gain, phase and loss at one frequency, such as 100k")
    output = parser.add_mutually_exclusive_group()
    output.add_argument("--json", action="store_true", help="the whole ledger as JSON, at full precision")
    csv_option(output)


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
    check(args.csv, args.file)
    hertz = None if args.at is None else frequency(args.at)
    from polebook.chain import read

    chain = read.load(args.file)
    from polebook.book import build  # deferred: a faulty file is told without numpy, 75 ms sooner

    ledger = build.ledger(chain)
    document = dict(build.document(ledger))
    if hertz is not None:
        document["at"] = build.at(ledger, hertz)
    if args.page in DIRECT and not args.json:
        from polebook.book.direct import direct  # deferred: no other page tells of the rails one by one

        document["direct"] = direct(ledger)
    if args.page in HISS and not args.json:
        from polebook.book.noise_rows import page as hiss  # deferred with them

        document["noise"] = hiss(ledger)
    if args.page in STEP and not args.json:
        from polebook.book.pulse_rows import page as step  # deferred: no other page draws the step response

        document["pulse"] = step(ledger)
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(document))
    else:
        from polebook.report.pages import page
        from polebook.report.pages_csv import page_csv

        name = args.page or LEDGER
        deliver(args.csv, lambda: page_csv(document, name), lambda: page(document, name, out.look, args.file),
                args.file, out)
    return MET


COMMAND = Command(_ABOUT, _arguments, _run)
