"""Keys over a line of 9600 baud that takes 300 ms each way: `python -m tests.bench.slow_line`.

Each row: keys that were pressed, how many a second, and of what came back the bytes and the paintings, in all and had
every key been painted (the same keys one by one over a fast line), and how long after the last key the screen was as
the same keys leave it without a terminal. All keys count, or the screen never is.
"""

from __future__ import annotations

import tempfile
from pathlib import Path

from polebook.tui import keys
from tests.terminal.probe import Terminal, app
from tests.terminal.slow import SlowTerminal, Told
from tests.tui.desk import SIX, Desk, copied

AHEAD = ["f", *"Q3.rc", "enter", *"3k9", "enter", "+", "+", "tab", "2", "down", "escape", "u", "U", "tab", "e", "end",
         *" # by hand", "escape", "u", "left", "g", "b", "?", "escape", "p", "right", "+"]
RUNS: dict[str, tuple[list[str], list[str], float]] = {
    "typed ahead, all at once": ([], AHEAD, 0.0),
    "+ held down": (["f", *"Q3.rc", "enter"], ["+"] * 90, 30.0),
    "+ and - in turn": (["f", *"Q3.rc", "enter"], ["+", "-", "+"] * 30, 30.0),
    "right, left held down": ([], [*["right"] * 7, *["left"] * 7] * 6, 30.0),
    "through all pages": ([], ["pagedown"] * len(keys.PAGES) * 4, 10.0),
    "a cursor on its plot": (["tab", "3"], ["."] * 60, 30.0),
    "written on the text page": (["e", "end"], [*" # the first board, as it was measured"], 8.0),
}
"""Name -> keys that go there, keys, how many a second."""


def run(name: str, path: Path, most: int | None = None) -> Told:
    """One run, of so many keys at most. Raises AssertionError where a key is lost."""
    there, pressed, a_second = RUNS[name]
    pressed = pressed[:most]
    desk = Desk(path, seconds=1 / a_second if a_second else 0.001)
    with SlowTerminal(app(path)) as terminal:
        terminal.shows(desk.screen())
        for key in there:
            terminal.press(key, quiet=0.02)
            desk.press(key)
        terminal.shows(desk.screen())
        terminal.quiet(0.3)
        terminal.slow()
        desk.press(*pressed)
        return terminal.held(pressed, a_second, desk.screen())


def one_by_one(name: str, path: Path) -> int:
    """Bytes where each key is painted."""
    there, pressed, _ = RUNS[name]
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press(*there, quiet=0.3)
        return sum(terminal.press(key, quiet=0.06).count for key in pressed)


def main() -> None:
    print(f"{'keys':28} {'in':>4} {'applied':>8} {'bytes':>7} {'paints':>7} {'one by one':>11} {'late':>8}")
    for name in RUNS:
        with tempfile.TemporaryDirectory() as folder:
            path = copied(Path(folder), SIX)
            told = run(name, path)
            alone = one_by_one(name, path)
        print(f"{name:28} {told.keys:4} {told.keys:8} {told.sent:7} {told.paints:7} {alone:11} {told.late_s:6.1f} s",
              flush=True)


if __name__ == "__main__":
    main()
