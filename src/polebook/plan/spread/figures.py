"""The figures that a spread has of every build, one row each: a further one is entered here."""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import dataclass, replace
from math import inf, log10
from typing import TYPE_CHECKING

from polebook.book.ledger import Ledger
from polebook.book.solution import Solution
from polebook.chain.model import Chain
from polebook.plan.spread.normal import Array

if TYPE_CHECKING:
    from polebook.plan.spread.block import Block


DENSITY = "V/√Hz"


@dataclass(frozen=True, slots=True)
class Figure:
    """A number of every build.

    name      its key, which carries the unit
    target    the target that it is judged by, "" for none
    unit      "dB", "Hz" or "V/√Hz"; `figures` gives the last as "A/√Hz" where the source is a current
    ratio     whether parts move it by a ratio (an edge, a density) or by a difference (a figure in dB)
    leverage  its name among the leverages, "" where they do not have it
    block     a block of builds -> (builds,), NaN for none
    single    a ledger -> the number, None for none
    stands    a chain -> whether it can have the figure
    unasked   a chain -> whether the figure is of use for it, and so computed without being asked for by name
    """

    name: str
    target: str
    unit: str
    ratio: bool
    leverage: str
    block: Callable[[Block], Array]
    single: Callable[[Ledger], float | None]
    stands: Callable[[Chain], bool] = lambda chain: True
    unasked: Callable[[Chain], bool] = lambda chain: True


def decibels(gain: float | None) -> float | None:
    """20·log10 of the size of a gain."""
    return None if gain is None else 20.0 * log10(abs(gain)) if gain else -inf


def _at_reference(chain: Chain) -> bool:
    return "target.reference" in chain.given


def _noise(of: Ledger) -> float | None:
    return of.noise.density if of.noise else None


def _told(chain: Chain) -> bool:
    """Whether every source of noise is known. Raises ProblemsFound where the chain has no ledger."""
    return not Solution(chain).circuit.layout.recorder.untold


FIGURES = (
    Figure("gain_db", "gain", "dB", False, "gain", lambda block: block.gain_db, lambda of: decibels(of.solution.gain)),
    Figure("gain_at_reference_db", "gain", "dB", False, "",
           lambda block: block.gain_at_db(block.chain.numbers["target.reference"]),
           lambda of: decibels(of.gain_at_reference), _at_reference),
    Figure("lower_edge_hz", "lower", "Hz", True, "lower_edge", lambda block: block.lower_hz, lambda of: of.lower_hz),
    Figure("upper_edge_hz", "upper", "Hz", True, "upper_edge", lambda block: block.upper_hz, lambda of: of.upper_hz),
    Figure("peaking_db", "peaking", "dB", False, "", lambda block: block.peaking_db,
           lambda of: of.solution.band.peaking_db),
    Figure("noise_density", "noise", DENSITY, True, "noise", lambda block: block.noise_density, _noise, _told,
           lambda chain: "target.noise" in chain.given),
)
"""In the order in which they are told. Of two that one target judges, the later one counts.

The noise density is the input-referred one at the target's reference; where the file states none, at the band seed of
the chain as filed, which stands still for all builds, as it does for the leverage on the noise.
"""


def figures(chain: Chain, asked: Collection[str] = ()) -> tuple[Figure, ...]:
    """The figures of a chain: those asked for by name, else all that are of use. Raises ProblemsFound."""
    found = (one for one in FIGURES if (one.name in asked if asked else one.unasked(chain)) and one.stands(chain))
    volts = chain.source_kind == "voltage"
    return tuple(replace(one, unit="A/√Hz") if one.unit == DENSITY and not volts else one for one in found)


def judging(of: Collection[Figure]) -> dict[str, Figure]:
    """Target -> the figure that it is judged by."""
    return {one.target: one for one in of if one.target}
