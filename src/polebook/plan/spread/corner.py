"""The worst chain that the tolerances allow: every draw at the end of its reach that its leverage points to, solved."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import exp

from polebook.book.ledger import Ledger
from polebook.plan.spread.alone import alone, with_numbers
from polebook.plan.spread.draws import Drawn
from polebook.plan.spread.figures import Figure
from polebook.plan.spread.linear import Slopes, slopes
from polebook.plan.spread.states import GOOD

SIDES: Mapping[str, tuple[str, ...]] = {"gain": ("low", "high"), "lower": ("high",), "upper": ("low",),
                                          "noise": ("high",)}
"""Target -> on which side of it a figure is bad."""
ROUNDS = 6


@dataclass(frozen=True, slots=True)
class Corner:
    """One corner of the tolerances.

    figure, side  what is worst there, and whether that is low or high
    value         the figure of the corner solved, None where it has none; then `state` says what it is
    linear        what the leverages of the nominal chain say it would be
    signs         draw -> -1 or 1, the end of its reach
    turned        draws whose leverage points the other way at the corner than at the nominal chain, and that were
                  therefore taken at their other end
    """

    figure: str
    side: str
    value: float | None
    state: int
    linear: float
    signs: Mapping[str, int]
    turned: tuple[str, ...]


def corner(figure: Figure, side: str, nominal: float, of: Slopes, at: Mapping[str, float], drawn: Drawn) -> Corner:
    """The corner where `figure` is worst on one side; `of` its slopes and `nominal` its value with draws off by `at`.

    The signs are those of the leverages; then those at the corner are looked at, and where one points the other way
    the draw goes to its other end, as long as that makes the figure worse.
    """
    upward = 1 if side == "high" else -1
    first = {name: upward if slope >= 0.0 else -upward for name, slope in of.items()}
    reach = sum(of[name] * (sign - at[name]) for name, sign in first.items())
    linear = nominal * exp(reach) if figure.ratio else nominal + reach
    best, signs = _solved(figure, drawn, first), first
    for _ in range(ROUNDS):
        state, value, ledger = best
        if ledger is None or value is None:
            break
        here = slopes(ledger, drawn, signs, (figure,)).get(figure.name)
        turned = {name: -sign for name, sign in signs.items() if here and here[name] * sign * upward < 0.0}
        if not turned:
            break
        tried = _solved(figure, drawn, {**signs, **turned})
        if tried[1] is not None and (tried[1] - value) * upward <= 0.0:
            break
        best, signs = tried, {**signs, **turned}
    state, value, _ = best
    return Corner(figure.name, side, value, state, linear, signs,
                  tuple(name for name in signs if signs[name] != first[name]))


def _solved(figure: Figure, drawn: Drawn, signs: Mapping[str, int]) -> tuple[int, float | None, Ledger | None]:
    numbers = {path: float(value) for path, value in drawn.values({k: float(v) for k, v in signs.items()}).items()}
    state, of = alone(with_numbers(drawn.chain, numbers))
    return state, figure.single(of) if of is not None and state == GOOD else None, of
