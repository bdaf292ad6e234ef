"""Time of the step response, sag and group delay on a warm ledger: `python -m tests.bench.pulse`.

For each demo chain, and for the six-stage demo's stages repeated: poles of the upper network with all that is read off
the response; the same for the sag of a pulse as long as the rise; group delay with its spread; 201 points of the curve;
and how far the transient misses the response. Medians after warming up; ratios within one run count, milliseconds
belong to one machine.
"""

from __future__ import annotations

from collections.abc import Callable
from statistics import median
from time import perf_counter

from polebook.book.delay import delay_at, spread
from polebook.book.ledger import ledger
from polebook.book.pulse import pulse, sag
from polebook.chain.model import Chain
from polebook.chain.read import load
from tests.bench.ledger import SIX, repeated
from tests.helpers import DEMOS

COUNTS = (6, 12, 24, 60)


def milliseconds(run: Callable[[], object], runs: int) -> float:
    """Median time of a call."""
    run()
    times = []
    for _ in range(runs):
        start = perf_counter()
        run()
        times.append(1e3 * (perf_counter() - start))
    return median(times)


def row(name: str, chain: Chain, runs: int) -> str:
    """Times of one chain, beside that of everything before it."""
    of = ledger(chain)
    before = milliseconds(lambda: ledger(chain).upper_hz, runs)
    found, solution = of.pulse, of.solution
    length = found.rise_time_s or 1e-6

    def delays() -> None:
        delay_at(solution, of.reference_hz)
        spread(solution, of.lower_hz, of.upper_hz)

    each = [milliseconds(one, runs) for one in (
        lambda: pulse(solution), lambda: sag(solution, length), delays, found.curve)]
    by = "residues" if found.transient is not None and found.transient.residues is not None else "matrix"
    miss = found.transient.miss if found.transient is not None else float("nan")
    return f"{name:20} {before:8.2f} {each[0]:8.2f} {each[1]:8.2f} {each[2]:8.2f} {each[3]:8.2f}   {by:8} {miss:.0e}"


def main() -> None:
    print("chain                to edges   pulse      sag    delay    curve   by       miss       (ms)")
    for path in sorted(DEMOS.glob("*.toml")):
        print(row(path.stem, load(str(path)), 11))
    for count in COUNTS:
        print(row(f"{count} stages", repeated(load(str(SIX)), count), 11 if count < 20 else 3))


if __name__ == "__main__":
    main()
