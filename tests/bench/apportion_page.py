"""Keys while a plan is sought, in a pseudo-terminal: `python -m tests.bench.apportion_page [favour ...]`.

Page 9, six stages, at 80x24 and 140x45: moves of the row and of the line, keys chosen and not, steps of a value, from
the write of the key to the bytes that show it; first with nothing running, with the bytes that come in all, then in the
midst of runs that favour a figure, begun again whenever one ends. The goal at 80x24: p95 within 60 ms in all.
"""

from __future__ import annotations

import os
import select
import shutil
import sys
import tempfile
from pathlib import Path
from time import perf_counter

from polebook.tui.apportions import FAVOURS
from tests.bench.app import SIX
from tests.bench.spread_page import told
from tests.terminal.probe import BYTES, Terminal, app

ROUNDS, REST_S, LIMIT_S = 40, 0.05, 20.0
KEYS = (("row", "down", b"may change"), ("row", "up", b"may change"), ("line", "right", b"emitter-follower"),
        ("line", "left", b"common-base"), ("choice", " ", b"may change"), ("choice", " ", b"may change"),
        ("step", "+", b" of Q1: "), ("step", "-", b" of Q1: "))
ENDED = b" start"  # in the message of a run's end: how many it had


class Line:
    """The bytes of a terminal as they come; `ended` once a run has."""

    def __init__(self, fd: int) -> None:
        self.fd, self.ended = fd, True

    def read(self, wait: float) -> bytes:
        got = os.read(self.fd, 65536) if select.select([self.fd], [], [], wait)[0] else b""
        self.ended = self.ended or ENDED in got
        return got

    def rest(self, seconds: float) -> bytes:
        """What still comes."""
        got, end = b"", perf_counter() + seconds
        while (left := end - perf_counter()) > 0:
            got += self.read(left)
        return got

    def press(self, key: str, marker: bytes) -> tuple[float, int]:
        """Milliseconds to the bytes that have the marker; how many bytes come in all."""
        begun, got = perf_counter(), b""
        os.write(self.fd, BYTES.get(key, key).encode())
        while marker not in got:
            if perf_counter() - begun > LIMIT_S:
                raise SystemExit(f"{key}: never {marker!r} in {got[-400:]!r}")
            got += self.read(LIMIT_S)
        spent = 1e3 * (perf_counter() - begun)
        return spent, len(got + self.rest(REST_S))

    def begin(self) -> None:
        """A run, where none is at work."""
        if self.ended:
            os.write(self.fd, b"s")
            self.rest(0.3)
            self.ended = False


def pressed(line: Line, busy: bool) -> dict[str, list[tuple[float, int]]]:
    """What the keys took, in turn, by what they do."""
    found: dict[str, list[tuple[float, int]]] = {}
    for _ in range(ROUNDS):
        for name, key, marker in KEYS:
            if busy:
                line.begin()
            found.setdefault(name, []).append(line.press(key, marker))
    return found


def tell(title: str, found: dict[str, list[tuple[float, int]]], count: bool) -> None:
    every = {**found, "all": [one for some in found.values() for one in some]}
    for name, some in every.items():
        sizes = sorted(size for _, size in some)
        also = f"   bytes: median {sizes[len(sizes) // 2]}, most {sizes[-1]}" if count else ""
        print(told(f"{name}, {title}", [ms for ms, _ in some]) + also, flush=True)


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        for columns, rows in ((80, 24), (140, 45)):
            path = Path(shutil.copy(SIX, f"{folder}/at-{columns}.toml"))
            with Terminal(app(path), columns, rows) as terminal:
                terminal.until("? help")
                terminal.press("f", *"Q1.couple", "enter", "tab", "9")
                line = Line(terminal.fd)
                print(f"page 9, {columns}x{rows}, six stages")
                tell("nothing runs", pressed(line, busy=False), count=True)
                for favour in sys.argv[1:] or ("upper", "rise"):
                    times = FAVOURS.index(favour)
                    os.write(terminal.fd, b"v" * times)
                    line.rest(0.3)
                    tell(f"{favour} sought", pressed(line, busy=True), count=False)
                    os.write(terminal.fd, b"9" if line.ended else b"\x1b")  # Esc would leave the page
                    line.rest(1.0)
                    os.write(terminal.fd, b"9" + b"V" * times)
                    line.rest(0.3)
                    line.ended = True


if __name__ == "__main__":
    main()
