"""The capacitor that brings a figure of the chain to a wanted value: looked for over sixteen decades, then solved."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from math import exp, log, pi
from types import MappingProxyType

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.problem import ProblemsFound
from polebook.solve.root import bracketed_root

STEP = 0.5 * log(10.0)
BELOW, ABOVE = 16, 16  # steps from the first guess
HIT = 1e-6  # a figure so near to the wanted one is it
TRIAL = 1e-3  # of the first guess by the wanted time constant at 1 kΩ: small beside all that is there
FINE = 1e-12  # of ln of a value
STEEP, TRIES, SETTLED = 0.8, 12, 1e-11  # of the secant: first guess of its fall (1 where C is all), steps, its end
CLOSE = 1e-3  # of ln of a value, to which the end of a figure is found
Figure = Callable[[Ledger], float | None]
Point = tuple[float, float]  # ln of a value, and ln of the figure over the wanted one


@dataclass(frozen=True, slots=True)
class Gap:
    """Values in F, figures in Hz. after and below are None where the figure does not come back."""

    before: float
    above: float
    after: float | None
    below: float | None
    why: str


@dataclass(frozen=True, slots=True)
class Found:
    """value (F) that does it, None where none does; `without` is the figure with no capacitor there.

    jump   where the figure leaps over the wanted one: value (F), and the figure on either side
    gap    where it passes the wanted one while the chain has no such figure: value and figure before and after (None
           where there is none any more), and why it has none
    least  the lowest figure that any value gives
    """

    value: float | None
    without: float | None
    jump: tuple[float, float, float] | None = None
    gap: Gap | None = None
    least: float | None = None


def changed(chain: Chain, values: Mapping[str, float]) -> Chain:
    """The chain with the numbers at some paths replaced; nothing is judged anew."""
    return replace(chain, numbers=MappingProxyType({**chain.numbers, **values}), given=chain.given | values.keys())


def read(chain: Chain, figure: Figure) -> float | None:
    """A figure of a chain; None where it has none."""
    try:
        with within_reach(chain):
            return figure(ledger(chain))
    except ProblemsFound:
        return None


def capacitor(chain: Chain, path: str, wanted: float, figure: Figure, near: float | None = None) -> Found:
    """The least capacitance (F) at `path` with which `figure` (Hz) falls to `wanted`.

    near  where it is nearly known: then the way from there is short
    """
    def at(farad: float) -> float | None:
        return read(changed(chain, {path: farad}), figure)

    def over(x: float) -> float:
        hz = at(exp(x))
        return log(hz / wanted) if hz else -1.0

    if near is not None and (close := _near(over, log(near))) is not None:
        return Found(exp(close), None)
    without = at(0.0)
    if without is not None and abs(without / wanted - 1.0) < HIT:
        return Found(None, without)
    guess = log(_guess(chain, path, wanted))
    before: Point | None = None
    lost = False  # the chain has no figure right behind `before`
    heights: list[float] = []
    for k in range(-BELOW, ABOVE + 1):
        x = guess + k * STEP
        hz = at(exp(x))
        if not hz:
            if before and not lost:
                lost, (before, passed) = True, _last(at, wanted, before, x)
                if passed is not None:
                    return _between(over, before, passed, wanted, without)
            continue
        here = (x, log(hz / wanted))
        if before and before[1] >= 0.0 > here[1]:
            if not lost:
                return _between(over, before, here, wanted, without)
            return Found(None, without, None, _gap(chain, path, wanted, before, here))
        before, lost = here, False
        heights.append(here[1])
    gap = _gap(chain, path, wanted, before, None) if before and lost else None
    return Found(None, without, None, gap, wanted * exp(min(heights)) if heights else None)


def _last(at: Callable[[float], float | None], wanted: float, before: Point, lost: float) \
        -> tuple[Point, Point | None]:
    """The last point up to the one at ln of a value `lost` that has a figure, and one at which it is below the wanted.

    The way there is halved: the figure may pass the wanted one right before it ends.
    """
    while lost - before[0] > CLOSE:
        middle = 0.5 * (before[0] + lost)
        hz = at(exp(middle))
        if not hz:
            lost = middle
            continue
        here = (middle, log(hz / wanted))
        if before[1] >= 0.0 > here[1]:
            return before, here
        before = here
    return before, None


def _gap(chain: Chain, path: str, wanted: float, a: Point, b: Point | None) -> Gap:
    unstable = read(changed(chain, {path: exp(a[0] + 2.0 * CLOSE)}), lambda of: float(of.unstable))
    why = "the chain oscillates" if unstable else "the chain has no clean midband"
    before, above = exp(a[0]), wanted * exp(a[1])
    if b is None:
        return Gap(before, above, None, None, why)
    return Gap(before, above, exp(b[0]), wanted * exp(b[1]), why)


def _between(over: Callable[[float], float], a: Point, b: Point, wanted: float, without: float | None) -> Found:
    x = bracketed_root(over, a[0], b[0], a[1], b[1], FINE)
    if abs(over(x)) < HIT:
        return Found(exp(x), without)
    above, below = (wanted * exp(over(x + aside)) for aside in (-1e-9, 1e-9))
    return Found(None, without, (exp(x), above, below))


def _near(over: Callable[[float], float], x: float) -> float | None:
    """The root near x by the secant; None where that does not settle."""
    y = over(x)
    other = x + y / STEEP
    for _ in range(TRIES):
        if abs(y) < SETTLED:
            return x
        high = over(other)
        if high == y:
            return None
        x, y, other = other, high, other - high * (other - x) / (high - y)
    return None


def _guess(chain: Chain, path: str, wanted: float) -> float:
    """The capacitance that would take all of 1/(2·pi·f) on the resistance that it sees."""
    ohm = seen_ohm(changed(chain, {path: TRIAL * 1e-3 / (2.0 * pi * wanted)}), path)
    return 1.0 / (2.0 * pi * wanted * (abs(ohm) if ohm else 1e3))


def seen_ohm(chain: Chain, path: str) -> float | None:
    """Resistance at the terminals of the capacitor at `path`, midband; None where it sees none, or is not there."""
    stage, _, key = path.partition(".")

    def ohm(of: Ledger) -> float | None:
        parts = of.solution.circuit.layout.parts
        index = next((k for k, part in enumerate(parts) if part.stage == stage and part.name == key), None)
        tau = None if index is None else of.solution.constants.by_part.get(index)
        return None if index is None or tau is None else tau / float(of.solution.circuit.network.values[index])

    return read(chain, ohm)
