"""Leverage of every part, stated current and card figure of the demo chains: `python -m tests.bench.leverage`.

Against central differences of the independent solution: a number of the file is moved by a millionth to either side,
bias, cards, network, gain and edges are solved again in 50 digits (tests/independent/leverage.py).
"""

from __future__ import annotations

import tomllib
from collections.abc import Iterator
from pathlib import Path
from time import perf_counter
from typing import Any

from polebook.book.build import document, ledger
from polebook.chain.read import load
from tests.bench.ledger import SIX
from tests.independent.leverage import Leverage

WITHIN = 1e-5


def rows(book: dict[str, Any], again: Leverage) -> Iterator[tuple[str, dict[str, Any], dict[str, Any]]]:
    """Name, the program's leverage, the independent one. What is 0 has no logarithm and is left out."""
    for row in book["parts"]:
        if row["value"]:
            yield f"{row['stage']}.{row['part']}", row["leverage"], again.of_row(row["stage"], row["part"])
    for row in book["cards"]:
        if row["value"]:
            path = ("device", row["device"], row["figure"])
            yield f"{row['device']}.{row['figure']}", row["leverage"], again.of_key(path)


def of_file(path: Path) -> tuple[int, float, str]:
    """Rows compared, the largest difference and where it is."""
    book = document(ledger(load(str(path))))
    edges = {name: book["overall"][f"{name}_hz"] for name in ("lower_edge", "upper_edge")}
    again = Leverage(tomllib.loads(path.read_text(encoding="utf-8")), edges)
    count, worst, where = 0, 0.0, ""
    for name, ours, theirs in rows(book, again):
        count += 1
        for figure, value in theirs.items():
            if (value is None) != (ours[figure] is None):
                return count, float("inf"), f"{name} on {figure}"
            off = 0.0 if value is None else abs(value - ours[figure])
            if off > worst:
                worst, where = off, f"{name} on {figure}"
    return count, worst, where


def main() -> None:
    total, largest, start = 0, 0.0, perf_counter()
    print("chain                     rows  largest difference")
    for path in sorted(SIX.parent.glob("*.toml")):
        count, worst, where = of_file(path)
        total, largest = total + count, max(largest, worst)
        print(f"{path.stem:24} {count:5}  {worst:.1e}  {where}", flush=True)
    held = "yes" if largest <= WITHIN and total >= 200 else "no"
    print(f"{total} rows in {perf_counter() - start:.0f} s, largest difference {largest:.1e}")
    print(f"at least 200 rows, all within {WITHIN:.0e}: {held}")


if __name__ == "__main__":
    main()
