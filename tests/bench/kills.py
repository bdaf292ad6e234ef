"""kill -9 while the app edits and saves: `python -m tests.bench.kills [RUNS]` (200).

Each run opens a chain in a pseudo-terminal, sends series steps, each followed by the key that writes the file, and
kills the process at a random moment. The file must then hold, whole, one of the texts that it held or was given.
"""

from __future__ import annotations

import random
import shutil
import signal
import sys
import tempfile
import time
from collections import Counter
from pathlib import Path

from tests.terminal.probe import Terminal, app
from tests.tui.desk import SIX, Desk

SAVES = 12
KEY = "Q3.rc"


def texts(path: Path) -> list[str]:
    """What the file may hold: the text as opened, and the text after each step."""
    desk = Desk(path)
    desk.go(KEY)
    return [desk.text] + [desk.press("+").text for _ in range(SAVES)]


def killed(path: Path, wait_s: float) -> str:
    """The file's text after a run that was killed `wait_s` after its first save was asked for."""
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("f", *KEY, "enter", quiet=0.05)
        terminal.write(b"+w" * SAVES)
        end = time.perf_counter() + wait_s
        while (left := end - time.perf_counter()) > 0:
            terminal.read(left)
        terminal.signal(signal.SIGKILL)
        terminal.process.wait(10)
    return path.read_bytes().decode("utf-8")


def saving_s(path: Path) -> float:
    """How long the saves of a run take that is not killed."""
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("f", *KEY, "enter", quiet=0.05)
        wanted = texts(path)[-1]
        begun = time.perf_counter()
        terminal.write(b"+w" * SAVES)
        while path.read_text(encoding="utf-8") != wanted:
            terminal.read(0.002)
            if time.perf_counter() - begun > 20:
                raise SystemExit(f"it was never saved:\n{terminal.screen()}")
        return time.perf_counter() - begun


def runs(count: int, seed: int) -> Counter[int]:
    """How often the file held which of its texts. Raises AssertionError where it held none of them."""
    source = random.Random(seed)
    held: Counter[int] = Counter()
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "chain.toml"
        shutil.copy(SIX, path)
        most = saving_s(path)
        for _ in range(count):
            shutil.copy(SIX, path)
            allowed = texts(path)
            found = killed(path, source.uniform(0.0, most))
            assert found in allowed, f"neither an old nor a new text:\n{found}"
            held[allowed.index(found)] += 1
            for left in Path(folder).glob(".*.new"):  # what a kill in the middle of a save leaves beside the file
                left.unlink()
    return held


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    held = runs(count, 1)
    print(f"{count} runs killed, every file whole; saves done before the kill: "
          + ", ".join(f"{saves}: {held[saves]}" for saves in sorted(held)))


if __name__ == "__main__":
    main()
