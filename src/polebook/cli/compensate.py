"""`polebook compensate FILE STAGE --edge 10k`: the capacitor, or the coil, for the upper end of the band."""

from __future__ import annotations

import argparse
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from polebook.cli.command import INTERRUPTED, MET, MISSED, Command, Usage
from polebook.cli.out import Out, Pace
from polebook.cli.quantities import quantity
from polebook.problem import Problem, ProblemsFound

if TYPE_CHECKING:
    from polebook.plan.proposal import Proposal

_ABOUT = """The capacitor across a stage (c_comp, c_bridge, cf) and the one from its
output to ground (c_load) with which the chain's upper edge, or its dominant
pole, lies where it is wanted; side by side, each solved on the whole chain: the
value, the zero that it brings, the second pole, edge, peaking and overshoot.
Where the stage takes r_comp, the one across also with the resistor that sends
its zero away, and with the one that puts it onto the second pole.

--coil: the peaking coil (l_peak) for a flat response, a flat delay and the widest
band, beside the published factors.

--feedback BETA: the chain stands in a loop. T = BETA times the chain's gain H
(V/V; of a source of current BETA is in siemens), negative at midband. The phase
margin is 180 degrees less the phase that H has turned from midband to where T is
1, above the band.

The dominant pole is the one nearest to 0 with couplings and bypasses shorted.
--take NAME --write puts one way into the file, in the nearest values of its
series. Exit code 1: none of the ways does it.

example:
  polebook compensate chain.toml Q2 --edge 100k --feedback 0.01"""
WAYS, COILS = ("across", "away", "left", "ground"), ("flat", "delay", "wide")


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("stage", metavar="STAGE", help="the stage, such as Q2")
    wanted = parser.add_mutually_exclusive_group(required=True)
    wanted.add_argument("--edge", metavar="HZ", help="the wanted upper edge of the chain")
    wanted.add_argument("--pole", metavar="HZ", help="the wanted dominant pole of the chain")
    wanted.add_argument("--coil", action="store_true", help="the peaking coil instead")
    parser.add_argument("--feedback", metavar="BETA", help="share of the output that a loop takes back to the input")
    parser.add_argument("--take", metavar="NAME", choices=(*WAYS, *COILS),
                        help=f"the way to write: {', '.join(WAYS)}; of a coil {', '.join(COILS)}")
    parser.add_argument("--write", action="store_true", help="put the way that --take names into the file")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    names = COILS if args.coil else WAYS
    if args.take and args.take not in names:
        raise Usage(f"polebook compensate: --take: {args.take} is no {'coil' if args.coil else 'capacitor'}",
                    f"take one of {', '.join(names)}")
    if args.write and not args.take:
        raise Usage("polebook compensate: --write: which way?", f"write it like --take {names[0]} --write",
                    f"there are {', '.join(names)}")
    option = "--edge" if args.edge is not None else "--pole"
    hz = 0.0 if args.coil else quantity("compensate", option, args.edge or args.pole, "frequency")
    from polebook.chain import read  # deferred: --help needs no reader
    from polebook.text import files

    text = files.read(args.file).text
    chain = read.parse(text, args.file)
    dimension = "transconductance" if chain.source_kind == "current" else "ratio"
    beta = None if args.feedback is None else quantity("compensate", "--feedback", args.feedback, dimension)
    row, bought = _coil(args, text, beta, out) if args.coil else _capacitor(args, text, hz, beta, out)
    code = INTERRUPTED if row["stopped"] else MET if bought else MISSED
    taken = _taken(args, row, bought)
    edit = taken.edit if taken else None
    row |= {"taken": args.take, "written": False, "same": taken is not None and not edit}
    if args.write and edit:
        files.save(args.file, edit.apply(text))
        row["written"] = True
    answer = {"format": 1, "command": "compensate", "files": [row]}
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
        return code
    from polebook.report.compensate import compensate_text

    out.write(compensate_text(answer, out.look))
    if edit:
        from polebook.cli.edit import difference

        out.write("\n".join(difference(args.file, text, edit.apply(text), out)) + "\n")
    return code


Answer = tuple[dict[str, Any], "dict[str, Proposal]"]


def _capacitor(args: argparse.Namespace, text: str, hz: float, beta: float | None, out: Out) -> Answer:
    from polebook.plan import compensate as plan  # deferred: a faulty file is told without numpy, 75 ms sooner
    from polebook.plan.compensate_answer import compensation

    task = plan.task(text, args.file, args.stage, plan.Wanted("edge" if args.edge is not None else "pole", hz), beta)
    done, stopped = _worked(plan.options(task), out)
    return compensation(task, done, stopped), {one.name: one.bought for one in done if one.bought}


def _coil(args: argparse.Namespace, text: str, beta: float | None, out: Out) -> Answer:
    from polebook.plan import peaking as plan  # deferred as above
    from polebook.plan.compensate_answer import peaking

    task = plan.coil_task(text, args.file, args.stage, beta)
    done, stopped = _worked(plan.coils(task), out)
    return peaking(task, done, stopped), {one.name: one.bought for one in done if one.bought}


def _worked(steps: Iterator[tuple[int, int, Any]], out: Out) -> tuple[list[Any], bool]:
    """What the steps give, and whether ctrl-c cut them short; progress is shown once they take long."""
    done: list[Any] = []
    stopped, pace = False, Pace()
    try:
        for count, total, one in steps:
            done.append(one)
            if count < total and pace.due():
                out.progress(f" {count} of {total} ways (ctrl-c stops)")
    except KeyboardInterrupt:
        stopped = True
    out.progress("")
    return done, stopped


def _taken(args: argparse.Namespace, row: dict[str, Any], bought: dict[str, Proposal]) -> Proposal | None:
    """The way that --take names. Raises ProblemsFound where there is no such way."""
    if not args.take or args.take in bought:
        return bought.get(args.take)
    why = next((option["why"] for option in row["options"] if option["name"] == args.take), "") or \
        ("it was stopped before" if row["stopped"] else "the stage's kind has none")
    raise ProblemsFound([Problem(None, f"{args.stage} has no way \"{args.take}\"", why,
                                 "take another one; polebook compensate without --take shows them all")])


COMMAND = Command(_ABOUT, _arguments, _run)
