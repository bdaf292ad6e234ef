"""Keys while built chains are computed, in a pseudo-terminal: `python -m tests.bench.spread_page`.

Page 8, six stages, at 80x24 and 140x45: moves of the line and steps of a value, from the write of the key to the bytes
that show it; first with nothing running, then in the midst of a run of 1,000,000 builds. The goal at 80x24: p95 within
60 ms in both. Then 10,000 builds from the key that asks for them to the line that says they are done, the first time
and again, when the process that computes them is there already.
"""

from __future__ import annotations

import os
import select
import shutil
import tempfile
from pathlib import Path
from statistics import median
from time import perf_counter

from tests.bench.app import SIX
from tests.terminal.probe import BYTES, Terminal, app

ROUNDS, REST_S, LIMIT_S = 40, 0.05, 20.0
MOVES = (("right", b"emitter-follower"), ("left", b"common-base"))
STEPS = (("+", b" of Q1: "), ("-", b" of Q1: "))


def waited(fd: int, key: str, marker: bytes) -> float:
    """Milliseconds from a key to the bytes that have the marker."""
    begun, got = perf_counter(), b""
    os.write(fd, BYTES.get(key, key).encode())
    while marker not in got:
        if not select.select([fd], [], [], LIMIT_S)[0]:
            raise SystemExit(f"{key}: never {marker!r} in {got[-400:]!r}")
        got += os.read(fd, 65536)
    return 1e3 * (perf_counter() - begun)


def rest(fd: int, seconds: float) -> None:
    """Takes what still comes."""
    end = perf_counter() + seconds
    while (left := end - perf_counter()) > 0:
        if select.select([fd], [], [], left)[0]:
            os.read(fd, 65536)


def told(name: str, times: list[float]) -> str:
    found = sorted(times)
    p95 = found[int(0.95 * len(found)) - 1]
    return f"{name:22} {len(found):4} keys   ms: median {median(found):5.1f}, p95 {p95:5.1f}, most {found[-1]:5.1f}"


def pressed(fd: int) -> dict[str, list[float]]:
    """Moves and steps in turn."""
    found: dict[str, list[float]] = {"move": [], "step": []}
    for _ in range(ROUNDS):
        for name, keys in (("move", MOVES), ("step", STEPS)):
            for key, marker in keys:
                found[name].append(waited(fd, key, marker))
                rest(fd, REST_S)
    return found


def at(path: Path, columns: int, rows: int) -> None:
    with Terminal(app(path), columns, rows) as terminal:
        terminal.until("? help")
        terminal.press("f", *"Q1.rc", "enter", "tab", "8")
        for name in ("10,000 builds", "again"):
            print(f"{name:22} {waited(terminal.fd, 's', b'built chains in'):9.0f} ms")
            rest(terminal.fd, 0.3)
        for name, times in pressed(terminal.fd).items():
            print(told(f"{name}, nothing runs", times))
        os.write(terminal.fd, b"**")
        rest(terminal.fd, 0.3)
        waited(terminal.fd, "s", b" of 1,000,000")
        for name, times in pressed(terminal.fd).items():
            print(told(f"{name}, in a run", times))


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        for columns, rows in ((80, 24), (140, 45)):
            print(f"page 8, {columns}x{rows}")
            at(Path(shutil.copy(SIX, f"{folder}/at-{columns}.toml")), columns, rows)


if __name__ == "__main__":
    main()
