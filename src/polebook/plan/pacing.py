"""How long built chains of a file take: those that only the ledger itself can judge cost a ledger each."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread

FIRST = 64  # builds that tell
FEW = 100  # builds judged one by one that nobody minds: about a second


def paced(request: Request, stop: Callable[[], bool] = lambda: False) -> tuple[Request, int]:
    """(the request in blocks that are done within about a second each, how many builds are done within that).

    Both go by the first builds alone, not by a clock, so that they are the same on every machine. Raises ProblemsFound.
    """
    first = replace(request, builds=min(FIRST, request.builds), costs=False, workers=1)
    done = alone = 0
    for *_, result in spread(first, stop):
        done, alone = result.done, result.alone
    if alone * request.block <= FEW * done:
        return request, request.builds if alone * request.builds <= FEW * done else FEW * done // alone
    block = max(1, FEW * done // alone)
    return replace(request, block=block), min(request.builds, block)
