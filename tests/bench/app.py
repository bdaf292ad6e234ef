"""Bytes and times of the app in a pseudo-terminal: `python -m tests.bench.app`.

Page 1 at 80x24, six stages, 200 keys: series steps and moves of the selection, each with the bytes that come back and
the time from the write of the key to the last of them. First paint: 15 alternating runs against a bare Textual app
that imports numpy, from the start of the process until its text is on the screen; medians and their ratio.
Ratios within one run count, milliseconds belong to one machine.
"""

from __future__ import annotations

import shutil
import sys
import tempfile
from pathlib import Path
from statistics import median
from time import perf_counter

from tests.terminal.probe import Terminal, app

SIX = Path(__file__).resolve().parents[2] / "chains" / "six-stage.toml"
MOVES = ("down", "up", "right", "left", "down", "right", "up", "left")
KEYS, RUNS, QUIET_S = 200, 15, 0.12
BARE = """
import numpy
from textual.app import App
from textual.widgets import Static
class Bare(App):
    def compose(self):
        yield Static("bare app")
Bare().run()
"""


def first_paint_ms(words: list[str], wanted: str) -> float:
    """From the start of the process until `wanted` is on the screen."""
    with Terminal(words) as terminal:
        while wanted.encode() not in terminal.log:
            if not terminal.read(5.0):
                raise SystemExit(f"no first paint: {bytes(terminal.log)!r}")
        return 1e3 * (perf_counter() - terminal.begun)


def told(name: str, replies: list[tuple[int, float]]) -> str:
    counts = sorted(count for count, _ in replies)
    times = sorted(ms for _, ms in replies)
    return (f"{name:14} {len(replies):4} keys   bytes: median {median(counts):6.0f}, most {counts[-1]:6}   "
            f"ms: median {median(times):5.1f}, p95 {times[int(0.95 * len(times)) - 1]:5.1f}, most {times[-1]:5.1f}")


def keys_on_page_1(path: Path) -> dict[str, list[tuple[int, float]]]:
    """What 200 keys brought back: every second one a series step, the others moves."""
    found: dict[str, list[tuple[int, float]]] = {"series step": [], "selection move": []}
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("f", *"Q3.rc", "enter")
        for number in range(KEYS // 2):
            for name, key in (("series step", "+" if number // 4 % 2 else "-"),
                              ("selection move", MOVES[number % len(MOVES)])):
                reply = terminal.press(key, quiet=QUIET_S)
                if reply.last_ms is not None:
                    found[name].append((reply.count, reply.last_ms))
    return found


def main() -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(shutil.copy(SIX, folder))
        replies = keys_on_page_1(path)
        for name, found in replies.items():
            print(told(name, found))
        print(told("all", [one for found in replies.values() for one in found]))
        bare = [sys.executable, "-c", BARE]
        ours: list[float] = []
        theirs: list[float] = []
        for _ in range(RUNS + 1):
            ours.append(first_paint_ms(app(path), "Enter"))
            theirs.append(first_paint_ms(bare, "bare app"))
        ours, theirs = ours[1:], theirs[1:]  # the first pair warms the disk's cache
        print(f"first paint    {median(ours):.0f} ms, a bare Textual app with numpy {median(theirs):.0f} ms, "
              f"ratio {median(ours) / median(theirs):.2f}")


if __name__ == "__main__":
    main()
