"""The peaking coil of a stage: with which the response is maximally flat, its delay is, or the band is widest.

Solved on the whole chain, beside the published factors of a resistor, a coil and a capacitance alone.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from math import exp, log
from types import MappingProxyType

from polebook import series
from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.book.sites import interstage_names
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain, Stage
from polebook.chain.read import parse
from polebook.plan.compensate import keys_of, named_stage
from polebook.plan.compensate_figures import Figures, figures
from polebook.plan.compensate_search import changed, read
from polebook.plan.peaking_shape import flatness
from polebook.plan.proposal import Proposal, propose
from polebook.solve.root import bracketed_maximum, bracketed_root

COIL = "l_peak"
RESISTORS = ("rc", "rd", "ra")
NAMES = ("flat", "delay", "wide")
PUBLISHED: Mapping[str, tuple[float, float]] = MappingProxyType(
    {"flat": (1 / 2.41, 1.72), "delay": (1 / 3.1, 1.6), "wide": (1 / 1.41, 1.85)})
"""L/(R²·C) and the edge over that without the coil."""
SOURCE = "T. H. Lee, The Design of CMOS Radio-Frequency Integrated Circuits, table of shunt peaking; from memory"
STEP = 0.25 * log(10.0)
BELOW, ABOVE = 16, 8  # steps from R·tau
TIGHT = 1e-12


@dataclass(frozen=True, slots=True)
class Coil:
    """One coil.

    henry    solved; None where there is none such: `why`
    m        henry/(R·tau)
    figures  with it;  factor, its edge over that without a coil
    bought   the nearest preferred value, verified as a file
    """

    name: str
    henry: float | None
    m: float | None = None
    figures: Figures | None = None
    factor: float | None = None
    bought: Proposal | None = None
    bought_figures: Figures | None = None
    why: str = ""


@dataclass(frozen=True, slots=True)
class CoilTask:
    """A chain and one of its stages with an output resistor of `ohm`, and its output node, both without the coil.

    tau    of the node, s
    share  how much of the upper edge the time constants of that node make, as the node poles have it
    """

    text: str
    file: str
    chain: Chain
    stage: Stage
    beta: float | None
    resistor: str
    ohm: float
    tau: float
    node: str
    share: float
    today: Ledger
    without: Ledger

    @property
    def path(self) -> str:
        return f"{self.stage.name}.{COIL}"

    @property
    def unit(self) -> float:
        """R·tau in H: the coil of m = 1."""
        return self.ohm * self.tau


def coil_task(text: str, file: str, stage: str, beta: float | None = None) -> CoilTask:
    """Raises ProblemsFound where the file has a fault, no such stage, or the stage takes no coil."""
    chain = parse(text, file)
    of = named_stage(chain, stage)
    resistor = next((key for key in RESISTORS if chain.get(f"{stage}.{key}")), "")
    if COIL not in keys_of(chain, of):
        raise PathRefused(f"{stage} takes no {COIL}", f"a {of.kind} has no resistor at its output to put a coil to",
                          "name a stage with rc, rd or ra")
    if not resistor:
        raise PathRefused(f"{stage} has no output resistor", "a coil stands in series with one",
                          "give it rc, rd or ra first")
    without = ledger(changed(chain, {f"{stage}.{COIL}": 0.0}))
    layout = without.solution.circuit.layout
    node = next(segment.after for segment in layout.segments if segment.name == stage)
    name = interstage_names(layout)[node]
    tau = next(site.tau for site in without.sites if site.name == name)
    ohm = chain.numbers[f"{stage}.{resistor}"]
    if tau <= 0.0:
        raise PathRefused(f"{name} has no capacitance", "a coil peaks against the capacitance of the stage's output",
                          "give the stage c_load or stray, or a load")
    total = sum(site.tau for site in without.sites if site.tau > 0.0)
    return CoilTask(text, file, chain, of, beta, resistor, ohm, tau, name, tau / total, ledger(chain), without)


def coils(of: CoilTask, stop: Callable[[], bool] = lambda: False) -> Iterator[tuple[int, int, Coil]]:
    """(done, total, coil) for each of NAMES; ends early once `stop` says so."""
    for at, name in enumerate(NAMES):
        if stop():
            return
        with within_reach(of.chain):
            henry, why = _widest(of) if name == "wide" else _flat(of, 0 if name == "flat" else 1)
            coil = Coil(name, None, why=why) if henry is None else _whole(of, name, henry)
        yield at + 1, len(NAMES), coil


def _at(of: CoilTask, henry: float, figure: Callable[[Ledger], float | None]) -> float | None:
    return read(changed(of.chain, {of.path: henry}), figure)


def _grid(of: CoilTask) -> list[float]:
    """ln L of the values that are looked at."""
    return [log(of.unit) + k * STEP for k in range(-BELOW, ABOVE + 1)]


def _flat(of: CoilTask, order: int) -> tuple[float | None, str]:
    """The least coil with which c_2 (order 0) or c_3 (order 1) passes 0."""
    def shape(henry: float) -> float | None:
        def one(now: Ledger) -> float | None:
            found = flatness(now, henry / of.ohm) if now.judged else None
            return None if found is None else (-found[0], found[1])[order]
        return _at(of, henry, one)

    start = shape(0.0)
    what = ("response", "delay")[order]
    if start is None:
        return None, f"how the {what} begins to fall can't be told"
    if start >= 0.0:
        return None, f"without a coil the {what} rises already at the upper end of the band" if start else \
            f"without a coil the {what} is flat already"
    before: tuple[float, float] | None = None
    for x in _grid(of):
        here = shape(exp(x))
        if here is not None and here > 0.0 and before:
            root = bracketed_root(lambda y: shape(exp(y)) or 0.0, before[0], x, before[1], here, TIGHT)
            return exp(root), ""
        before = None if here is None else (x, here)
    return None, f"no coil up to m = {exp(ABOVE * STEP):.3g} makes the {what} flat"


def _widest(of: CoilTask) -> tuple[float | None, str]:
    """The coil with the highest edge: there it owns nothing of the edge, since a little more moves it nowhere."""
    def edge(x: float) -> float:
        hz = _at(of, exp(x), lambda now: now.upper_hz)
        return log(hz) if hz else -1e9

    x = _grid(of)
    y = [edge(one) for one in x]
    top = max(range(len(x)), key=lambda k: y[k])
    bare = of.without.upper_hz
    if bare is None:
        return None, "without a coil the chain has no upper edge"
    if exp(y[top]) <= bare or top == 0:
        return None, "no coil lifts the upper edge"
    if top == len(x) - 1:
        return None, f"the edge still rises with a coil of m = {exp(ABOVE * STEP):.3g}"
    shares = [_share(of, x[k]) for k in (top - 1, top + 1)]
    if shares[0] is not None and shares[1] is not None and shares[0] < 0.0 < shares[1]:
        root = bracketed_root(lambda z: _share(of, z) or 0.0, x[top - 1], x[top + 1], shares[0], shares[1], TIGHT)
        if edge(root) >= y[top] - 1e-12:
            return exp(root), ""
    a, b, c = x[top - 1:top + 2]
    return exp(bracketed_maximum(edge, (a, b, c), (y[top - 1], y[top], y[top + 1]))[0]), ""


def _share(of: CoilTask, x: float) -> float | None:
    """How much of the edge a coil of exp(x) H owns: below 0 where more of it lifts the edge."""
    def one(now: Ledger) -> float | None:
        parts = now.solution.circuit.layout.parts
        index = next(k for k, part in enumerate(parts) if part.stage == of.stage.name and part.name == COIL)
        return now.owns_upper.get(index)
    return _at(of, exp(x), one)


def _whole(of: CoilTask, name: str, henry: float) -> Coil:
    now = ledger(changed(of.chain, {of.path: henry}))
    shown = figures(now, of.stage.name, of.beta)
    bought = propose(of.text, of.file, {of.path: series.nearest(henry, of.chain.preferred["inductor"])},
                     f"coil of {of.stage.name}: {name}", of.today)
    bare = of.without.upper_hz
    factor = shown.edge_hz / bare if shown.edge_hz and bare else None
    return Coil(name, henry, henry / of.unit, shown, factor, bought, figures(bought.after, of.stage.name, of.beta))
