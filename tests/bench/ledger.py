"""Time of a warm ledger against the number of stages: `python -m tests.bench.ledger`.

The chain is the six-stage demo's row of stages, repeated; its low-role capacitors are made a hundred times larger so
that 60 stages still have a band. A ledger here is everything that `--json` prints, from the chain as read: bias,
layout, midband, sweep, edges, account, shares. The median of 15 runs after 3 to warm up; ratios within one run count,
milliseconds belong to one machine.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from statistics import median
from time import perf_counter

from polebook.book.build import document, ledger
from polebook.chain.model import Chain
from polebook.chain.read import load
from polebook.stages.registry import KINDS

SIX = Path(__file__).resolve().parents[2] / "chains" / "six-stage.toml"
COUNTS = (3, 6, 12, 24, 60)


def repeated(chain: Chain, count: int) -> Chain:
    """The chain with `count` stages, its own ones over and over."""
    stages, numbers = [], {path: x for path, x in chain.numbers.items() if path.split(".")[0] not in
                           {stage.name for stage in chain.stages}}
    for k in range(count):
        stage = chain.stages[k % len(chain.stages)]
        keys = KINDS[stage.kind].keys(chain.cards[stage.device].family if stage.device else "")
        stages.append(replace(stage, name=f"S{k + 1}"))
        for path, x in chain.numbers.items():
            name, _, key = path.partition(".")
            if name == stage.name and key != "allot":
                low = key in keys and keys[key].role == "low"
                numbers[f"S{k + 1}.{key}"] = x * 100 if low else x
    return replace(chain, stages=tuple(stages), numbers=numbers, given=frozenset(numbers))


def milliseconds(chain: Chain) -> float:
    """Median time of one whole ledger."""
    for _ in range(3):
        document(ledger(chain))
    times = []
    for _ in range(15):
        start = perf_counter()
        document(ledger(chain))
        times.append(1e3 * (perf_counter() - start))
    return median(times)


def main() -> None:
    chain = load(str(SIX))
    of_file = milliseconds(chain)
    print(f"six-stage.toml as it is  {of_file:7.2f} ms")
    rows = {count: milliseconds(repeated(chain, count)) for count in COUNTS}
    print("stages       ms   to six stages   upper edge, Hz")
    for count, ms in rows.items():
        edge = ledger(repeated(chain, count)).upper_hz
        print(f"{count:6} {ms:8.2f} {ms / rows[6]:13.2f}   {edge}")


if __name__ == "__main__":
    main()
