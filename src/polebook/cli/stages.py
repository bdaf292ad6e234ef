"""`polebook stages FILE --template Q1`: gain and band of 1, 2, 3 ... like stages."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from polebook.cli.command import INTERRUPTED, MET, Command, Usage
from polebook.cli.out import Out, Pace
from polebook.cli.quantities import quantity
from polebook.cli.table_file import check, csv_option, deliver

if TYPE_CHECKING:
    from polebook.plan.stages import Row

_ABOUT = """How many stages? Copies of one stage of the file, 1 to 8 of them, between its
source and its load: gain, edges and gain times bandwidth of each chain, exact,
beside what the law of bandwidth shrinkage makes of a single stage. The file is
only read.

Copies of device stages are coupled by capacitors: where the stage, or the load,
has no couple, one is put in for them, far below the band. A stage that has its
bias from the one before it keeps the quiescent current that it has in the file.

For a wanted gain (--gain, else target.gain) the gain of every copy is set so
that the whole makes it, solved on the chain itself: by the output resistor (rc,
rd, ra), the same in all copies, with the bias that it then gives; of an op-amp
stage by rf; or by another key of the stage (--by re). That tells which number
of stages gives the greatest bandwidth. Beside it stands the published optimum
for like one-pole stages: a gain of the root of e, 4.34 dB, in each.

example:
  polebook stages chain.toml --template Q1 --gain 60dB --by re"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--template", metavar="STAGE", required=True, help="the stage that is copied, such as Q1")
    parser.add_argument("--gain", metavar="GAIN", help="the total gain wanted, such as 60dB (default: target.gain)")
    parser.add_argument("--by", metavar="KEY", default="", help="the key of the stage that sets its gain")
    parser.add_argument("--most", metavar="N", help="how many copies at most (default 8)")
    output = parser.add_mutually_exclusive_group()
    output.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")
    csv_option(output)


def _run(args: argparse.Namespace, out: Out) -> int:
    check(args.csv, args.file)
    wanted = None if args.gain is None else quantity("stages", "--gain", args.gain, "gain_source")
    from polebook.chain import read  # deferred: --help needs no reader

    chain = read.load(args.file)
    from polebook.plan import stages  # deferred: a faulty file is told without numpy, 75 ms sooner

    of = stages.study(chain, args.template, _most(args.most), chain.get("target.gain") if wanted is None else wanted,
                      args.by)
    if wanted is not None and of.want is None:
        raise Usage(f"polebook stages: --gain: {of.of.why_not}",
                    "name the key that does, with --by, or leave --gain out",
                    "a wanted gain is made by one key of every copy")
    rows: list[Row] = []
    stopped, pace = False, Pace()
    try:
        for done, total, row in stages.steps(of):
            rows.append(row)
            if pace.due():
                out.progress(f" {args.template}: {done} of {total} chains (ctrl-c stops)")
    except KeyboardInterrupt:
        stopped = True
    out.progress("")
    answer = {"format": 1, "command": "stages",
              "files": [{"file": args.file, "digest": chain.digest, **stages.document(of, rows), "stopped": stopped}]}
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.stages import stages_csv, stages_text

        deliver(args.csv, lambda: stages_csv(answer), lambda: stages_text(answer, out.look), args.file, out)
    return INTERRUPTED if stopped else MET


def _most(typed: str | None) -> int:
    """How many copies. Raises Usage where the number is none."""
    from polebook.plan.stages import MOST, MOST_ALLOWED  # deferred as above

    if typed is None:
        return MOST
    if not (typed.isdecimal() and typed.isascii() and len(typed) < 9 and 1 <= int(typed) <= MOST_ALLOWED):
        raise Usage(f'polebook stages: --most: "{typed}" is no number of copies', "write it like --most 12",
                    f"1 to {MOST_ALLOWED} of them can be tried")
    return int(typed)


COMMAND = Command(_ABOUT, _arguments, _run)
