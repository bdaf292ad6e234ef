"""Time of a warm ledger against the number of stages: `python -m tests.bench.ledger`.

The chain is the six-stage demo's row of stages, repeated; its low-role capacitors are made a hundred times larger so
that 60 stages still have a band. "figures" is a ledger from the chain as read: bias, layout, midband, sweep, edges,
account, shares; "all" adds poles, zeros and leverage, everything that `--json` prints. Medians of several runs after
warming up; ratios within one run count, milliseconds belong to one machine.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from statistics import median
from time import perf_counter

from polebook.book.build import BAND, document, ledger
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


FIGURES = ("overall", "lines", "nodes", "bias", "account", "targets", "cautions")


def milliseconds(chain: Chain, only: tuple[str, ...] | None, runs: int) -> float:
    """Median time of one ledger."""
    document(ledger(chain), only)
    times = []
    for _ in range(runs):
        start = perf_counter()
        document(ledger(chain), only)
        times.append(1e3 * (perf_counter() - start))
    return median(times)


SIGNAL = (BAND, "nodes", "bias", "account", "targets", "cautions")  # what a ledger had before it told of noise


def noise(chain: Chain, rounds: int = 101) -> tuple[float, float, float]:
    """Medians, in ms: a warm ledger without noise, what the noise at the reference adds to it, what the total adds.

    Each round makes a ledger and asks it for all three in turn, so that what else the machine does falls on all alike.
    """
    parts: tuple[list[float], ...] = ([], [], [])
    asked = (lambda of: (document(of, SIGNAL), of.lines), lambda of: of.noise.by_line, lambda of: of.noise.output_rms)
    for turn in range(rounds + 1):
        of = ledger(chain)
        for times, ask in zip(parts, asked, strict=True):
            start = perf_counter()
            ask(of)
            if turn:
                times.append(1e3 * (perf_counter() - start))
    return median(parts[0]), median(parts[1]), median(parts[2])


def main() -> None:
    chain = load(str(SIX))
    plain, spot, total = noise(chain)
    print(f"six-stage.toml without noise: {plain:.2f} ms; noise at the reference adds {spot:.2f} ms "
          f"({100 * spot / plain:.0f} %), its total {total:.2f} ms ({100 * total / plain:.0f} %)")
    print(f"six-stage.toml as it is: figures {milliseconds(chain, FIGURES, 21):.2f} ms, "
          f"all {milliseconds(chain, None, 21):.2f} ms")
    rows = {}
    for count in COUNTS:
        longer = repeated(chain, count)
        runs = 21 if count < 20 else 5
        few = 3 if count > 30 else min(runs, 9)
        rows[count] = (milliseconds(longer, FIGURES, runs), milliseconds(longer, None, few))
    print("stages  figures ms  to six      all ms  to six   upper edge, Hz")
    for count, (figures, everything) in rows.items():
        edge = ledger(repeated(chain, count)).upper_hz
        ratios = figures / rows[6][0], everything / rows[6][1]
        print(f"{count:6} {figures:11.2f} {ratios[0]:7.2f} {everything:11.2f} {ratios[1]:7.2f}   {edge}")


if __name__ == "__main__":
    main()
