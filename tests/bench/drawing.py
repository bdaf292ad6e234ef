"""Milliseconds that drawing a screen takes beside the ledger's own figures.

    python -m tests.bench.drawing
"""

from __future__ import annotations

from statistics import median
from time import process_time

from polebook.tui.draw.screen import screen
from tests.golden.screens import CASES

ROUNDS = 101


def main() -> None:
    for name in ("ledger-six", "ledger-pinned", "nodes-row", "ledger-many"):
        for columns, rows in ((80, 24), (140, 45)):
            state = CASES[name]()
            screen(state, columns, rows)  # the ledger computes what is asked, once
            spent = []
            for _ in range(ROUNDS):
                begun = process_time()
                screen(state, columns, rows)
                spent.append(process_time() - begun)
            print(f"{name:14} {columns}x{rows}  {1e3 * median(spent):5.2f} ms")


if __name__ == "__main__":
    main()
