"""Mutated and hostile chain files against reader and command line: no traceback, a known exit code, nothing that a
terminal would obey, never over the limits of CPU time and memory.

    python -m tests.fuzz_files --count 20000 --seed 1

A file is spoilt by seed and number alone, so a finding is repeated with --only NUMBER. Of ten files four have one
hostile character in one field (18400 files have every one in every field), one is at a limit, five are mutated chains.
"""

from __future__ import annotations

import argparse
import contextlib
import io
import json
import multiprocessing
import os
import random
import resource
import subprocess
import sys
import tempfile
import time
import traceback
import unicodedata
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from multiprocessing.connection import Connection, wait
from pathlib import Path

from tests.fuzz_hostile import SEEDS, limit, marked

LIMIT_S, HANGS_S = 2.0, 300.0  # of the CPU; of the clock, whatever else the machine does
FEW, STAGE_S, ARM_S = 16, 0.2, 0.02  # stages that take no more; what a further one may take, and an arm of a ladder
LIMIT_MB, MOST_BYTES = 500, 4 << 30
ALLOWED = {"read": {0, 2}, "show": {0, 2}, "audit": {0, 1, 2}}
OBEYED = ("Cc", "Cf", "Cn", "Co", "Cs", "Zl", "Zp")  # kinds of characters that no terminal gets of a file
SOMETIMES, EVERY = ("show --page all", "show --json", "parts"), 7
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
    """File `number` of `seed`."""
    rng = random.Random(f"{seed}:{number}")
    tens, of_ten = divmod(number, 10)
    if of_ten % 2 and of_ten < 9:
        return marked(tens * 4 + of_ten // 2)
    if of_ten == 9:
        return limit(rng)
    return _mutated(rng)


def _mutated(rng: random.Random) -> bytes:
    lines = rng.choice(SEEDS).read_text(encoding="utf-8").split("\n")
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
    """What one command did with one file. `wrong` is empty where it behaved; megabytes: the most its process had."""

    number: int
    command: str
    code: int | None
    seconds: float
    wrong: str
    megabytes: float = 0.0


def commands(number: int) -> list[str]:
    """What is done with a file."""
    return [*ALLOWED, *([SOMETIMES[number // EVERY % len(SOMETIMES)]] if number % EVERY == 0 else [])]


def _read(path: str) -> int:
    """The reader alone, and every problem as it would be told."""
    from polebook.chain import read
    from polebook.problem import ProblemsFound

    try:
        read.load(path)
    except ProblemsFound as found:
        sys.stderr.write(f"{found}\n")
        return 2
    return 0


def limit_s(data: bytes) -> float:
    """CPU time for a file: of a valid chain all poles are solved together, which takes seconds at 64 stages."""
    return LIMIT_S + STAGE_S * min(max(data.count(b"[[stage]]") - FEW, 0), 48) + ARM_S * min(data.count(b" }, {"), 256)


def _most_megabytes() -> float:
    """The most that this process has held since it was begun; `ru_maxrss` would have that of the one that began it."""
    status = Path("/proc/self/status")
    if status.exists():
        return next(int(line.split()[1]) / 1024 for line in status.read_text().splitlines() if line.startswith("VmHWM"))
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def run(command: str, path: str, number: int, times: float = 1.0) -> Finding:
    """The command, in this process, its streams caught; it may take so many times the limit."""
    from polebook.cli.main import main

    wrong, code = "", None
    out, err = io.StringIO(), io.StringIO()
    begun = time.process_time()
    try:
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            code = _read(path) if command == "read" else main([*command.split(), path])
    except BaseException:
        wrong = traceback.format_exc()
    seconds = time.process_time() - begun
    megabytes = _most_megabytes()
    return Finding(number, command, code, seconds, wrong or _amiss(command, code, out.getvalue(), err.getvalue()) or
                   (f"{seconds:.1f} s" if seconds > times * limit_s(Path(path).read_bytes()) else "") or
                   (f"{megabytes:.0f} MB" if megabytes > LIMIT_MB else ""), megabytes)


def _amiss(command: str, code: int | None, out: str, err: str) -> str:
    """What is wrong with an answer."""
    if code not in ALLOWED[command.split()[0]] if command != "parts" else code not in (0, 2):
        return f"exit code {code}"
    if bad := {char for char in set(out + err) if char != "\n" and unicodedata.category(char) in OBEYED}:
        return f"a control character reached the terminal: {sorted(bad)!r}"
    if "Warning" in err or "Traceback" in err:
        return err
    if code == 2 and "    fix  " not in err:
        return f"exit code 2 without a remedy: {err[:200]!r}"
    if "--json" in command and code == 0:
        json.loads(out, parse_constant=lambda word: sys.exit(f"{word} in JSON"))
    return ""


def _worker(seed: int, times: float, jobs: Connection) -> None:
    from polebook.book import build  # noqa: F401 - so that no import counts against the first file's limit

    resource.setrlimit(resource.RLIMIT_AS, (MOST_BYTES, MOST_BYTES))  # a file that eats memory ends here, not elsewhere
    with tempfile.TemporaryDirectory() as folder:
        path = str(Path(folder) / "spoilt.toml")
        while (job := jobs.recv()) is not None:
            number, command = job
            data = spoilt(seed, number)
            Path(path).write_bytes(data)
            jobs.send(time.process_time() + times * limit_s(data))
            jobs.send(run(command, path, number, times))


class _Worker:
    """One process that is replaced when it overruns or dies."""

    def __init__(self, seed: int, times: float) -> None:
        self.seed, self.times = seed, times
        self.start()

    def start(self) -> None:
        context = multiprocessing.get_context("spawn")
        self.pipe, theirs = context.Pipe()
        self.process = context.Process(target=_worker, args=(self.seed, self.times, theirs), daemon=True)
        self.process.start()
        theirs.close()
        self.job: tuple[int, str] | None = None
        self.deadline = self.limit_s = 0.0

    def give(self, job: tuple[int, str] | None) -> None:
        self.job = job
        self.deadline, self.limit_s = time.monotonic() + HANGS_S, float("inf")  # it may still be starting
        self.pipe.send(job)

    def overruns(self) -> bool:
        """Whether its CPU time, or the clock, has gone past the limit."""
        if time.monotonic() > self.deadline:
            return True
        try:
            stat = Path(f"/proc/{self.process.pid}/stat").read_text(encoding="ascii")
        except OSError:  # another system, or it has died: the pipe tells that
            return False
        user, system = stat.rpartition(")")[2].split()[11:13]
        return (int(user) + int(system)) / os.sysconf("SC_CLK_TCK") > self.limit_s + 1.0

    def lost(self, why: str) -> Finding:
        assert self.job is not None
        number, command = self.job
        self.process.kill()
        self.process.join()
        self.pipe.close()
        self.start()
        return Finding(number, command, None, LIMIT_S, why)


def findings(seed: int, numbers: list[int], workers: int, times: float = 1.0) -> Iterator[Finding]:
    """Every command on every file, in no particular order. An overrun or a dead process is a finding."""
    jobs = [(number, command) for number in reversed(numbers) for command in reversed(commands(number))]
    crew = [_Worker(seed, times) for _ in range(min(workers, len(jobs)))]
    busy = []
    for worker in crew:
        worker.give(jobs.pop())
        busy.append(worker)
    while busy:
        ready = wait([worker.pipe for worker in busy], timeout=0.1)
        for worker in list(busy):
            found = _hear(worker) if worker.pipe in ready else None
            if found is None and worker.overruns():
                found = worker.lost("over the limit of time")
            if found is None:
                continue
            if found.megabytes > LIMIT_MB:
                worker.lost("")  # what it had at most would be counted against the next file
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
    if not isinstance(heard, Finding):
        worker.limit_s = heard
        return None
    return heard


def real(seed: int, number: int) -> str:
    """What is wrong with an audit by the program itself, of a file that is named as badly as it is written."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / f"spoilt \x1b[31m\u202e{number}.toml"
        path.write_bytes(spoilt(seed, number))
        done = subprocess.run([sys.executable, "-m", "polebook", "audit", str(path)], capture_output=True, check=False,
                              timeout=HANGS_S, env={**os.environ, "PYTHONIOENCODING": "utf-8"})
    return _amiss("audit", done.returncode, done.stdout.decode(), done.stderr.decode())


def main(argv: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.fuzz_files", description=__doc__.split("\n")[0])
    parser.add_argument("--count", type=int, default=2000)
    parser.add_argument("--first", type=int, default=0, help="number of the first file")
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--workers", type=int, default=2)
    parser.add_argument("--real", type=int, default=0, help="so many of them also as programs of their own")
    parser.add_argument("--only", type=int, metavar="NUMBER", help="this file alone; its text is printed")
    args = parser.parse_args(argv)
    numbers = list(range(args.first, args.first + args.count)) if args.only is None else [args.only]
    if args.only is not None:
        sys.stdout.write(spoilt(args.seed, args.only).decode("utf-8", "backslashreplace") + "\n")
    codes: dict[str, Counter[int | None]] = {command: Counter() for command in (*ALLOWED, *SOMETIMES)}
    wrong = []
    slowest = largest = Finding(-1, "", None, 0.0, "")
    for found in findings(args.seed, numbers, args.workers):
        codes[found.command][found.code] += 1
        slowest = max(slowest, found, key=lambda one: one.seconds)
        largest = max(largest, found, key=lambda one: one.megabytes)
        if found.wrong:
            wrong.append(found)
            print(f"file {found.number}, {found.command}: {found.wrong}", flush=True)
    for number in numbers[:args.real]:
        if told := real(args.seed, number):
            wrong.append(Finding(number, "audit", None, 0.0, told))
            print(f"file {number}, the program itself: {told}")
    for command, counts in codes.items():
        told = ", ".join(f"exit {code}: {count}" for code, count in sorted(counts.items(), key=str))
        print(f"{command}: {told}")
    print(f"slowest: {slowest.seconds:.3f} s of CPU ({slowest.command}, file {slowest.number}); "
          f"most memory: {largest.megabytes:.0f} MB ({largest.command}, file {largest.number}); wrong: {len(wrong)}")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
