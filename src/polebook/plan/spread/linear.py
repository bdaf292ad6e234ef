"""By how much each draw moves a figure, to first order: leverage, through bias, cards and stages."""

from __future__ import annotations

from collections.abc import Mapping
from math import sqrt

import numpy as np

from polebook.book.ledger import Ledger
from polebook.book.leverage import STEP
from polebook.circuit.build import values
from polebook.plan.spread.draws import TEMPERATURE, Draw, Drawn
from polebook.plan.spread.figures import Figure
from polebook.solve.edges import DECIBEL

Slopes = Mapping[str, float]  # draw -> d(figure)/du: dB for a figure in dB, ln of the figure for a ratio


def as_filed(drawn: Drawn) -> dict[str, float]:
    """How far each draw is off where every number is as the file has it: 0, save a temperature beside its range's
    middle."""
    found = {draw.name: 0.0 for draw in drawn.draws}
    for draw in drawn.draws:
        if draw.middle is not None:
            found[draw.name] = (drawn.chain.numbers[TEMPERATURE] - draw.middle) / draw.share
    return found


def slopes(of: Ledger, drawn: Drawn, at: Mapping[str, float], figures: tuple[Figure, ...]) -> dict[str, Slopes]:
    """Figure -> slopes, of those that have a leverage (an edge that the chain does not have has none).

    of  the ledger of the chain with the draws off by `at`
    """
    names = [draw.name for draw in drawn.draws]
    if not names:
        return {figure.name: {} for figure in figures if figure.leverage}
    off = {name: np.full(len(names), complex(at[name])) for name in names}
    for k, name in enumerate(names):
        off[name][k] += 1j * STEP
    with np.errstate(all="ignore"):
        moved = np.array([np.broadcast_to(value, (len(names),)) for value in
                          values(of.solution.circuit, drawn.values(off))], dtype=complex)
        relative = moved.imag / STEP / moved.real
    relative = np.where(np.isfinite(relative), relative, 0.0)  # a device cut off has figures that nothing moves
    found: dict[str, Slopes] = {}
    for figure in figures:
        each = [row.get(figure.leverage) for row in of.leverage.elements.values()] if figure.leverage else [None]
        if None not in each:
            row = np.array(each, dtype=float) @ relative[list(of.leverage.elements)]
            found[figure.name] = dict(zip(names, (row * (1.0 if figure.ratio else DECIBEL)).tolist(), strict=True))
    return found


def deviation(figure: Figure, of: Slopes, draws: tuple[Draw, ...], nominal: float) -> float:
    """Standard deviation of the figure to first order, in its unit."""
    total = sqrt(sum((of[draw.name] * draw.deviation) ** 2 for draw in draws))
    return total * nominal if figure.ratio else total


def shares(of: Slopes, draws: tuple[Draw, ...]) -> dict[str, float]:
    """Draw -> its share of the figure's variance to first order; they sum to 1. {} where nothing moves it."""
    each = {draw.name: (of[draw.name] * draw.deviation) ** 2 for draw in draws}
    total = sum(each.values())
    return {name: x / total for name, x in each.items()} if total else {}
