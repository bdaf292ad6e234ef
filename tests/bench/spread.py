"""Built chains against dense solutions of the same builds: `python -m tests.bench.spread`.

All in one run: 10,000 builds of the six-stage chain, gain and both edges. The program's time is that of the whole
spread: set-up, draws, bias, every build's poles on the right counted, its edges proven to be the first ones. The dense
solutions get draws, part values and midband gains for nothing, a bracket right beside each edge from the leverages, and
have no more to do than to find the root in it:

    batched   the nodal matrices of a block of builds, one LAPACK call a look for all of them
    loop      a Python loop over builds that stamps the matrix of every look part by part, and solves it
    thrifty   the same, stamped once a build (its bias solutions counted in both)

"the same looks" is the batched one at all frequencies that the program looks at. Then what the bare arithmetic of the
elimination would take, growth with stages and builds, memory of a million builds, the linear estimate, a yield known in
closed form. Ratios within one run count, seconds belong to one machine.
"""

from __future__ import annotations

import os

for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(name, "1")  # one core is one core

import subprocess  # noqa: E402
import sys  # noqa: E402
from collections.abc import Callable, Iterator  # noqa: E402
from dataclasses import dataclass, field, replace  # noqa: E402
from math import erf, sqrt  # noqa: E402
from pathlib import Path  # noqa: E402
from time import perf_counter  # noqa: E402
from types import MappingProxyType  # noqa: E402
from typing import Any  # noqa: E402

import numpy as np  # noqa: E402
from numpy.typing import NDArray  # noqa: E402

from polebook.chain.model import Chain  # noqa: E402
from polebook.chain.read import load, parse  # noqa: E402
from polebook.circuit.build import values  # noqa: E402
from polebook.plan.spread.batch import Batch, Midband  # noqa: E402
from polebook.plan.spread.draws import drawn  # noqa: E402
from polebook.plan.spread.figures import figures  # noqa: E402
from polebook.plan.spread.linear import as_filed, slopes  # noqa: E402
from polebook.plan.spread.model import Request, Result  # noqa: E402
from polebook.plan.spread.nominal import Nominal, nominal  # noqa: E402
from polebook.plan.spread.roots import roots  # noqa: E402
from polebook.plan.spread.run import spread  # noqa: E402
from polebook.plan.spread.workers import Crew  # noqa: E402
from polebook.solve.root import bracketed_root  # noqa: E402
from tests.bench.ledger import SIX, repeated  # noqa: E402
from tests.independent.dense_spread import HALF_POWER, matrices  # noqa: E402

Numbers = NDArray[np.float64]
BUILDS, SEED, LOOPED, DENSE_BLOCK = 10_000, 1, 100, 250
ROOT_LOOKS = 6  # of the program for both edges, beside its grid
EDGES = ("lower_edge_hz", "upper_edge_hz")
NAMES = ("gain_db", *EDGES)


def seconds(work: Callable[[], Any], times: int) -> tuple[float, Any]:
    """The least of several times, and what came of it."""
    best, found = float("inf"), None
    for _ in range(times):
        start = perf_counter()
        found = work()
        best = min(best, perf_counter() - start)
    return best, found


def engine(chain: Chain, builds: int, workers: int, names: tuple[str, ...] = NAMES, crew: Crew | None = None) -> Result:
    request = Request(chain, builds, SEED, figures=names, corners=False, costs=False, workers=workers)
    return [result for _, _, result in spread(request, crew=crew)][-1]


