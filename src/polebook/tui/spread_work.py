"""The work behind the spread page: a run told piece by piece, here or in a process of its own that asks come to."""

from __future__ import annotations

import os
import signal
import sys
import traceback
from collections.abc import Callable, Iterator
from contextlib import suppress
from math import log10
from queue import SimpleQueue
from threading import Thread
from time import perf_counter
from typing import IO, Any

from polebook.book.reach import within_reach
from polebook.book.targets import LESS_IS_BETTER, TOLERANCE_DB
from polebook.chain.model import Chain
from polebook.plan import wire
from polebook.plan.spread.draws import Draw
from polebook.plan.spread.figures import Figure as Kind
from polebook.plan.spread.model import Request, Result
from polebook.plan.spread.run import spread
from polebook.plan.spread.states import GOOD, KEYS, WORDS
from polebook.plan.spread.statistics import Statistics
from polebook.plan.spread.workers import LONG, Crew, cores
from polebook.plan.wire import Garbled, Message, plain
from polebook.problem import Problem, ProblemsFound
from polebook.tui.spread_passed import asked as asked_of
from polebook.tui.spreads import Figure, Heap, Row, Told, Worst

Step = tuple[int, int, Told | None]
FINE = 960  # steps of a heap
BLOCK = 2048  # builds at a time: progress shows, and little is lost by it
OFTEN_S, REST = 0.1, 10.0  # a run is told anew after so long, and so many times as long as telling it took
NEAR = 0.6  # of the width of a heap: a limit that is no further off widens it
NICE = 5


def steps(chain: Chain, builds: int, seed: int, crew: Crew | None = None, workers: int = 1,
          block: int = BLOCK) -> Iterator[Step]:
    """(done, total, what it has come to so far), None where that was told a moment ago. Raises ProblemsFound."""
    begun = next_s = perf_counter()
    request = Request(chain, builds, seed, workers=workers, block=block)
    try:
        with within_reach(chain):
            for done, total, result in spread(request, crew=crew):
                now = perf_counter()
                if now < next_s and not (result.corners or result.costs or result.complete):
                    yield done, total, None
                    continue
                piece = told(result, now - begun)
                spent = perf_counter() - now
                next_s = now + spent + max(OFTEN_S, REST * spent)
                yield done, total, piece
    except MemoryError:
        raise ProblemsFound([Problem(None, f"{builds} builds do not fit in the memory that there is", "",
                                     "/ asks for fewer")]) from None


def told(result: Result, seconds: float) -> Told:
    """What is shown of a result."""
    request, yields = result.request, result.yields()
    words = {WORDS[state]: count for state, key in KEYS.items() if (count := result.failures().get(key))}
    return Told(request.builds, request.seed, result.done, tuple(_figure(result, kind) for kind in result.figures),
                tuple(_rows(result)), bool(result.costs), dict(yields.shares), yields.unjudged, words,
                dict(result.outside), result.cautions, seconds, result.complete)


def _figure(result: Result, kind: Kind) -> Figure:
    statistics, nominal = result.statistics(kind.name), result.nominal[kind.name]
    limits = _limits(result, kind)
    worst = tuple(Worst(one.side, one.value, "" if one.state == GOOD else WORDS[one.state], result.beyond(one))
                  for one in result.corners if one.figure == kind.name)
    return Figure(kind.name, kind.target, kind.unit, nominal, result.linear.get(kind.name), statistics,
                  _heap(result, kind, statistics, [nominal, *limits]), limits, worst)


def _limits(result: Result, kind: Kind) -> tuple[float | None, float | None] | tuple[()]:
    """What the target that judges a figure allows, in the figure's unit."""
    chain = result.request.chain
    if f"target.{kind.target}" not in chain.given or any(
            one.target == kind.target for one in result.figures[result.figures.index(kind) + 1:]):
        return ()
    want = chain.numbers[f"target.{kind.target}"]
    if kind.target == "gain":
        off, middle = chain.get("target.gain_tolerance") or TOLERANCE_DB, 20.0 * log10(want)
        return middle - off, middle + off
    return (None, want) if kind.target in LESS_IS_BETTER else (want, None)


def _heap(result: Result, kind: Kind, of: Statistics | None, wanted: list[float | None]) -> Heap | None:
    """Builds by the figure, with what is wanted in sight where it is near."""
    if of is None:
        return None
    low, high = of.percentiles["0.1"], of.percentiles["99.9"]
    far = NEAR * (high - low)
    near = [one for one in wanted if one is not None and low - far <= one <= high + far]
    found = result.histogram(kind.name, FINE, near)
    if found is None:
        return None
    return Heap(float(found.edges[0]), float(found.edges[-1]), found.counts, found.below, found.above)


def _rows(result: Result) -> Iterator[Row]:
    """Every tolerance, the dearest first as far as that is known."""
    costs = {cost.draw.name: cost for cost in result.costs}
    first = {one.figure: one.signs for one in reversed(result.corners)}
    for draw in [cost.draw for cost in result.costs] or result.draws:
        cost = costs.get(draw.name)
        yield Row(draw.name, draw.name.partition("@")[0], _label(draw), draw.sort, draw.share,
                  cost.yield_gain if cost else None, cost.at_none if cost else None, cost is not None and cost.solved,
                  {figure: each[draw.name] for figure, each in result.shares.items() if draw.name in each},
                  {figure: signs[draw.name] for figure, signs in first.items() if draw.name in signs})


def _label(draw: Draw) -> str:
    """A card's figure as "N beta", what one device is off beside it "N beta at Q1"."""
    path, _, where = draw.name.partition("@")
    if not path.startswith("device."):
        return path
    card, _, key = path.removeprefix("device.").rpartition(".")
    return f"{card} {key}" + (f" at {where}" if where else "")


def serve() -> None:
    """Spreads, as they are asked for."""
    with Crew() as crew:
        attend(lambda target, asked: tell(target, _asked(asked.get(), crew)))


def attend(answer: Callable[[IO[bytes], SimpleQueue[Message]], None]) -> None:
    """Takes what is asked from standard input, answers on standard output, and ends at once with the one who asks."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # ctrl-c is for the one who asks
    if hasattr(os, "nice"):
        os.nice(NICE)  # keys come first where there are fewer cores than work
    source, target = sys.stdin.buffer, sys.stdout.buffer
    sys.stdout = sys.stderr
    asked: SimpleQueue[Message] = SimpleQueue()

    def listen() -> None:
        with suppress(Garbled, OSError):
            while (one := wire.read(source)) is not None:
                asked.put(one)
        os._exit(0)  # whatever is being computed: nobody is left to read it

    Thread(target=listen, daemon=True).start()
    while True:
        answer(target, asked)


def _asked(what: Message, crew: Crew) -> Iterator[Step]:
    chain, builds, seed = asked_of(what)
    worth = builds * (len(chain.stages) + 2) >= LONG
    yield from steps(chain, builds, seed, crew, max(cores() - 1, 1) if worth else 1)  # a core is for the keys


def tell(target: IO[bytes], work: Iterator[Any]) -> None:
    """Sends the steps of some work, and how it ended."""
    try:
        for step in work:
            wire.write(target, Message("step", plain(step)))
        wire.write(target, Message("end"))
    except ProblemsFound as found:
        wire.write(target, Message("problems", plain(found.problems)))
    except OSError:
        raise
    except Exception:
        wire.write(target, Message("fault", traceback.format_exc()))
