"""Mutated chain files against the command line: no traceback, a known exit code, never over the time limit.

    python -m tests.fuzz_files --count 2000 --seed 1

A file is spoilt by seed and number alone, so a finding is repeated with --only NUMBER.
"""

from __future__ import annotations

import argparse
import contextlib
import io
import multiprocessing
import random
import sys
import tempfile
import time
import traceback
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from multiprocessing.connection import Connection, wait
from pathlib import Path

LIMIT_S = 2.0
ALLOWED = {"show": {0, 2}, "audit": {0, 1, 2}}
_SEEDS = sorted((Path(__file__).parent.parent / "chains").glob("*.toml"))
_VALUES = (
    '""', '"abc"', "true", "false", "nan", "-inf", "inf", "0", "-1", "1e308", "1e-308", "1e400", '"1e400"',
    '"4k7k"', '"1,5k"', '"-3k"', '"10 nF"', '"5 V"', '"60 dB"', '"-200 dB"', '"5 %"', "[]", "[1, 2]", "{}",
    "{ a = 1 }", "2026-05-04", "07:30:00", '"\\u001b[31m"', '"\\u202e"', '"' + "9" * 400 + '"', "9" * 400,
    '"1f"', '"1T"', '"1n"', "'''\nx\n'''", "0x10", '"ground"', '"Q1"', '"common-emitter"', '"ladder"',
    '"block"', '"transimpedance"', '"inverting"', "[[[[1]]]]", '"🎛"',
)  # fmt: skip
_EXTRA = (
    "[[stage]]", "[stage]", "[source]", "[load]", "[device]", "[device.X]", "[[device.GP]]", "[supply]",
    "[tolerance]", "[[bench]]", "stage = 3", "left_out = true", 'free = ["rc", "rc"]',
    'tolerance = { rc = "1 %" }', 'arms = [ { series_r = "50" } ]',
    'arms = [ { shunt_l = 0 }, { series_c = "1n", role = "high" } ]', 'poles = ["1M", "1M", "0"]', 'rf = "1k"',
    'c_rf = "1n"', 'c_comp = "100p"', 'l_peak = "1m"', "allot = 9", 'upper = "1"', "re = 0", 'kind = "block"',
    "format = 2", 'name = "Q1"',
)  # fmt: skip

Mutation = Callable[[random.Random, list[str]], None]


def _key_lines(lines: list[str]) -> list[int]:
    return [at for at, line in enumerate(lines) if "=" in line and not line.lstrip().startswith("#")]


def _some_key(rng: random.Random, lines: list[str]) -> int:
    return rng.choice(_key_lines(lines) or [0])


def _drop(rng: random.Random, lines: list[str]) -> None:
    del lines[_some_key(rng, lines)]


