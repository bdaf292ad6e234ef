"""The yield of a chain for an audit: how many built chains meet its targets, of so many from one seed."""

from __future__ import annotations

from collections.abc import Callable, Generator, Iterator
from dataclasses import replace
from typing import Any

from polebook.book.asked import Built
from polebook.book.ledger import Ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.plan.pacing import FEW, paced
from polebook.plan.spread.figures import figures
from polebook.plan.spread.judge import ALL, judged
from polebook.plan.spread.model import BUILDS, SEED, Request, Result
from polebook.plan.spread.run import spread
from polebook.plan.spread_document import share
from polebook.problem import ProblemsFound

NOTHING = "no target that builds are judged by"


def asks(chain: Chain) -> bool:
    """Whether the file wants a yield."""
    return "target.yield" in chain.given


def built(chain: Chain, stop: Callable[[], bool] = lambda: False, block: int = 0,
          at_once: int = FEW) -> Iterator[tuple[int, int, Result | None]]:
    """(done, total, result so far) of as many builds as a spread makes unasked, so that the two agree to the digit.

    Fewer where they have to be judged one by one, for an audit is not to take minutes. One process, only the figures
    that targets are judged by, and no costs. The result is None where there is no such target, and nothing is
    computed. Raises ProblemsFound where the chain has no ledger.
    block, at_once  builds in a piece at the most (0: as a spread has it), and those of them that are judged one by one
    """
    names = tuple(figure.name for figure in judged(chain, figures(chain)).values())
    if not names:
        yield 0, 0, None
        return
    with within_reach(chain):
        whole = Request(chain, BUILDS, SEED, figures=names, costs=False, workers=1)
        request, builds = paced(replace(whole, block=block) if block else whole, stop, at_once)
        yield from spread(replace(request, builds=builds), stop)


def answer(of: Result | None) -> tuple[Built, dict[str, Any] | None]:
    """(what the yield's target is judged by, the row "spread" of the audit's answer: None without a result)."""
    if of is None:
        return Built(None, NOTHING), None
    told = of.yields()
    alone = {name: one.share for name, one in told.shares.items() if name != ALL}
    worst = min(alone, key=lambda name: alone[name])
    row = {"builds": of.done, "seed": of.request.seed,
           "yield": {name: share(one) for name, one in told.shares.items()}, "unjudged": list(told.unjudged),
           "states": of.failures()}
    cause = f"{100.0 * alone[worst]:.1f} % of the built chains meet {worst}"
    return Built(told.shares[ALL].share, "", cause), row


def hand(of: Ledger, stop: Callable[[], bool] = lambda: False, block: int = 0,
         at_once: int = FEW) -> Generator[tuple[int, int], None, dict[str, Any] | None]:
    """Hands `of` the yield of its builds; yields (done, total) meanwhile, and returns the row that `answer` gives."""
    result = None
    try:
        for done, total, so_far in built(of.chain, stop, block, at_once):
            result = so_far
            yield done, total
        made, row = answer(result)
    except ProblemsFound:  # the chain itself has figures: only its yield is lost
        made, row = Built(None, "its builds can't be computed"), None
    of.hand(made)
    return row
