"""Known values fitted back: sweeps made from demo chains, with noise, and how often 2 standard errors hold the truth.

Each trial draws a sweep from a chain whose keys have the values named below: normal noise on the gain and, where it is
named, on the phase. The fit begins at what the file has. Of 100 trials of an honest standard error 95 hold a key's
truth within two of it; 89 to 99 is what chance allows (about 2.5 standard deviations of that count either side).

Run it: python -m tests.bench.fit [--trials 100] [--seed 1]
"""

from __future__ import annotations

import argparse
import tempfile
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from time import perf_counter

import numpy as np

from polebook.chain.read import parse
from polebook.circuit.build import circuit
from polebook.plan.spread.alone import with_numbers
from polebook.record.fit import Request, fit
from polebook.record.transfer import transfer
from polebook.solve.edges import DECIBEL
from tests.helpers import DEMOS

LEAST, MOST = 89, 99  # of 100 trials


@dataclass(frozen=True)
class Case:
    """A demo chain, the truth, and how it is measured. noise: dB, and degrees where a phase is measured."""

    chain: str
    truth: Mapping[str, float]
    from_hz: float
    to_hz: float
    points: int
    noise: tuple[float, ...]
    offset_db: float | None = None


CASES = (
    Case("wire-break-listener", {"Q1.stray": 6.5e-12, "Q2.stray": 4e-12}, 1e3, 1e7, 101, (0.05, 0.4)),
    Case("photodiode-front",
         {"source.capacitance": 81e-12, "U1.cf": 2.1e-12, "U1.stray": 60e-12, "device.VOLT.gbw": 8.7e6},
         1e3, 2e6, 161, (0.03, 0.3)),
    Case("shellac-desk", {"V1.stray": 17e-12, "V1.ck": 87e-6, "device.HALF.gm": 2.5e-3}, 2.0, 1e6, 121, (0.04,), 0.3),
)


def text_of(case: Case) -> str:
    """The demo chain with a bench."""
    return (DEMOS / f"{case.chain}.toml").read_text(encoding="utf-8") + '\n[[bench]]\nfile = "sweep.csv"\n'


def exact(case: Case, text: str) -> tuple[np.ndarray, np.ndarray]:
    """(Hz, ln of the transfer) of the chain with the true values."""
    hz = np.geomspace(case.from_hz, case.to_hz, case.points)
    return hz, transfer(circuit(with_numbers(parse(text, case.chain), case.truth)), hz)


def table(case: Case, hz: np.ndarray, planned: np.ndarray, random: np.random.Generator) -> str:
    """The sweep as a file, with noise."""
    columns = [hz, DECIBEL * planned.real + (case.offset_db or 0.0) + random.normal(0.0, case.noise[0], hz.size)]
    if len(case.noise) > 1:
        columns.append(np.degrees(planned.imag) + random.normal(0.0, case.noise[1], hz.size))
    return "\n".join(", ".join(f"{cell:.9g}" for cell in row) for row in zip(*columns, strict=True)) + "\n"


def trials(case: Case, count: int, seed: int) -> dict[str, int]:
    """Key -> how many of the trials hold its truth within two standard errors."""
    text = text_of(case)
    hz, planned = exact(case, text)
    bench = text.count("[[bench]]")
    held = dict.fromkeys(case.truth, 0) | ({"offset": 0} if case.offset_db is not None else {})
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "chain.toml"
        for number in range(count):
            random = np.random.default_rng((seed, number))
            (Path(folder) / "sweep.csv").write_text(table(case, hz, planned, random), encoding="utf-8")
            found = fit(Request(text, str(file), bench, tuple(case.truth), case.offset_db is not None))
            for key in found.keys:
                if key.value is not None and key.error:
                    held[key.path] += abs(key.value - case.truth[key.path]) <= 2.0 * key.error
            if found.offset is not None and case.offset_db is not None and found.offset[1]:
                held["offset"] += abs(found.offset[0] - case.offset_db) <= 2.0 * found.offset[1]
    return held


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--trials", type=int, default=100)
    parser.add_argument("--seed", type=int, default=1)
    args = parser.parse_args()
    for case in CASES:
        began = perf_counter()
        held = trials(case, args.trials, args.seed)
        told = ", ".join(f"{key} {count}" for key, count in held.items())
        each = (perf_counter() - began) / args.trials
        print(f"{case.chain:20} within 2 standard errors in {args.trials} trials: {told}; {1e3 * each:.0f} ms each",
              flush=True)
        if args.trials == 100:
            outside = [key for key, count in held.items() if not LEAST <= count <= MOST]
            print(f"{'':20} {'OUTSIDE ' if outside else 'all within '}{LEAST} to {MOST} {', '.join(outside)}".rstrip())


if __name__ == "__main__":
    main()
