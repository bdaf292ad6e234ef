"""By how much each draw moves a figure, to first order: leverage, through bias, cards and stages."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from math import sqrt

import numpy as np

from polebook.book.ledger import Ledger
from polebook.book.leverage import STEP
from polebook.circuit.build import values_and_noise
from polebook.devices.num import ICE_K
from polebook.devices.spectrum import Spectrum
from polebook.plan.spread.draws import TEMPERATURE, Draw, Drawn
from polebook.plan.spread.figures import Figure
from polebook.plan.spread.normal import Array
from polebook.solve.edges import DECIBEL
from polebook.stages.stamper import Value

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
        numbers = drawn.values(off)
        stepped, spectra = values_and_noise(of.solution.circuit, numbers)
        moved = np.array([np.broadcast_to(value, (len(names),)) for value in stepped], dtype=complex)
        relative = moved.imag / STEP / moved.real
    relative = np.where(np.isfinite(relative), relative, 0.0)  # a device cut off has figures that nothing moves
    found: dict[str, Slopes] = {}
    for figure in figures:
        each = [row.get(figure.leverage) for row in of.leverage.elements.values()] if figure.leverage else [None]
        if None not in each:
            row = np.array(each, dtype=float) @ relative[list(of.leverage.elements)]
            if figure.leverage == "noise":
                row = row + _of_sources(of, spectra, numbers.get(TEMPERATURE), len(names))
            found[figure.name] = dict(zip(names, (row * (1.0 if figure.ratio else DECIBEL)).tolist(), strict=True))
    return found


def _of_sources(of: Ledger, spectra: Sequence[Spectrum], celsius: Value | None, count: int) -> Array:
    """(count,) what stepped noise sources do to ln of the density, resistors by their temperature among them."""
    slopes_of_noise = of.leverage.slopes
    assert slopes_of_noise is not None
    total = np.asarray(slopes_of_noise.moved(spectra, count, STEP), dtype=float)
    spot, first = slopes_of_noise.noise.at_reference, len(slopes_of_noise.noise.sources.resistors)
    if celsius is not None and spot is not None:
        share = float(spot.parts[:first].sum()) / spot.square
        kelvin = np.asarray(celsius) + ICE_K
        total = total + 0.5 * share * kelvin.imag / STEP / kelvin.real
    return total


def deviation(figure: Figure, of: Slopes, draws: tuple[Draw, ...], nominal: float) -> float:
    """Standard deviation of the figure to first order, in its unit."""
    total = sqrt(sum((of[draw.name] * draw.deviation) ** 2 for draw in draws))
    return total * nominal if figure.ratio else total


def shares(of: Slopes, draws: tuple[Draw, ...]) -> dict[str, float]:
    """Draw -> its share of the figure's variance to first order; they sum to 1. {} where nothing moves it."""
    each = {draw.name: (of[draw.name] * draw.deviation) ** 2 for draw in draws}
    total = sum(each.values())
    return {name: x / total for name, x in each.items()} if total else {}
