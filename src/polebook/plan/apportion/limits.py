"""Rows of a task that have no exact derivative and are no figure of the ledger: where signals clip, stated currents."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.levels import Levels
from polebook.chain.model import Chain
from polebook.circuit.bias_solution import compared
from polebook.plan.apportion.goals import FAR
from polebook.plan.apportion.guards import APART

if TYPE_CHECKING:
    from polebook.book.solution import Solution


def passes(limits: Sequence[tuple[str, str]], solution: Solution) -> list[float]:
    """ln of the peak of the source at which each of `limits`, (stage, what happens), is met."""
    levels = Levels(solution)
    found = {(clip.stage, bound.by): bound.volts / (levels.per_source(clip.node) or np.inf)
             for clip in levels.clips for bound in clip.bounds if bound.volts is not None}
    return [float(np.log(max(found.get(limit, np.inf), 1e-300))) for limit in limits]


def clip_rows(largest: float | None, passing: Sequence[float]) -> list[float]:
    """Neper by which a signal of the source's peak `largest` passes every limit; none where there is none to pass."""
    return [one - float(np.log(largest)) for one in passing] if largest else []


def swing_rows(want: float, solution: Solution, passing: Sequence[float]) -> list[float]:
    """Neper by which the output may swing further than `want`, V peak, before each limit is met."""
    return [one + float(np.log(abs(solution.gain) / want)) for one in passing]


def apart_rows(chain: Chain, solution: Solution, stages: Sequence[str]) -> list[float]:
    """How far stated currents are within what may lie between them and what their networks give."""
    if not stages:
        return []
    circuit = solution.circuit
    solved = compared(circuit.plan, chain.get, dict(circuit.points))
    found = []
    for name in stages:
        point = solved.get(name)
        current, other = (point.current, point.solved_current) if point else (None, None)
        found.append(FAR if not current or other is None else APART - abs(float(other) / float(current) - 1.0))
    return found
