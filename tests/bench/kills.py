"""kill -9 while the app edits and saves: `python -m tests.bench.kills [RUNS]` (200).

While it saves: each run opens a chain in a pseudo-terminal, sends series steps, each followed by the key that writes
the file, and kills the process at a random moment. The file must then hold, whole, one of the texts that it held or
was given.

With work unsaved: each run sends steps of a value, or letters on the text page, at random intervals, notes when, and
kills the process at a random moment. The file must be as it was, and the recovery file must have every edit that was
made `MOST_S` or more before the kill.
"""

from __future__ import annotations

import os
import random
import shutil
import signal
import sys
import tempfile
import time
from collections import Counter
from contextlib import contextmanager
from itertools import pairwise
from pathlib import Path

from polebook.session import recovery
from tests.terminal.probe import Terminal, app
from tests.tui.desk import SIX, Desk

SAVES = 12
KEY = "Q3.rc"
MOST_S = 2.0
EDITS = 40
RUN_S = (0.0, 5.0)  # from a run's first edit to the kill
PAGES = {"steps": (("f", *KEY, "enter"), "+"), "text page": (("e", "end"), "x")}


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
        _read_for(terminal, wait_s)
        _kill(terminal)
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


def unsaved(path: Path, page: str, source: random.Random, run_s: tuple[float, float]) -> tuple[int, int, float]:
    """A run killed with work unsaved: edits made, edits kept, seconds from the first that was not kept to the kill.

    Raises AssertionError where the file is not as it was, the work kept is none of the texts, or an edit of more than
    `MOST_S` before the kill is not in it.
    """
    before = path.read_bytes()
    place, key = PAGES[page]
    desk = Desk(path, seconds=0.01).press(*place)
    known = [desk.state.text] + [desk.press(key).state.text for _ in range(EDITS)]
    made: list[float] = []
    with Terminal(app(path), XDG_STATE_HOME=os.environ["XDG_STATE_HOME"]) as terminal:
        terminal.until("? help")
        terminal.press(*place, quiet=0.1)
        pace = source.choice((0.1, 0.3, 1.2))  # s between edits, on the average
        end = time.monotonic() + source.uniform(*run_s)
        while (left := end - time.monotonic()) > 0:
            if len(made) < EDITS:
                made.append(time.monotonic())
                terminal.write(key.encode())
            _read_for(terminal, min(source.expovariate(1.0 / pace), left))
        _kill(terminal)
        end = time.monotonic()
    assert path.read_bytes() == before
    kept, told = recovery.found(str(path), before.decode("utf-8"))
    assert len(kept) <= 1 and not told, (kept, told)
    text = kept[0].text if kept else known[0]
    assert text in known, f"no text that there was:\n{text}"
    count = known.index(text)
    old = sum(at <= end - MOST_S for at in made)
    assert count >= old, f"{count} of {len(made)} edits kept, {old} of them were made {MOST_S} s before the kill"
    for one in kept:
        recovery.drop(one)
    return len(made), count, end - made[count] if count < len(made) else 0.0


def unsaved_runs(count: int, seed: int, run_s: tuple[float, float] = RUN_S) -> list[tuple[str, int, int, float]]:
    """Of each run the page, edits made and kept, and the age of the oldest that was lost (s)."""
    source = random.Random(seed)
    found = []
    with tempfile.TemporaryDirectory() as folder, _state(folder):
        path = Path(folder) / "chain.toml"
        for number in range(count):
            shutil.copy(SIX, path)
            page = list(PAGES)[number % len(PAGES)]
            found.append((page, *unsaved(path, page, source, run_s)))
    return found


@contextmanager
def _state(folder: str):
    """A state folder of its own, for the app and for looking what it has kept."""
    before = os.environ.get("XDG_STATE_HOME")
    os.environ["XDG_STATE_HOME"] = str(Path(folder) / "state")
    try:
        yield
    finally:
        if before is None:
            del os.environ["XDG_STATE_HOME"]
        else:
            os.environ["XDG_STATE_HOME"] = before


def _read_for(terminal: Terminal, seconds: float) -> None:
    end = time.perf_counter() + seconds
    while (left := end - time.perf_counter()) > 0:
        terminal.read(left)


def _kill(terminal: Terminal) -> None:
    terminal.signal(signal.SIGKILL)
    terminal.process.wait(10)


def table(found: list[tuple[str, int, int, float]]) -> list[str]:
    """Runs by page, and by the age of the oldest edit that a kill took with it."""
    limits = (0.0, 0.25, 0.5, 0.75, 1.0, 1.25, 1.5, MOST_S)
    lines = [f"{'page':10} {'runs':>5} {'edits':>6} {'kept':>6} {'none lost':>10} "
             + " ".join(f"{f'<{high:g} s':>7}" for high in limits[1:]) + f" {'oldest lost':>12}"]
    for page in PAGES:
        rows = [row for row in found if row[0] == page]
        ages = [age for *_, age in rows]
        counts = [sum(low < age <= high for age in ages) for low, high in pairwise(limits)]
        lines.append(f"{page:10} {len(rows):5} {sum(row[1] for row in rows):6} {sum(row[2] for row in rows):6} "
                     f"{sum(age == 0.0 for age in ages):10} " + " ".join(f"{count:7}" for count in counts)
                     + f" {max(ages, default=0.0):10.2f} s")
    return lines


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    print("\n".join(table(unsaved_runs(count, 2))))
    print(f"{count} runs killed with work unsaved: every edit of {MOST_S:g} s before the kill is in the recovery file")
    held = runs(count, 1)
    print(f"{count} runs killed while saving, every file whole; saves done before the kill: "
          + ", ".join(f"{saves}: {held[saves]}" for saves in sorted(held)))


if __name__ == "__main__":
    main()
