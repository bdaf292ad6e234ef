"""Bytes and times of page 3 in a pseudo-terminal: `python -m tests.bench.response`.

Six stages, at 80x24 and 140x45: steps of a value along its series with the plot drawn anew, moves of the cursor, zooms.
The goal at 80x24: a step within 6 kB, a move of the cursor within 3 kB, p95 within 60 ms. At 140x45 the same on page 1
too, where the plot stands beside the ledger. Then what the curves cost by themselves, without a terminal.
"""

from __future__ import annotations

import shutil
import tempfile
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np

from polebook.book.ledger import Ledger, ledger
from polebook.book.response import delays, grid, input_impedance, output_impedance_of, response, whole_band
from tests.bench.app import QUIET_S, SIX, told
from tests.golden.screens import opened
from tests.terminal.probe import Terminal, app

KEYS, ROUNDS = 60, 21
MOVES = (".", ".", ".", ",")
ZOOMS = ("z", "]", "Z", "[")


def on_page_3(path: Path, columns: int, rows: int) -> dict[str, list[tuple[int, float]]]:
    """What keys on the response page brought back, by what they do."""
    found: dict[str, list[tuple[int, float]]] = {"step": [], "cursor": [], "zoom, pan": []}
    with Terminal(app(path), columns, rows) as terminal:
        terminal.until("? help")
        terminal.press("f", *"Q3.rc", "enter", "tab", "3")
        for number in range(KEYS):
            for name, key in (("step", "+" if number // 4 % 2 else "-"), ("cursor", MOVES[number % 4]),
                              ("zoom, pan", ZOOMS[number % 4])):
                reply = terminal.press(key, quiet=QUIET_S)
                if reply.last_ms is not None:
                    found[name].append((reply.count, reply.last_ms))
    return found


def beside_the_ledger(path: Path) -> list[tuple[int, float]]:
    """Steps on page 1 at 140x45."""
    found = []
    with Terminal(app(path), 140, 45) as terminal:
        terminal.until("? help")
        terminal.press("f", *"Q3.rc", "enter")
        for number in range(KEYS):
            reply = terminal.press("+" if number // 4 % 2 else "-", quiet=QUIET_S)
            if reply.last_ms is not None:
                found.append((reply.count, reply.last_ms))
    return found


def curves_ms() -> None:
    """The curves of an 80-column plot of a warm ledger."""
    of: Ledger = ledger(opened("six-stage").ledger.chain)
    hz = grid(of, *whole_band(of), 160)
    one = np.array([1e5])
    for name, work in (("gain and phase", lambda: response(of, hz)), ("delay", lambda: delays(of, hz)),
                       ("Z in", lambda: input_impedance(of, hz)), ("Z out", lambda: output_impedance_of(of, hz)),
                       ("cursor", lambda: (response(of, one), delays(of, one)))):
        spent = []
        for _ in range(ROUNDS):
            begun = perf_counter()
            work()
            spent.append(perf_counter() - begun)
        print(f"{name:14} {hz.size if name != 'cursor' else 1:4} points   {1e3 * median(spent):5.2f} ms")


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        for columns, rows in ((80, 24), (140, 45)):
            print(f"page 3, {columns}x{rows}")
            path = Path(shutil.copy(SIX, f"{folder}/at-{columns}.toml"))
            for name, found in on_page_3(path, columns, rows).items():
                print(told(name, found))
        print("page 1, 140x45")
        print(told("step", beside_the_ledger(Path(shutil.copy(SIX, f"{folder}/ledger.toml")))))
    curves_ms()


if __name__ == "__main__":
    main()
