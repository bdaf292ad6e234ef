"""Randomly broken variants of the demo chains: how many are brought back to their targets, and in what time.

Every part that is soldered in is scaled by a factor of its own, even in its logarithm from 0.3 to 3; a variant that
meets its targets all the same is drawn again. Where one is not brought back, as many random plans as asked for are
tried in its place: half of them anywhere within the bounds of the search, half of them about the plan that was found,
all of them snapped as that one is, and compared by their shortfalls, 5 % added for a target that is missed at all.
A yield is told beside. Then the same for demo chains of which too much is wanted: a gain 10 dB higher, an upper edge
four times as high.

Run it: python -m tests.bench.apportion [--count 20] [--seed 1] [--random 2000]
"""

from __future__ import annotations

import argparse
from math import exp, log, sqrt
from pathlib import Path
from time import perf_counter, process_time

import numpy as np

from polebook.book.ledger import ledger
from polebook.chain.edits import content, set_value
from polebook.chain.paths import locate
from polebook.chain.read import known_reading
from polebook.plan.apportion import Request, Result, apportion
from polebook.plan.apportion.handles import free
from polebook.plan.apportion.merit import merit, shortfall
from polebook.plan.apportion.prepare import bare, prepared
from polebook.plan.apportion.snap import nearest
from polebook.plan.apportion.task import Task, Trial, trial
from polebook.plan.apportion.yields import YIELD, met_beside
from polebook.problem import ProblemsFound
from polebook.text.rearrange import replace_all
from tests.bench.ledger import SIX

LOWEST, HIGHEST = 0.3, 3.0


def broken(path: Path, random: np.random.Generator) -> str:
    """The text of a demo chain with every fitted part scaled by a factor of its own."""
    text = path.read_text(encoding="utf-8")
    reading = known_reading(text, path.name)
    assert reading.chain is not None
    values = []
    for handle in free(reading.chain, content(reading, text), ()).handles:
        factor = exp(random.uniform(log(LOWEST), log(HIGHEST)))
        values.append((locate(handle.path, content(reading, text)).path, f'"{handle.now * factor:.3e}"'))
    return replace_all(text, values, "broken", path.name).apply(text)


def told(text: str, name: str) -> str:
    """How many targets a text misses, or why it has no figures."""
    chain = known_reading(text, name).chain
    assert chain is not None
    try:
        of = ledger(chain)
        missed = [target.name for target in of.targets if not target.met and target.name != YIELD]
    except ProblemsFound as found:
        return found.problems[0].what
    return ", ".join(missed) if of.judged and of.solution.band.clean else "no band"


def timed(request: Request) -> tuple[Result, float, float, float]:
    """The result, seconds, seconds of the processor and the longest piece in ms."""
    start, busy, longest = perf_counter(), process_time(), 0.0
    work = apportion(request)
    while True:
        piece = perf_counter()
        try:
            next(work)
        except StopIteration as done:
            longest = max(longest, perf_counter() - piece)
            return done.value, perf_counter() - start, process_time() - busy, 1e3 * longest
        longest = max(longest, perf_counter() - piece)


def at_random(text: str, name: str, result: Result, count: int, seed: int) -> tuple[float, float]:
    """(how far the plan is from its targets, the least of `count` random plans), neper; 0.05 for each one missed."""
    reading = known_reading(text, name)
    assert reading.chain is not None
    handles = free(reading.chain, content(reading, text), ()).handles
    plain = bare(reading.chain, handles)
    values = [key.value or 0.0 for key in result.proposal.keys]
    x = np.log(np.abs([value or handle.low for value, handle in zip(values, handles, strict=True)]))
    today = trial(plain, plain.start)
    task = prepared(plain, "", today if today.lives else trial(plain, x, values))
    found, random, best = trial(task, x, values), np.random.default_rng(seed), float("inf")
    low, high = task.bounds
    for number in range(count):
        far = number % 2 == 0
        there = random.uniform(low, high) if far else np.clip(x + 0.3 * random.standard_normal(x.size), low, high)
        best = min(best, _far(task, _snapped(task, there)))
    return _far(task, found), best


def _far(task: Task, plan: Trial) -> float:
    return shortfall(task, plan) + (0.05 * merit(task, much=0.0).missed(plan.rows) if plan.lives else 0.0)


def _snapped(task: Task, x: np.ndarray) -> Trial:
    there = trial(task, x)
    return trial(task, *nearest(task, there))


def greedy(text: str) -> str:
    """The text of a chain with a gain 10 dB higher and an upper edge four times as high among its targets."""
    chain = known_reading(text, "").chain
    assert chain is not None
    for key, times in (("gain", sqrt(10.0)), ("upper", 4.0)):
        wanted = f"{chain.numbers[f'target.{key}'] * times:.4g}"
        text = set_value(text, "", f"target.{key}", wanted)[0].apply(text)
    return text


def row(number: int, path: Path, text: str, args: argparse.Namespace) -> tuple[bool, float]:
    """Apportions a text and tells of it; (all met, seconds)."""
    result, wall, busy, longest = timed(Request(text, path.name))
    moved = sum(key.moved for key in result.proposal.keys)
    state = "met" if result.proposal.met else "yld" if met_beside(result.proposal) else "NOT"
    print(f"{number:3} {path.stem:20} {told(text, path.name):29.29} {state}"
          f" {moved:3} moved {result.trials:4} trials {result.starts} starts {wall:5.2f} s ({busy:5.2f} busy)"
          f" longest {longest:4.0f} ms", flush=True)
    for caution in result.proposal.cautions:
        print("      caution:", caution)
    if not met_beside(result.proposal):
        for target in result.proposal.targets:
            if not target.after.met:
                print(f"      {target.name}: {target.after.want:.4g} wanted, {target.after.got} got")
        ways = ", ".join(f"{one.target} at {one.got:.4g}" for one in result.gives) or "no single target alone"
        own, best = at_random(text, path.name, result, args.random, args.seed)
        print(f"      the others met with: {ways}")
        print(f"      off by {own:.4f} neper; the best of {args.random} random plans {best:.4f}", flush=True)
    for target in result.proposal.targets:
        if target.name == YIELD:
            print(f"      yield: {target.after.want:.4g} wanted, {target.after.got} got")
    return met_beside(result.proposal), wall


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--count", type=int, default=20)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--random", type=int, default=2000)
    args = parser.parse_args()
    random = np.random.default_rng(args.seed)
    chains = sorted(SIX.parent.glob("*.toml"))
    done = []
    print(f"{args.count} variants, values scaled {LOWEST:g}-{HIGHEST:g}x, seed {args.seed}; missed before, after:")
    for number in range(args.count):
        path = chains[number % len(chains)]
        text = broken(path, random)
        while not told(text, path.name):
            text = broken(path, random)
        done.append(row(number + 1, path, text, args))
    times = [seconds for _, seconds in done]
    print(f"{sum(met for met, _ in done)} of {args.count} brought back; "
          f"seconds: median {np.median(times):.2f}, most {max(times):.2f}")
    print("\ntoo much wanted: gain 10 dB higher, upper edge four times as high")
    for number, path in enumerate(chains):
        row(number + 1, path, greedy(path.read_text(encoding="utf-8")), args)


if __name__ == "__main__":
    main()
