"""How long built chains of a file take: those that only the ledger itself can judge cost a ledger each."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread

FIRST = 64  # builds that tell
FEW = 100  # builds judged one by one that nobody minds: about a second


def paced(request: Request, stop: Callable[[], bool] = lambda: False, at_once: int = FEW) -> tuple[Request, int]:
    """(the request in blocks that are done within about a second each, how many builds are done within that).

    Both go by the first builds alone, not by a clock, so that they are the same on every machine. Raises ProblemsFound.
    at_once  builds that a block may have judged one by one
    """
    first = replace(request, builds=min(FIRST, request.builds), costs=False, workers=1)
    done = alone = 0
    for *_, result in spread(first, stop):
        done, alone = result.done, result.alone
    if not alone:
        return request, request.builds
    block, builds = (max(1, count * done // alone) for count in (at_once, FEW))
    return replace(request, block=min(request.block, block)), min(request.builds, builds)