@dataclass
class Dense:
    """Gain and edges of builds by dense solutions, from brackets of the leverages."""

    of: Nominal
    looks: int = 0
    reach: float = 0.03
    slope: dict[str, Any] = field(default_factory=dict)

    def __post_init__(self) -> None:
        asked = figures(self.of.drawn.chain, NAMES)
        self.slope = dict(slopes(self.of.ledger, self.of.drawn, as_filed(self.of.drawn), asked))

    def starts(self, edge: str, first: int, count: int) -> Numbers:
        """ln f of an edge by its leverages."""
        at = self.of.ledger.lower_hz if edge == "lower_edge_hz" else self.of.ledger.upper_hz
        assert at is not None
        total = np.full(count, np.log(at))
        for draw in self.of.drawn.draws:
            total += self.slope[edge][draw.name] * draw.off(SEED, first, count)
        return total

    def prepared(self) -> Iterator[tuple[int, int, list[Any], Numbers]]:
        """What is not timed against the dense solutions: part values and midband gains of blocks of builds."""
        circuit = self.of.circuit
        midband = Midband(circuit.layout, circuit.network, DENSE_BLOCK)
        for first in range(0, BUILDS, DENSE_BLOCK):
            numbers = self.of.drawn.built(SEED, first, DENSE_BLOCK)
            parts = values(circuit, numbers)
            yield first, DENSE_BLOCK, parts, np.log(np.abs(midband.look(parts)))

    def batched(self, blocks: list[tuple[int, int, list[Any], Numbers]]) -> dict[str, Numbers]:
        found = {edge: np.zeros(BUILDS) for edge in EDGES}
        self.looks = 0
        for first, count, parts, level in blocks:
            built = matrices(self.of.circuit.layout, parts, count)
            every = np.arange(count)

            def loss(builds: Any, x: Numbers, built: Any = built, level: Numbers = level) -> Numbers:
                hz = np.ones(level.size)
                hz[builds] = np.exp(x)
                self.looks += hz.size
                return (np.log(np.abs(built.transfer(hz))) - level - HALF_POWER)[builds]

            for edge, outward in (("lower_edge_hz", -1), ("upper_edge_hz", 1)):
                a = self.starts(edge, first, count) - outward * self.reach
                b = a + 2 * outward * self.reach
                fa, fb = loss(every, a), loss(every, b)
                while (fa <= 0).any() or (fb >= 0).any():  # the few that the leverages miss
                    a, b = np.where(fa <= 0, a - outward * 0.1, a), np.where(fb >= 0, b + outward * 0.1, b)
                    fa, fb = loss(every, a), loss(every, b)
                x = roots(loss, every, a, b, fa, fb, a + (b - a) * fa / (fa - fb))
                found[edge][first:first + count] = np.exp(x)
        return found

    def looks_of_the_program(self, blocks: list[tuple[int, int, list[Any], Numbers]]) -> float:
        """Seconds a build of the batched solution at every frequency that the program looks at."""
        start, done = perf_counter(), 0
        for _, count, parts, _ in blocks[:4]:
            built = matrices(self.of.circuit.layout, parts, count)
            for hz in (*self.of.hz.tolist(), *[1e6] * ROOT_LOOKS):
                np.log(np.abs(built.transfer(np.full(count, hz))))
            done += count
        return (perf_counter() - start) / done

    def looped(self, count: int, thrifty: bool) -> tuple[dict[str, Numbers], float]:
        """Edges of the first builds one by one, and seconds a build."""
        circuit = self.of.circuit
        numbers = self.of.drawn.built(SEED, 0, count)
        starts = {edge: self.starts(edge, 0, count) for edge in EDGES}
        midband = Midband(circuit.layout, circuit.network, count)
        levels = np.log(np.abs(midband.look(values(circuit, numbers))))
        found = {edge: np.zeros(count) for edge in EDGES}
        begin = perf_counter()
        for k in range(count):
            parts = values(circuit, {path: float(x[k]) for path, x in numbers.items()})
            once = stamped(circuit.layout, parts) if thrifty else None

            def loss(x: float, parts: list[float] = parts, once: Any = once, level: float = float(levels[k])) -> float:
                real, rising, right, falling = once or stamped(circuit.layout, parts)
                s = 2j * np.pi * np.exp(x)
                solved = np.linalg.solve(real + s * rising, right + s * falling)
                return float(np.log(abs(solved[circuit.layout.after[-1] - 1]))) - level - HALF_POWER

            for edge, outward in (("lower_edge_hz", -1), ("upper_edge_hz", 1)):
                a = float(starts[edge][k]) - outward * self.reach
                b = a + 2 * outward * self.reach
                fa, fb = loss(a), loss(b)
                while fa <= 0 or fb >= 0:
                    a, b = a - outward * 0.1 * (fa <= 0), b + outward * 0.1 * (fb >= 0)
                    fa, fb = loss(a), loss(b)
                found[edge][k] = np.exp(bracketed_root(loss, a, b, fa, fb, 1e-9))
        return found, (perf_counter() - begin) / count


def stamped(layout: Any, parts: list[float]) -> tuple[Any, Any, Any, Any]:
    """One build, stamped in a loop: conductances, capacitances, the right-hand side of either; the EMF is node 0."""
    count = len(layout.names)
    tables = [np.zeros((count + 1, count + 1)) for _ in range(2)]
    for branch in layout.branches:
        for index in branch.groups[0]:
            kind = layout.parts[index].type
            table, value = (tables[1], parts[index]) if kind == "C" else (tables[0], 1.0 / parts[index])
            i, j = branch.i, branch.j
            table[i, i] += value
            table[j, j] += value
            table[i, j] -= value
            table[j, i] -= value
    for segment in layout.segments:
        for t in segment.transfers:
            gm = parts[t.part]
            tables[0][t.output, t.plus] += gm
            tables[0][t.output, t.minus] -= gm
            tables[0][t.lower, t.plus] -= gm
            tables[0][t.lower, t.minus] += gm
    assert layout.emf == 0
    real, rising = tables
    return real[1:count, 1:count], rising[1:count, 1:count], -real[1:count, 0], -rising[1:count, 0]


