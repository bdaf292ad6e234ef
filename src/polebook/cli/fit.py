"""`polebook fit FILE`: keys of a chain fitted to a measured sweep."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from polebook.cli.command import MET, Command
from polebook.cli.out import Out, Pace
from polebook.cli.quantities import names, whole

if TYPE_CHECKING:
    from polebook.record.fit import Request, Result

_ABOUT = """Fit keys of a chain to the sweep of one of its benches by least squares: gain in
dB, and phase where the sweep has one. Each value comes with its standard error,
and with as many digits as that lets stand. Keys that the sweep can't tell
apart, or does not feel, get no value, and it is said which they are. Where two
answers fit equally well the one nearer to the file is taken, the other told.

--free names what may change: Q1.stray,Q2.rc,device.D.ft. Without it these are
the strays of all stages. What may be 0, as a stray may, may begin at nothing
and end there; anything else begins at the file's value. The file is changed
only with --write: fitted values go in, all else stays.

--offset lets the measured gain be off by as many dB at all frequencies, and
tells how many. Without it the level counts as measured: what is off in it is
then laid to the parts.

The errors are right where what is left over is noise. Where neighbouring points
are off alike, something shapes the curve that was not free, and it is told.

example:
  polebook fit chain.toml --bench 1 --free Q1.stray,Q2.stray --write"""


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a chain file (TOML)")
    parser.add_argument("--bench", metavar="N", help="which bench, counted from 1 (default: the only one with a sweep)")
    parser.add_argument("--free", metavar="KEY,...", default="", help="what may change, such as Q1.stray,Q2.rc")
    parser.add_argument("--offset", action="store_true", help="the measured gain may be off by as many dB everywhere")
    parser.add_argument("--write", action="store_true", help="put the fitted values into the file")
    parser.add_argument("--json", action="store_true", help="the answer as JSON, at full precision")


def _run(args: argparse.Namespace, out: Out) -> int:
    number = whole("fit", "--bench", args.bench, "1")
    from polebook.chain import read  # deferred: --help needs no reader
    from polebook.text import files

    text = files.read(args.file).text
    chain = read.parse(text, args.file)
    from polebook.record.fit import Request  # deferred: a faulty file is told without numpy, 75 ms sooner

    found = _fitted(Request(text, args.file, number, names(args.free), args.offset), out)
    edit = found.proposal.edit
    written = args.write and bool(edit)
    if written:
        files.save(args.file, edit.apply(text))
    answer: dict[str, Any] = {
        "format": 1, "command": "fit",
        "files": [{"file": args.file, "digest": chain.digest, **found.document(), "written": written}],
    }
    if args.json:
        from polebook.report.jsonout import dump

        out.write(dump(answer))
    else:
        from polebook.report.fit import fit_text

        out.write(fit_text(answer, out.look))
    return MET


def _fitted(request: Request, out: Out) -> Result:
    from polebook.record.fit import fit  # deferred as above

    pace = Pace()

    def watch(looks: int, rms_db: float) -> None:
        if pace.due():
            out.progress(f" {looks} looks at the chain, off by {rms_db:.3g} dB rms (ctrl-c stops)")

    try:
        return fit(request, watch)
    finally:
        out.progress("")


COMMAND = Command(_ABOUT, _arguments, _run)
