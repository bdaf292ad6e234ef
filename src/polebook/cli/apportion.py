"""`polebook apportion FILE`: values for the free keys that reach the targets."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from polebook.cli.command import INTERRUPTED, MET, MISSED, Command, Usage
from polebook.cli.out import Out, Pace
from polebook.cli.quantities import names

if TYPE_CHECKING:
    from polebook.plan.apportion import Best, Request, Result

_ABOUT = """Find values for a chain's parts that reach its targets: gain within its
tolerance, edges, peaking, noise, swing, current, pulse. Few parts are moved,
and those little; every device stays in its region and within its ratings.
Values are taken from the file's series ([preferred]) and verified by a full
ledger of the file as it would be. A capacitor or coil that is better not there
is set to 0.

--free names what may change: Q1.rc,Q2.c_comp; the name of a stage stands for
every part fitted in it. Without it these are the keys that a `free` of the file
lists; without that every part that is fitted. Resistors move by up to a decade,
capacitors and coils by up to two.

--favour takes one of the targets, and makes the most of it once all are met:
a part is then moved where doubling it brings the figure 1 %.

Where the targets can't all be met the nearest plan is shown, which of them
would have to give and how far, and what holds the plan back. Ctrl-C stops, and
shows what is found so far. The file is changed only with --write.

exit code: 0 where all targets are met as proposed, else 1

examples:
  polebook apportion chain.toml
  polebook apportion chain.toml --free Q1.rc,Q1.re,Q2 --favour upper --write"""
_MOST_SEED = 10**9


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--free", metavar="KEY,...", default="", help="what may change, such as Q1.rc,Q2")
    parser.add_argument("--favour", metavar="TARGET", default="",
                        help="upper, lower, noise, current, gain, swing ...: what to make the most of")
    parser.add_argument("--seed", metavar="N", default="1", help="of the further starts of the search (default 1)")
    parser.add_argument("--write", action="store_true", help="put the proposal into the file")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    seed = args.seed
    if not (seed.isdecimal() and seed.isascii() and int(seed) <= _MOST_SEED):
        raise Usage(f'polebook apportion: --seed: "{seed}" is no seed', "write it like --seed 1",
                    f"a seed is a whole number from 0 to {_MOST_SEED}")
    from polebook.chain import read  # deferred: --help needs no reader
    from polebook.text import files

    text = files.read(args.file).text
    chain = read.parse(text, args.file)
    from polebook.plan.apportion import Request  # deferred: a faulty file is told without numpy, 75 ms sooner

    found = _found(Request(text, args.file, names(args.free), args.favour.strip(), int(seed)), out)
    edit = found.proposal.edit
    written = args.write and bool(edit) and not found.stopped
    if written:
        files.save(args.file, edit.apply(text))
    answer: dict[str, Any] = {
        "format": 1, "command": "apportion",
        "files": [{"file": args.file, "digest": chain.digest, **found.document(), "written": written}],
    }
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.apportion import apportion_text

        out.write(apportion_text(answer, out.look))
    return INTERRUPTED if found.stopped else MET if found.proposal.met else MISSED


def _found(request: Request, out: Out) -> Result:
    """The result of the search; of what was found so far where ctrl-c stops it."""
    from polebook.plan.apportion import apportion, concluded  # deferred as above

    work, best, pace = apportion(request), None, Pace()
    try:
        while True:
            try:
                done, total, best = next(work)
            except StopIteration as end:
                result: Result = end.value
                break
            if pace.due():
                out.progress(f" {done} of at most {total} trials, {_state(best)} so far (ctrl-c stops)")
    except KeyboardInterrupt:
        out.progress("")
        if best is None:
            raise
        return concluded(request, best)
    out.progress("")
    return result


def _state(best: Best) -> str:
    """How the best plan so far stands."""
    targets = best.targets.values()
    short = sum(target.met is not True for target in targets)
    return "no figures" if not targets else "all targets met" if not short else f"{short} missed"


COMMAND = Command(_ABOUT, _arguments, _run)