def _double(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    lines.insert(at, lines[at])


def _misspell(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    place = rng.randrange(max(1, lines[at].find("=")))
    lines[at] = lines[at][:place] + rng.choice("abz_.-[1 ") + lines[at][place + rng.randrange(2) :]


def _retype(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    lines[at] = lines[at].partition("=")[0] + "= " + rng.choice(_VALUES)


def _rescale(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    lines[at] = lines[at].partition("=")[0] + f"= {10.0 ** rng.uniform(-18, 18):.3g}"


def _reprefix(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    value = f"{rng.uniform(0.1, 900):.3g}{rng.choice('fpnumkMG')}"
    lines[at] = lines[at].partition("=")[0] + f'= "{value}"'


def _zero(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    lines[at] = lines[at].partition("=")[0] + "= 0"


def _add(rng: random.Random, lines: list[str]) -> None:
    lines.insert(rng.randrange(len(lines) + 1), rng.choice(_EXTRA))


def _swap(rng: random.Random, lines: list[str]) -> None:
    a, b = rng.randrange(len(lines)), rng.randrange(len(lines))
    lines[a], lines[b] = lines[b], lines[a]


def _cut_block(rng: random.Random, lines: list[str]) -> None:
    a = rng.randrange(len(lines))
    del lines[a : a + rng.randrange(1, 12)]


def _repeat_block(rng: random.Random, lines: list[str]) -> None:
    a = rng.randrange(len(lines))
    block = lines[a : a + rng.randrange(1, 14)]
    lines[a:a] = block * rng.choice((1, 2, 70))


def _truncate(rng: random.Random, lines: list[str]) -> None:
    text = "\n".join(lines)
    lines[:] = text[: rng.randrange(len(text) + 1)].split("\n")


def _nest(rng: random.Random, lines: list[str]) -> None:
    deep = rng.choice((3, 15, 17, 400, 5000))
    ends = rng.choice((("[", "]"), ("{ a = ", " }"), ("[", "")))
    lines.insert(rng.randrange(len(lines) + 1), f"x = {ends[0] * deep}1{ends[1] * deep}")


def _dot(rng: random.Random, lines: list[str]) -> None:
    key = ".".join(rng.choice(("a", "stage", '"b c"', "device")) for _ in range(rng.choice((2, 8, 9, 3000))))
    lines.insert(rng.randrange(len(lines) + 1), rng.choice((f"{key} = 1", f"[{key}]", f"[[{key}]]")))


def _long(rng: random.Random, lines: list[str]) -> None:
    at = _some_key(rng, lines)
    lines[at] = lines[at].partition("=")[0] + '= "' + rng.choice("9a\t ") * rng.choice((1000, 600_000)) + '"'


MUTATIONS: tuple[Mutation, ...] = (
    _drop, _double, _misspell, _retype, _retype, _retype, _rescale, _rescale, _add, _add, _swap, _cut_block,
    _repeat_block, _truncate, _nest, _dot, _long,
)  # fmt: skip


# these leave many a file readable, so that the figures are put to the test
GENTLE: tuple[Mutation, ...] = (_reprefix, _reprefix, _reprefix, _drop, _zero)


def spoilt(seed: int, number: int) -> bytes:
    """Mutated file `number` of `seed`."""
    rng = random.Random(f"{seed}:{number}")
    lines = rng.choice(_SEEDS).read_text(encoding="utf-8").split("\n")
    mutations = rng.choice((MUTATIONS, GENTLE))
    for _ in range(rng.choice((1, 1, 2, 4))):
        if lines:
            rng.choice(mutations)(rng, lines)
    data = bytearray("\n".join(lines).encode("utf-8", "surrogatepass"))
    if rng.random() < 0.1:
        for _ in range(rng.choice((1, 3, 50))):
            at = rng.randrange(len(data) + 1)
            data[at : at + rng.randrange(3)] = rng.randbytes(rng.randrange(4))
    return bytes(data)


@dataclass(frozen=True, slots=True)
class Finding:
    """What one command did with one file. `wrong` is empty where it behaved."""

    number: int
    command: str
    code: int | None
    seconds: float
    wrong: str


def run(command: str, path: str, number: int) -> Finding:
    """The command, in this process, its streams caught."""
    from polebook.cli.main import main

    wrong, code = "", None
    out, err = io.StringIO(), io.StringIO()
    begun = time.perf_counter()
    try:
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            code = main([command, path])
    except BaseException:
        wrong = traceback.format_exc()
    seconds = time.perf_counter() - begun
    told = out.getvalue() + err.getvalue()
    if not wrong and code not in ALLOWED[command]:
        wrong = f"exit code {code}"
    elif not wrong and any(not char.isprintable() and char != "\n" for char in told):
        wrong = "a control character reached the terminal"
    elif not wrong and "Warning" in err.getvalue():
        wrong = err.getvalue()
    elif not wrong and code == 2 and "    fix  " not in err.getvalue():
        wrong = f"exit code 2 without a remedy: {err.getvalue()[:200]!r}"
    return Finding(number, command, code, seconds, wrong)


def _worker(seed: int, jobs: Connection) -> None:
    from polebook.book import build  # noqa: F401 - so that no import counts against the first file's limit

    with tempfile.TemporaryDirectory() as folder:
        path = str(Path(folder) / "spoilt.toml")
        while (job := jobs.recv()) is not None:
            number, command = job
            Path(path).write_bytes(spoilt(seed, number))
            jobs.send("begun")
            jobs.send(run(command, path, number))


class _Worker:
    """One process that is replaced when it overruns or dies."""

    def __init__(self, seed: int) -> None:
        self.seed = seed
        self.start()

    def start(self) -> None:
        context = multiprocessing.get_context("spawn")
        self.pipe, theirs = context.Pipe()
        self.process = context.Process(target=_worker, args=(self.seed, theirs), daemon=True)
        self.process.start()
        theirs.close()
        self.job: tuple[int, str] | None = None
        self.deadline = 0.0

    def give(self, job: tuple[int, str] | None) -> None:
        self.job = job
        self.deadline = time.monotonic() + 60  # until it says that it has begun: it may still be starting
        self.pipe.send(job)

    def lost(self, why: str) -> Finding:
        assert self.job is not None
        number, command = self.job
        self.process.kill()
        self.process.join()
        self.pipe.close()
        self.start()
        return Finding(number, command, None, LIMIT_S, why)


def findings(seed: int, numbers: list[int], workers: int) -> Iterator[Finding]:
    """Every command on every file, in no particular order. An overrun or a dead process is a finding."""
    jobs = [(number, command) for number in reversed(numbers) for command in reversed(list(ALLOWED))]
    crew = [_Worker(seed) for _ in range(min(workers, len(jobs)))]
    busy = []
    for worker in crew:
        worker.give(jobs.pop())
        busy.append(worker)
    while busy:
        ready = wait([worker.pipe for worker in busy], timeout=0.1)
        for worker in list(busy):
            found = _hear(worker) if worker.pipe in ready else None
            if found is None and time.monotonic() > worker.deadline:
                found = worker.lost(f"over {LIMIT_S} s")
            if found is None:
                continue
            yield found
            if jobs:
                worker.give(jobs.pop())
            else:
                worker.give(None)
                busy.remove(worker)
    for worker in crew:
        worker.process.join(timeout=10)


def _hear(worker: _Worker) -> Finding | None:
    try:
        heard = worker.pipe.recv()
    except EOFError:
        return worker.lost("the process died")
    if heard == "begun":
        worker.deadline = time.monotonic() + LIMIT_S
        return None
    return heard


def main(argv: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.fuzz_files", description=__doc__.split("\n")[0])
    parser.add_argument("--count", type=int, default=2000)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--workers", type=int, default=2)
    parser.add_argument("--only", type=int, metavar="NUMBER", help="this file alone; its text is printed")
    args = parser.parse_args(argv)
    numbers = list(range(args.count)) if args.only is None else [args.only]
    if args.only is not None:
        sys.stdout.write(spoilt(args.seed, args.only).decode("utf-8", "backslashreplace") + "\n")
    codes: dict[str, Counter[int | None]] = {command: Counter() for command in ALLOWED}
    wrong, slowest = [], Finding(-1, "", None, 0.0, "")
    for found in findings(args.seed, numbers, args.workers):
        codes[found.command][found.code] += 1
        slowest = max(slowest, found, key=lambda one: one.seconds)
        if found.wrong:
            wrong.append(found)
            print(f"file {found.number}, {found.command}: {found.wrong}")
    for command, counts in codes.items():
        told = ", ".join(f"exit {code}: {count}" for code, count in sorted(counts.items(), key=str))
        print(f"{command}: {told}")
    print(f"slowest: {slowest.seconds:.3f} s ({slowest.command}, file {slowest.number}); wrong: {len(wrong)}")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
