"""Bytes and times of pages in a pseudo-terminal: `python -m tests.bench.pages [4 5 6] [targets]`.

Six stages, pinned, at 80x24 and 140x45: steps of a value along its series with the page drawn anew, moves of the cursor
or of the chosen figure, of the row, zooms. The goal at 80x24: p95 of a step within 60 ms, a move of the cursor within
3 kB. With `targets` the chain has one for everything that a page judges, which a step then pays for on every page. Then
what the pages compute costs by itself, without a terminal.
"""

from __future__ import annotations

import sys
import tempfile
from collections.abc import Callable, Mapping
from pathlib import Path
from statistics import median
from time import perf_counter

from polebook.book.ledger import Ledger, ledger
from polebook.book.response import whole_band
from polebook.chain.read import parse
from tests.bench.app import QUIET_S, SIX, told
from tests.terminal.probe import Terminal, app

KEYS, ROUNDS = 60, 21
PULSE = 'pulse = "2u"\n'  # page 4 shows the sag of it
TARGETS = 'rise = "120n"\novershoot = "2 %"\nsag = "5 %"\nnoise = "1.2n"\nswing = "1"\ncurrent = "20m"\n'
MOVES: Mapping[str, tuple[str, ...]] = {
    "cursor": (".", ".", ".", ","), "row": ("down", "down", "up", "down"), "zoom, pan": ("z", "]", "Z", "["),
    "other end": ("b",), "in, out": ("v",), "line": ("right", "right", "left", "left"),
}
"""What is done beside steps -> its keys in turn."""
PAGES: Mapping[str, tuple[str, ...]] = {
    "3": ("cursor", "zoom, pan"), "4": ("cursor", "row", "zoom, pan", "other end"),
    "5": ("cursor", "row", "zoom, pan", "in, out"), "6": ("cursor", "line", "other end"),
}
"""Digit of a page -> what is done on it."""


def text(targets: bool) -> str:
    """The six stages with the length of a pulse, and with all targets."""
    more = PULSE + (TARGETS if targets else "")
    return SIX.read_text(encoding="utf-8").replace("[target]\n", f"[target]\n{more}")


def on_page(path: Path, page: str, columns: int, rows: int) -> dict[str, list[tuple[int, float]]]:
    """What keys on a page brought back, by what they do: (bytes, ms until the last of them)."""
    found: dict[str, list[tuple[int, float]]] = {"step": []}
    with Terminal(app(path), columns, rows) as terminal:
        terminal.until("? help")
        terminal.press("p", "f", *"Q3.rc", "enter", "+", "tab", page)
        for number in range(KEYS):
            done = [("step", "+" if number // 4 % 2 else "-")]
            done += [(name, MOVES[name][number % len(MOVES[name])]) for name in PAGES[page]]
            for name, key in done:
                reply = terminal.press(key, quiet=QUIET_S)
                if reply.last_ms is not None:
                    found.setdefault(name, []).append((reply.count, reply.last_ms))
    return found


def fresh() -> Ledger:
    """A ledger of which nothing is computed but what every page needs."""
    of = ledger(parse(text(targets=False), "six.toml"))
    assert of.solution.band
    return of


def alone_ms() -> None:
    """What the pages have computed for a ledger that is new, and for a move of the cursor."""
    works: tuple[tuple[str, Callable[[Ledger], object]], ...] = (
        ("step response", lambda of: (of.pulse, of.pulse.curve())), ("sag", lambda of: of.sag),
        ("noise at the reference", lambda of: of.noise and of.noise.shares),
        ("noise of the band", lambda of: of.noise and of.noise.totals),
        ("density over frequency", lambda of: of.noise and of.noise.over(_frequencies(of))),
        ("one frequency", lambda of: of.noise and of.noise.spot(1e5)), ("levels", lambda of: of.levels),
    )
    for name, work in works:
        spent = []
        for _ in range(ROUNDS):
            of = fresh()
            begun = perf_counter()
            work(of)
            spent.append(perf_counter() - begun)
        print(f"{name:24} {1e3 * median(spent):6.2f} ms")


def _frequencies(of: Ledger) -> list[float]:
    low, high = whole_band(of)
    return [low * (high / low) ** (at / 79) for at in range(80)]


def main() -> None:
    pages = [word for word in sys.argv[1:] if word in PAGES] or ["4", "5", "6"]
    with tempfile.TemporaryDirectory() as folder:
        for page in pages:
            for columns, rows in ((80, 24), (140, 45)):
                path = Path(folder) / f"page-{page}-at-{columns}.toml"
                path.write_text(text("targets" in sys.argv[1:]), encoding="utf-8")
                print(f"page {page}, {columns}x{rows}")
                for name, found in on_page(path, page, columns, rows).items():
                    print(told(name, found))
    alone_ms()


if __name__ == "__main__":
    main()