def against_dense(chain: Chain) -> None:
    of = nominal(drawn(chain))
    dense = Dense(of)
    blocks = list(dense.prepared())
    least: dict[str, float] = {}

    def timed(what: str, work: Callable[[], Any], times: int = 1) -> Any:
        t, found = seconds(work, times)
        least[what] = min(least.get(what, float("inf")), t)
        return found

    result, densely, plain, thrifty = None, {}, ({}, 0.0), ({}, 0.0)
    with Crew() as crew:
        crew.grow(1)
        for _ in range(3):  # by turns, so that all have the same weather
            result = timed("one", lambda: engine(chain, BUILDS, 1), 3)
            timed("two", lambda: engine(chain, BUILDS, 2, crew=crew), 3)
            densely = timed("batched", lambda: dense.batched(blocks))
            for what, thrift in (("loop", False), ("thrifty", True)):
                found, each = dense.looped(LOOPED, thrift)
                least[what] = min(least.get(what, float("inf")), each * BUILDS)
                plain, thrifty = (plain, found) if thrift else (found, thrifty)
            each = dense.looks_of_the_program(blocks)
            least["looks"] = min(least.get("looks", float("inf")), each * BUILDS)
        many = 10 * BUILDS
        longer = [min(seconds(lambda workers=workers: engine(chain, many, workers, crew=crew), 2)[0] for _ in range(2))
                  for workers in (1, 2)]
    assert result is not None
    one = least["one"]
    print(f"{BUILDS} builds of {chain.title}: {len(of.circuit.layout.names)} nodes, {len(of.drawn.draws)} draws, "
          f"grid of {of.hz.size}")
    print("                                                    s   us/build  times the program")
    for key, what in (("one", "the program, one core"), ("two", "the program, two cores, helper at hand"),
                      ("batched", "dense, LAPACK batched, one core"), ("looks", "  the same looks (1000 builds timed)"),
                      ("loop", f"dense, Python loop ({LOOPED} builds timed)"), ("thrifty", "  thrifty")):
        print(f"{what:44} {least[key]:8.3f} {least[key] / BUILDS * 1e6:10.1f} {least[key] / one:18.1f}")
    print(f"dense looks: {dense.looks / BUILDS:.1f} a build, {least['batched'] / dense.looks * 1e6:.1f} us each")
    print(f"{many} builds: one core {longer[0]:.3f} s, two {longer[1]:.3f} s, ratio {longer[0] / longer[1]:.2f}")
    for edge in EDGES:
        told = [np.abs(result.columns[edge][:some[edge].size] / some[edge] - 1).max()
                for some in (densely, plain, thrifty)]
        print(f"largest difference of {edge}: batched {told[0]:.1e} (all builds), "
              f"loop {told[1]:.1e}, thrifty {told[2]:.1e} ({LOOPED} builds)")
    arithmetic(of, one)


def arithmetic(of: Nominal, one: float) -> None:
    """A look against its operations alone, each timed on numbers that stay in the innermost cache."""
    size, short = 2500, 1000
    batch = Batch(of.circuit.layout, size)
    batch.fill(of.circuit.network.values)
    with np.errstate(all="ignore"):
        look = seconds(lambda: batch.look(1e5), 200)[0] / size
    rng = np.random.default_rng(1)
    a, b, c = (rng.normal(size=short) + 1j * rng.normal(size=short) for _ in range(3))
    x, y, z = (rng.normal(size=short) for _ in range(3))
    total = 0.0
    few = {True: np.ones(1), False: np.ones(1, dtype=complex)}
    for name, count in batch.counts.items():
        operation = getattr(np, name.split()[0])
        operands = (x, y, z) if name.endswith("reals") else (a, b, c)
        operands = operands[:operation.nin] + operands[2:]
        bare = seconds(lambda operation=operation, operands=operands: operation(*operands), 400)[0]
        one_number = few[name.endswith("reals")]
        call = seconds(lambda operation=operation, x=one_number: operation(*[x] * operation.nargs), 400)[0]
        total += count * max(0.0, bare - call) / short
    print(f"one look: {look * 1e9:.0f} ns a build; its {sum(batch.counts.values())} operations alone, in the innermost "
          f"cache and without their calls: {total * 1e9:.0f} ns; ratio {look / total:.2f}")
    looks = of.hz.size + ROOT_LOOKS
    print(f"a build is some {looks} looks, {looks * look * 1e6:.1f} us of {one / BUILDS * 1e6:.1f}; "
          f"ratio of the whole to the bare arithmetic of its looks {one / BUILDS / (looks * total):.2f}")


