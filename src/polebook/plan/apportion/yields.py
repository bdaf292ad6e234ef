"""The yield of a proposal: many built chains of the file as it is and as proposed, after the search.

The search itself does not follow a yield, for that would be ten thousand chains a trial; it is judged in the end, and
where it alone is missed plans with more room to every other target are tried.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

from polebook.book.ledger import Ledger
from polebook.plan.proposal import Proposal, pairs
from polebook.plan.yielded import asks, hand

YIELD = "yield"
BLOCK, ALONE = 512, 8  # builds in a piece of the work, and those of them that need a ledger each: some tens of ms


def judging(proposal: Proposal, stop: Callable[[], bool]) -> Iterator[None]:
    """Hands either ledger its yield, a block of builds at a time; nothing where the file asks for none."""
    if asks(proposal.before.chain):
        yield from _handed(proposal.before, stop)
        if proposal.edit:
            yield from _handed(proposal.after, stop)
        else:
            proposal.after.hand(proposal.before.built)


def judged(proposal: Proposal) -> Proposal:
    """The proposal with its targets judged once more, after `judging`."""
    return replace(proposal, targets=pairs(proposal.before, proposal.after))


def met_beside(proposal: Proposal) -> bool:
    """Whether all targets are met but that one, which the search itself does not follow."""
    return all(one.after.met for one in proposal.targets if one.name != YIELD)


def missed(proposal: Proposal) -> bool:
    """Whether the yield is judged, and too small."""
    return any(one.after.met is False for one in proposal.targets if one.name == YIELD)


def got(proposal: Proposal) -> float:
    """The yield as proposed; 0 where it is not known."""
    return next((one.after.got or 0.0 for one in proposal.targets if one.name == YIELD), 0.0)


def _handed(of: Ledger, stop: Callable[[], bool]) -> Iterator[None]:
    for _ in hand(of, stop, BLOCK, ALONE):
        yield None
