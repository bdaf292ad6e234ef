"""`polebook bench FILE`: what was measured on hardware, against the plan."""

from __future__ import annotations

import argparse
import os
from collections.abc import Iterable
from typing import TYPE_CHECKING

from polebook.cli.command import FAULT, MET, Command
from polebook.cli.out import Out, Pace
from polebook.cli.quantities import whole

if TYPE_CHECKING:
    from polebook.chain.model import Chain
    from polebook.record.bench import Overlay
    from polebook.record.compared import Compared

_ABOUT = """Put every [[bench]] of a chain file beside the plan: gain and edges as planned
and as measured, the difference, and whether the tolerances of the parts explain
it: of the built chains of a spread, at least 1 % lie on either side of what was
measured. What the instruments were off is not in that.

A bench with `at = "Q2"` was measured at the output of that stage, with all that
follows attached; else at the load. A sweep in its `file`, beside the chain
file, is compared point by point. It is a table (CSV) of Hz, dB and perhaps
degrees, by its header also kHz, MHz, GHz, magnitude, radians, real and
imaginary part; or Touchstone 1.x (.s2p), of which half of S21 is V(load)/EMF:
then the plan is taken between the reference resistance that the file states.

exit code: 0, or 2 where a sweep can't be read

example:
  polebook bench chain.toml"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--builds", metavar="N", help="how many chains to build (default 10000)")
    parser.add_argument("--seed", metavar="N", default="1", help="which builds: a whole number (default 1)")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    builds = whole("bench", "--builds", args.builds, "10000")
    seed = whole("bench", "--seed", args.seed, "1") or 0
    from polebook.chain import read  # deferred: --help needs no reader

    chain = read.load(args.file)
    from polebook.record.compared import document  # deferred: a faulty file is told without numpy, 75 ms sooner

    found = against_the_plan(chain, args.file, builds, seed, out)
    answer = {
        "format": 1, "command": "bench",
        "files": [{"file": args.file, "digest": chain.digest, "builds": builds, "seed": seed,
                   "gain_unit": "V/V" if chain.source_kind == "voltage" else "V/A",
                   "benches": [document(one) for one in found]}],
    }
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.bench import bench_text

        out.write(bench_text(answer, out.look))
    return unread((one.overlay for one in found), out)


def unread(overlays: Iterable[Overlay | None], out: Out) -> int:
    """The exit code, after the sweeps that can't be read are told."""
    bad = [one for one in overlays if one is not None and one.problems]
    for one in bad:
        out.problems(one.problems, one.text)
    return FAULT if bad else MET


def against_the_plan(chain: Chain, file: str, builds: int | None, seed: int, out: Out) -> tuple[Compared, ...]:
    """Every bench of the file, with a bar where that takes long."""
    from polebook.record.compared import compared  # deferred as above

    result: tuple[Compared, ...] = ()
    pace = Pace()
    for done, total, benches in compared(chain, os.path.dirname(file), builds, seed):
        result = benches
        if pace.due():
            out.progress(f" {done} of {total} built (ctrl-c stops)")
    out.progress("")
    return result


COMMAND = Command(_ABOUT, _arguments, _run)
