"""`polebook`: find the command, run it, and turn what went wrong into a message and an exit code."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from importlib import import_module

from polebook import __version__
from polebook.cli.app import PLAIN, asked_for
from polebook.cli.command import FAULT, INTERRUPTED, NO_READER, Command, Usage
from polebook.cli.out import Out, OutputLost, standard
from polebook.problem import Problem, ProblemsFound

# name -> one line of help; the module of that name in this package is imported only when it is asked for
COMMANDS = {
    "show": "print the ledger of a chain file, or one page of it",
    "audit": "does each chain reach its targets?",
    "working": "how a figure came about: formula, numbers put in, source",
    "sweep": "put one value through a range: gain, edges, any figure",
    "spread": "ten thousand built chains: percentiles, yield, what costs it",
    "apportion": "values that reach the targets, for the keys that may change",
    "compensate": "the capacitor or coil that puts the upper end of the band right",
    "couple": "size coupling and bypass capacitors for a lower edge",
    "stages": "how many stages: gain and bandwidth of 1 to 8 like ones",
    "post": "keep the figures in the record beside the file",
    "compare": "what changed since a revision or a post, and what each change did",
    "bench": "what was measured on hardware, against the plan",
    "fit": "fit keys to a measured sweep, with standard errors",
    "report": "a design review in Markdown, with drawings beside it",
    "draw": "one drawing as SVG: response, account, pulse, levels",
    "start": "write a new chain that computes at once",
    "set": "change one value in a chain file",
    "unset": "take one key out of a chain file",
    "card": "take a device card over from another chain file",
    "parts": "the parts to buy and solder, with count and tolerance",
    "kinds": "every kind of stage and card, and every key",
}
_HELP = """usage: polebook FILE
       polebook COMMAND ...

A ledger of gain, poles and bandwidth for discrete amplifier chains.

{commands}

polebook FILE opens FILE in the app; where the output is no terminal it prints
the ledger, as show does. --plain: the app in ASCII.
polebook COMMAND --help tells what a command takes. A file that is named like a
command is reached by its path: ./show

exit codes: 0 done, and every target met; 1 a target missed or not judged
(audit, apportion); 2 a file or the command line is at fault
"""


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line `argv` (default: the process's own arguments). Returns the exit code."""
    # before numpy comes in: at small matrices several threads wait on each other, which is twice the work and more
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    out = standard()
    try:
        return _run(list(sys.argv[1:] if argv is None else argv), out)
    except BrokenPipeError:  # the reader has left (a pager, head): nothing more to say, and nobody to say it to
        _abandon_output()
        return NO_READER
    except OutputLost as fault:
        _abandon_output()
        out.tell(f"polebook: the output could not be written: {fault}")
        return FAULT
    except KeyboardInterrupt:
        _abandon_output()  # or the flush at exit would wait once more for a reader that does not read
        return INTERRUPTED


def _run(argv: list[str], out: Out) -> int:
    try:
        name, rest = _command(argv, out)
        if not name:
            return 0
        command = load(name)
        args = command.parser(name).parse_args(command.prepare(rest))
        return command.run(args, out)
    except Usage as fault:
        out.problems([Problem(None, fault.what, fault.why, fault.fix)])
    except ProblemsFound as found:
        out.found(found)
    except SystemExit as done:  # argparse after --help
        return int(done.code or 0)
    return FAULT


def load(name: str) -> Command:
    """The command `name` of COMMANDS."""
    command = import_module(f"polebook.cli.{name}").COMMAND
    assert isinstance(command, Command)
    return command


def _command(argv: list[str], out: Out) -> tuple[str, list[str]]:
    """The command's name and its arguments; "" where the answer was printed here."""
    first = argv[0] if argv else "--help"
    if first in ("-h", "--help", "help"):
        width = max(map(len, COMMANDS))
        out.write(_HELP.format(commands="\n".join(f"  {name:{width}}  {about}" for name, about in COMMANDS.items())))
        return "", []
    if first in ("-V", "--version"):
        out.write(f"polebook {__version__}\n")
        return "", []
    if first in COMMANDS:
        return first, argv[1:]
    if first == "--":
        return _file(argv[1:], argv)
    if first == PLAIN and len(argv) > 1:  # --plain FILE means what FILE --plain does
        return _file(argv, argv)
    if first.startswith("-"):
        raise Usage(f'polebook: no option "{first}" stands before a command', "polebook --help lists the commands")
    if _names_a_file(first):
        return _file(argv, argv)
    from difflib import get_close_matches  # deferred: only a misspelt command pays for it

    near = get_close_matches(first, COMMANDS, n=1)
    fix = f"did you mean polebook {near[0]}?" if near else "polebook --help lists the commands"
    raise Usage(f'polebook: "{first}" is neither a command nor a file here', fix)


def _file(words: list[str], argv: list[str]) -> tuple[str, list[str]]:
    """The app for a file alone; with options of `show` it is shown."""
    return ("app" if asked_for(words) else "show"), argv


def _names_a_file(text: str) -> bool:
    """A file that is here, or what can only be meant as one."""
    if os.sep in text or text.endswith(".toml"):
        return True
    return os.path.exists(text)


def _abandon_output() -> None:
    """Point the standard output at nothing, so that the flush at exit does not fail or wait again."""
    own = sys.__stdout__
    if own is None or sys.stdout is not own:  # a stream that a caller in this process put there is the caller's
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, own.fileno())
    os.close(nowhere)
