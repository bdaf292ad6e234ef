"""Runs of built chains for the tests of the spread page: real ones kept, and made-up ones of anything."""

from __future__ import annotations

import random
from dataclasses import replace
from functools import cache

import numpy as np

from polebook.chain.model import Chain
from polebook.plan.spread.statistics import Share, Statistics
from polebook.problem import Problem
from polebook.session import state as sessions
from polebook.tui.spread_work import steps
from polebook.tui.spreads import ALL, TABLE, Figure, Heap, Row, Run, Told, Worst
from polebook.tui.view import Spread

NAMES = ("gain_db", "gain_at_reference_db", "lower_edge_hz", "upper_edge_hz", "peaking_db", "noise", "x" * 50)
PERCENTILES = ("0.1", "1", "50", "99", "99.9")


@cache
def told(text: str, builds: int = 2000, seed: int = 1) -> Told:
    """The whole run of a chain, computed here; as if it had taken a second."""
    last = [told for _, _, told in steps(sessions.new_session("x.toml", text).chain, builds, seed) if told][-1]
    return replace(last, seconds=1.0)


def run_of(chain: Chain, text: str, builds: int = 2000, seed: int = 1) -> Run:
    return Run(chain, told(text, builds, seed))


def random_spread(rng: random.Random, chain: Chain | None, words: tuple[str, ...]) -> Spread:
    """Anywhere on the page, with a run of anything or with none."""
    run = before = None
    if chain is not None and rng.random() < 0.85:
        run, before = (Run(chain, random_told(rng, words)) for _ in range(2))
    return Spread(rng.choice((100, 10_000, 1_000_000)), rng.choice((0, 1, 2**64 - 1)), rng.choice((0, 100)),
                  rng.choice(("", TABLE, *NAMES)), rng.choice(("", *words)), run, rng.choice((None, before)))


def random_told(rng: random.Random, words: tuple[str, ...]) -> Told:
    builds = rng.choice((1, 100, 10_000, 10_000_000))
    done = rng.choice((1, builds))
    names = rng.sample(NAMES, rng.randrange(len(NAMES) + 1))
    rows = tuple(random_row(rng, names, words) for _ in range(rng.choice((0, 1, 5, 90))))
    targets = [name for name in ("gain", "lower", "upper", "peaking") if rng.random() < 0.7]
    yields = {name: Share(*(rng.choice((0.0, 1.0, rng.random(), 1e-7, 1 - 1e-7)) for _ in range(3)))
              for name in ((ALL, *targets) if rng.random() < 0.8 else ())}
    return Told(builds, rng.choice((0, 1, 2**64 - 1)), done, tuple(random_figure(rng, name, words) for name in names),
                rows, rng.random() < 0.6, yields, tuple(rng.sample(words, 2)), {rng.choice(words): 3},
                {rng.choice(words): 10_000_000}, (Problem(None, rng.choice(words), rng.choice(words), ""),),
                rng.choice((0.0, 1.5, 1e9)), rng.random() < 0.6)


def random_number(rng: random.Random) -> float:
    return rng.choice((0.0, 1e-300, 1e300, -12.0, 10 ** rng.uniform(-12, 12), rng.uniform(-200, 200)))


def random_figure(rng: random.Random, name: str, words: tuple[str, ...]) -> Figure:
    def number() -> float | None:
        return rng.choice((None, float("inf"), random_number(rng)))

    unit = "dB" if name.endswith("db") else "Hz"
    target = {"g": "gain", "l": "lower", "u": "upper", "p": "peaking"}.get(name[0], "")
    heap = None
    if rng.random() < 0.8:
        low = random_number(rng)
        high = low + max(abs(low), 1e-12) * 10 ** rng.uniform(-9, 6)
        counts = np.random.default_rng(rng.randrange(99)).integers(0, rng.choice((1, 2, 10**6)), 960)
        heap = Heap(low, high, counts, 1, 0)
    statistics = None
    if rng.random() < 0.8:
        found = sorted(random_number(rng) for _ in range(7))
        statistics = Statistics(9, found[3], rng.choice((None, 0.0, abs(found[0]))),
                                dict(zip(PERCENTILES, found[1:6], strict=True)), found[0], found[6])
    worst = tuple(Worst(rng.choice(("low", "high")), number(), rng.choice(words), rng.randrange(9))
                  for _ in range(rng.randrange(3)))
    return Figure(name, target, unit, number(), number(), statistics, heap,
                  rng.choice(((), (None, random_number(rng)), (random_number(rng), None), (-1.0, 1.0))), worst)


def random_row(rng: random.Random, names: list[str], words: tuple[str, ...]) -> Row:
    word = rng.choice(words)
    return Row(word, rng.choice((word, "Q1.rc", "device.N.beta", "supply.temperature")), word,
               rng.choice(("resistor", "temperature", "own", "beta")), random_number(rng),
               rng.choice((None, 0.0, rng.uniform(-1, 1))), rng.choice((None, 0.0, rng.uniform(-1, 1))),
               rng.random() < 0.5, {name: rng.random() for name in names},
               {name: rng.choice((-1, 1)) for name in names})
