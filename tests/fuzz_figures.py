"""Random chains against the independent solver: every figure right to a millionth, or a plain statement of none.

    python -m tests.fuzz_figures --count 5000 --seed 1
    python -m tests.fuzz_figures --count 200 --shape hard --keep /tmp/found

A chain is drawn from seed, number and shape alone, so that a finding is repeated with --only NUMBER. Figures are judged
by dense solutions in double precision; where those and the program part, by 50 digits.
"""

from __future__ import annotations

import argparse
import sys
import time
from collections import Counter
from pathlib import Path

from tests.fuzz_chains import SHAPES, draw, shape_of
from tests.fuzz_judge import LIMIT, Judged, judge


class Tally:
    """What all the chains came to."""

    def __init__(self) -> None:
        self.chains: Counter[str] = Counter()
        self.counted: Counter[str] = Counter()
        self.worst: dict[str, tuple[float, int]] = {}
        self.said: Counter[str] = Counter()
        self.findings = 0

    def take(self, number: int, shape: str, one: Judged) -> None:
        self.chains[f"{shape}: {one.state}"] += 1
        for figure, error in one.errors.items():
            self.counted[figure] += 1
            if error <= LIMIT and error >= self.worst.get(figure, (-1.0, 0))[0]:
                self.worst[figure] = error, number
        self.said.update(one.said)
        self.findings += len(one.findings)

    def lines(self) -> list[str]:
        told = [f"{count:6d}  {what}" for what, count in sorted(self.chains.items())]
        told += [f"{count:6d}  {figure}: worst {self.worst.get(figure, (0.0, 0))[0]:.1e}"
                 f" (chain {self.worst.get(figure, (0.0, 0))[1]})" for figure, count in sorted(self.counted.items())]
        told += [f"{count:6d}  not judged: {what}" for what, count in self.said.most_common()]
        return [*told, f"{self.findings:6d}  disagreements"]


def main(argv: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.fuzz_figures", description=__doc__.split("\n")[0])
    parser.add_argument("--count", type=int, default=1000)
    parser.add_argument("--first", type=int, default=0, help="number of the first chain")
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--shape", choices=SHAPES, help="all of one shape; else half plain, a quarter each other")
    parser.add_argument("--deep", type=int, default=0, metavar="N", help="of every Nth chain the whole ledger")
    parser.add_argument("--keep", type=Path, metavar="FOLDER", help="where the files of findings are put")
    parser.add_argument("--only", type=int, metavar="NUMBER", help="this chain alone; its text is printed")
    args = parser.parse_args(argv)
    numbers = range(args.first, args.first + args.count) if args.only is None else [args.only]
    tally, begun = Tally(), time.monotonic()
    try:
        for done, number in enumerate(numbers, 1):
            shape = args.shape or shape_of(number)
            text = draw(args.seed, number, shape)
            if args.only is not None:
                print(text)
            one = judge(text, deep=bool(args.deep) and number % args.deep == 0)
            tally.take(number, shape, one)
            for found in one.findings:
                print(f"seed {args.seed}, chain {number} ({shape}): {found}", flush=True)
            if one.findings and args.keep:
                args.keep.mkdir(parents=True, exist_ok=True)
                told = "".join(f"# {found}\n".replace("\n", " ").rstrip() + "\n" for found in one.findings)
                (args.keep / f"{shape}-{args.seed}-{number}.toml").write_text(told + text, encoding="utf-8")
            if args.only is not None:
                print("\n".join(f"{figure}: {error:.2g}" for figure, error in one.errors.items()), *one.said, sep="\n")
            elif done % 500 == 0:
                print(f"-- {done} chains, {time.monotonic() - begun:.0f} s", flush=True)
    except KeyboardInterrupt:
        print("-- stopped")
    print("\n".join(tally.lines()))
    return 1 if tally.findings else 0


if __name__ == "__main__":
    sys.exit(main())