def growth(chain: Chain) -> None:
    print("\nstages  nodes  grid   s for 5000   us/build   us/build and stage   times six")
    rows = []
    for count in (3, 6, 12, 24, 48):
        longer = repeated(chain, count)
        of = nominal(drawn(longer))
        t, result = seconds(lambda longer=longer: engine(longer, 5000, 1), 3)
        assert not result.failures() and not result.alone
        rows.append((count, len(of.circuit.layout.names), of.hz.size, t))
    six = next(t for count, _, _, t in rows if count == 6)
    for count, nodes, grid, t in rows:
        each = t / 5000 * 1e6
        print(f"{count:6} {nodes:6} {grid:5} {t:12.3f} {each:10.1f} {each / count:14.2f} {t / six:15.2f}")
    print("\nbuilds       s   us/build")
    for builds in (1000, 3000, 10_000, 30_000, 100_000):
        t = seconds(lambda builds=builds: engine(chain, builds, 1), 3)[0]
        print(f"{builds:6} {t:7.3f} {t / builds * 1e6:10.1f}")


MILLION = """
import resource, sys, time
from polebook.chain.read import load
from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread
chain = load(sys.argv[1])
start = time.perf_counter()
for done, total, result in spread(Request(chain, 1_000_000, workers=int(sys.argv[2]))):
    pass
told = [result.statistics(figure.name) for figure in result.figures]
most = [resource.getrusage(who).ru_maxrss / 1024 for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
print(result.done, result.complete, time.perf_counter() - start, *most)
"""


def million() -> None:
    print()
    for workers in (1, 2):
        ran = subprocess.run([sys.executable, "-c", MILLION, str(SIX), str(workers)], check=True, capture_output=True,
                             text=True, env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)})
        done, complete, t, own, helper = ran.stdout.split()
        print(f"{done} builds, all figures, costs and corners, {workers} process(es): {float(t):.1f} s, "
              f"at most {float(own):.0f} MB and {float(helper):.0f} MB of a helper, complete {complete}")


def small(chain: Chain, times: float) -> Chain:
    """The chain with all tolerances a fraction of what they are."""
    numbers = {path: x * times if path.startswith("tolerance.") else x for path, x in chain.numbers.items()}
    return replace(chain, numbers=MappingProxyType(numbers))


def linear(chain: Chain) -> None:
    print("\ndeviation by leverage over that of the builds, 20000 builds, tolerances times")
    print(f"{'':16}" + "".join(f"{times:>12g}" for times in (1, 0.3, 0.1, 0.03)))
    ratios = {name: [] for name in NAMES}
    for times in (1, 0.3, 0.1, 0.03):
        result = engine(small(chain, times), 20_000, 2)
        for name in NAMES:
            told = result.statistics(name)
            assert told is not None
            ratios[name].append(result.linear[name] / (told.deviation or float("nan")))
    for name, row in ratios.items():
        print(f"{name:16}" + "".join(f"{ratio:12.4f}" for ratio in row))


LOW_PASS = """format = 1
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "F"
kind = "ladder"
arms = [{{ series_r = "1k" }}, {{ shunt_c = "1n" }}]
[tolerance]
resistor = 0
capacitor = "10 %"
[target]
upper = "{upper}"
"""


def closed_form() -> None:
    """One pole and one part: the edge is at or above f where C is at or below 1/(2·pi·R·f)."""
    print("\none pole, one part, clipped normal: yield in closed form, share of 100000 builds, its 95 % interval")
    for off in (-0.05, -0.01, 0.02, 0.08):
        upper = 1.0 / (2 * np.pi * 1e3 * 1e-9 * (1 + off))
        exact = 0.5 * (1 + erf(off / 0.1 * 3 / sqrt(2)))
        chain = parse(LOW_PASS.format(upper=repr(float(upper))), "x.toml")
        share = engine(chain, 100_000, 1, ()).yields().shares["upper"]
        inside = "inside" if share.low <= exact <= share.high else "outside"
        print(f"C up to {off:+.0%}: {exact:.5f} {share.share:.5f} [{share.low:.5f}, {share.high:.5f}] {inside}")


def main() -> None:
    chain = load(str(SIX))
    print(f"numpy {np.__version__}, {Path(sys.executable).name} {sys.version.split()[0]}")
    against_dense(chain)
    growth(chain)
    million()
    linear(chain)
    closed_form()


if __name__ == "__main__":
    main()
