"""Builds against the targets: as book.targets judges one chain, for columns of figures."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import log10
from typing import TYPE_CHECKING

import numpy as np

from polebook.book.targets import LESS_IS_BETTER, NAMES, TOLERANCE_DB
from polebook.chain.model import Chain
from polebook.plan.spread.figures import Figure, judging
from polebook.plan.spread.normal import Array
from polebook.plan.spread.states import GOOD
from polebook.plan.spread.statistics import Share, wilson

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Flags = NDArray[np.bool_]

ALL = "all"


@dataclass(frozen=True, slots=True)
class Yields:
    """shares: by target, and "all" of those; {} without a target that a spread judges.  unjudged: the other ones."""

    shares: Mapping[str, Share]
    unjudged: tuple[str, ...]


def judged(chain: Chain, figures: Sequence[Figure]) -> dict[str, Figure]:
    """The targets of the chain that the figures judge, in the targets' order."""
    by_target = judging(figures)
    return {name: by_target[name] for name in NAMES if name in by_target and f"target.{name}" in chain.given}


def unjudged(chain: Chain, figures: Sequence[Figure]) -> tuple[str, ...]:
    """Targets of the chain that no figure of a build judges."""
    known = judged(chain, figures)
    return tuple(name for name in NAMES if f"target.{name}" in chain.given and name not in known and name != "yield")


def met(chain: Chain, target: str, column: Array, state: NDArray[np.int8]) -> Flags:
    """Which builds meet a target. A build without figures misses it; one that has a band but no such edge meets it."""
    want = chain.numbers[f"target.{target}"]
    with np.errstate(invalid="ignore"):
        if target == "gain":
            tolerance = chain.get("target.gain_tolerance", TOLERANCE_DB) or TOLERANCE_DB
            return np.asarray(np.abs(column - 20.0 * log10(want)) <= tolerance)
        found: Flags = column <= want if target in LESS_IS_BETTER else column >= want
    return found | (np.isnan(column) & (state == GOOD)) if target in ("lower", "upper") else found


def all_met(chain: Chain, of: Mapping[str, Figure], columns: Mapping[str, Array], state: NDArray[np.int8]) -> Flags:
    """Which builds meet every target of `of`."""
    result = np.ones(state.shape, dtype=bool)
    for target, figure in of.items():
        result &= met(chain, target, columns[figure.name], state)
    return result


def yields(chain: Chain, figures: Sequence[Figure], columns: Mapping[str, Array], state: NDArray[np.int8]) -> Yields:
    """The share of builds that meet each target, and all."""
    of = judged(chain, figures)
    shares: dict[str, Share] = {}
    if of and state.size:
        shares[ALL] = wilson(int(all_met(chain, of, columns, state).sum()), state.size)
        for target, figure in of.items():
            shares[target] = wilson(int(met(chain, target, columns[figure.name], state).sum()), state.size)
    return Yields(shares, unjudged(chain, figures))
