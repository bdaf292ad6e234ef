"""One build as a chain of its own, through the ledger: the exact way, for the few that a batch cannot judge."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from types import MappingProxyType

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.chain.model import Chain
from polebook.plan.spread.states import GOOD, NO_BAND, NO_GAIN, UNSOLVED, UNSTABLE, UNTOLD
from polebook.problem import ProblemsFound


def with_numbers(chain: Chain, numbers: Mapping[str, float]) -> Chain:
    """The chain with some of its numbers replaced; nothing is judged anew."""
    return replace(chain, numbers=MappingProxyType({**chain.numbers, **numbers}), given=chain.given | numbers.keys())


def alone(chain: Chain) -> tuple[int, Ledger | None]:
    """(state, ledger) of a chain; None where it has no figures at all."""
    try:
        of = ledger(chain)
        if not all(bool(point.converged) for point in of.solution.circuit.points.values()):
            return UNSOLVED, None
        with within_reach(chain):
            if of.unstable:
                return UNSTABLE, None
            if not of.judged:
                return UNTOLD, None
            return (GOOD if of.solution.band.clean else NO_BAND), of
    except ProblemsFound:
        return NO_GAIN, None
