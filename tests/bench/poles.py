"""Poles and zeros against 50-digit arithmetic, like poles, and chains of many stages: `python -m tests.bench.poles`.

The other side is tests/independent: the number of poles by the exact degree of the determinant, the poles as roots of
that polynomial. The many stages are those of the six-stage demo, over and over (see tests/bench/ledger.py); there the
program's poles are put into the determinant in 120 digits: `residual` is the largest Newton step |D/D'|/|p|, `trace`
the largest disagreement of Σ1/(s - p) with D'/D at points of its own choice, relative, which a pole found twice in
place of its neighbour would disturb.
"""

from __future__ import annotations

import copy
import tomllib
from collections.abc import Iterable
from pathlib import Path
from statistics import median
from time import perf_counter
from typing import Any

from polebook.book.build import document
from polebook.book.ledger import ledger
from polebook.book.poles import Resolved
from polebook.book.poles import poles as resolve
from polebook.book.solution import Solution
from polebook.chain.read import load, parse
from tests.bench.ledger import SIX, repeated
from tests.independent.compare import root_differences
from tests.independent.linear import mp
from tests.independent.modes import exact_system, pieces, poles, zeros
from tests.independent.polynomial import Polynomial
from tests.independent.quantity import number
from tests.independent.solved import Solved

DEMOS = SIX.parent
COUNTS = (12, 24, 40, 60)
LOW_ROLE = ("couple", "ce", "cb")
NEAR = mp.mpf(10) ** -40


def like_stages(count: int) -> str:
    """Blocks with one pole each, all alike, each stage's output ideal to the next."""
    stages = "".join(f'[[stage]]\nname = "A{k}"\nkind = "block"\ngain = 3\npoles = ["1.7M"]\n' for k in range(count))
    return f'format = 1\n[source]\nkind = "voltage"\nresistance = 50\n{stages}'


def repeated_table(table: dict[str, Any], count: int) -> dict[str, Any]:
    """What `repeated` makes of a chain, made of a file's table."""
    result = copy.deepcopy(table)
    stages = []
    for k in range(count):
        stage = copy.deepcopy(table["stage"][k % len(table["stage"])]) | {"name": f"S{k + 1}"}
        stages.append(stage | {key: 100 * number(stage[key]) for key in LOW_ROLE if key in stage})
    return result | {"stage": stages}


def newton(found: Iterable[complex], parts: list[Polynomial]) -> float:
    """The largest |D/D'|/|p| of poles in rad/s, each of the factor of D that is nearest to zero there."""
    worst = mp.mpf(0)
    with mp.workdps(120):
        for s in found:
            p = mp.mpc(s)
            steps = []
            for part in parts:
                if part.degree:
                    here = part.value(p)
                    rise = (part.value(p * (1 + NEAR)) - here) / NEAR
                    steps.append(abs(here / rise) if rise else mp.mpf(0))
            worst = max(worst, min(steps))
    return float(worst)


def trace(found: list[complex], parts: list[Polynomial]) -> float:
    """The largest relative disagreement of Σ1/(s - p), poles at 0 included, with D'/D on a ray beside the poles."""
    worst = mp.mpf(0)
    with mp.workdps(120):
        for k in range(1, 12):
            s = mp.mpf(10) ** k * mp.expj(mp.mpf("0.4"))
            slopes = [(part.value(s * (1 + NEAR)) / part.value(s) - 1) / NEAR for part in parts if part.degree]
            whole = sum(slopes, mp.mpf(0))
            ours = sum((s / (s - mp.mpc(p)) for p in found), mp.mpc(0))
            worst = max(worst, abs(ours - whole) / max(1, len(found)))
    return float(worst)


def of_file(path: Path) -> tuple[str, ...]:
    """Name, counts and largest errors of one chain."""
    solved = Solved(tomllib.loads(path.read_text(encoding="utf-8")))
    names = [name for name, _ in solved.drawing.lines]
    book = document(ledger(load(str(path))))
    cells = [path.stem]
    exact = {"poles": poles(solved.elements), "zeros": zeros(solved.elements, solved.nodes, solved.load)}
    for kind, theirs in exact.items():
        ours = book[kind]
        found = list(root_differences(ours, theirs, names, kind))
        worst = max((d.error for d in found[1:]), default=0.0)
        count = "not resolved" if ours is None else str(len(ours))
        cells += [f"{count} of {len(theirs)}", f"{worst:.1e}"]
    return tuple(cells)


def of_many(count: int) -> tuple[str, ...]:
    """Stages, poles, times and checks of the six-stage chain made longer."""
    chain = repeated(load(str(SIX)), count)
    whole, alone, resolved = [], [], Resolved(None, "")
    for _ in range(3):
        start = perf_counter()
        document(ledger(chain))
        whole.append(perf_counter() - start)
        solution = Solution(chain)
        assert solution.winding.finite is not None
        start = perf_counter()
        resolved = resolve(solution)
        alone.append(perf_counter() - start)
    table = repeated_table(tomllib.loads(SIX.read_text(encoding="utf-8")), count)
    solved = Solved(table)
    system = exact_system(solved.elements)
    parts = pieces(system, system.unknowns, system.unknowns)
    exact = sum(part.degree for part in parts)
    times = f"{1e3 * median(alone):.0f} ms", f"{1e3 * median(whole):.0f} ms"
    if resolved.roots is None:
        return str(count), f"not resolved of {exact}", *times, "-", "-", resolved.why
    found = [root.value for root in resolved.roots]
    residual = newton([p for p in found if p], parts)
    return str(count), f"{len(found)} of {exact}", *times, f"{residual:.1e}", f"{trace(found, parts):.1e}", ""


def table(head: tuple[str, ...], rows: Iterable[tuple[str, ...]]) -> None:
    widths = (24, 14, 12, 14, 12, 12, 0)
    for cells in (head, *rows):
        line = "".join(f"{cell:{width}}" for cell, width in zip(cells, widths, strict=False))
        print(line.rstrip(), flush=True)


def main() -> None:
    print("number of the program's, of the independent solution's, and largest relative distance of a pair")
    table(("chain", "poles", "error", "zeros", "error"), (of_file(path) for path in sorted(DEMOS.glob("*.toml"))))
    like = resolve(Solution(parse(like_stages(8), "like.toml"))).roots or ()
    corner = 2 * 3.141592653589793 * 1.7e6
    off = max((abs(root.value + corner) / corner for root in like), default=float("inf"))
    print(f"\neight like buffered stages: {len(like)} poles, at most {off:.1e} from theirs,"
          f" each of a stage of its own: {len({root.stage for root in like}) == len(like)}")
    print("\nmany discrete stages")
    table(("stages", "poles", "poles alone", "whole ledger", "residual", "trace", ""), map(of_many, COUNTS))


if __name__ == "__main__":
    main()
