"""What a plan has to reach, as rows: each is a number that is not negative where its figure is as wanted.

All rows are in neper, or are made to compare with it: an edge a tenth too low and a gain a tenth below its tolerance
weigh alike. So a sum of shortfalls can be compared between plans.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import inf, log
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from polebook.book.targets import LESS_IS_BETTER, NAMES, TOLERANCE_DB, Target
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain
from polebook.chain.suggest import listed

if TYPE_CHECKING:
    from polebook.book.ledger import Ledger

NEPER_DB = 8.685889638065037  # dB in a neper
FAVOURS = tuple(name for name in NAMES if name != "yield")  # many built chains tell that, not one plan
LINEAR = frozenset({"peaking", "overshoot", "sag"})  # may be zero, and are compared by their difference
FAR = 20.0  # neper; what lies further off counts as that
EASE = 0.1  # neper by which an edge, a current ... should be better than asked, so that parts may differ


@dataclass(frozen=True, slots=True)
class Goal:
    """One target, or a figure that is only favoured.

    want    in the target's own unit; of a figure that has no target, its value today
    slack   of a gain that is to be met, its tolerance in neper; 0 where more gain is better
    judged  False for a figure that is only favoured
    ease    neper beyond the target that a plan tries to keep
    """

    name: str
    want: float
    slack: float
    judged: bool
    ease: float

    @property
    def rows(self) -> int:
        """The gain has a row for either side of it; those of the swing are as many as there are bounds of it."""
        return 2 if self.slack else 1

    def shortfalls(self, got: float | None) -> tuple[float, ...]:
        """Its rows for a figure in the target's own unit; None: the chain does not have what could be too bad."""
        if got is None:
            return (FAR,) * self.rows
        if self.name in LINEAR:
            return (_held((self.want - got) / self.unit),)
        off = _held(log(got / self.want)) if got > 0.0 and self.want > 0.0 else -FAR if got <= 0.0 else FAR
        if self.name == "gain" and self.slack:
            return (self.slack - off, self.slack + off)
        return (-off if self.name in LESS_IS_BETTER else off,)

    def slopes(self, of_figure: Any) -> tuple[Any, ...]:
        """The rows' derivatives from the figure's: d ln of it, or of a linear one d of it in its own unit."""
        if self.name in LINEAR:
            return (-of_figure / self.unit,)
        if self.name == "gain" and self.slack:
            return (-of_figure, of_figure)
        return (-of_figure if self.name in LESS_IS_BETTER else of_figure,)

    @property
    def unit(self) -> float:
        """What one of a linear figure's rows is of it: dB in a neper, or a share of one."""
        return NEPER_DB if self.name == "peaking" else 1.0


def _held(value: float) -> float:
    return min(max(value, -FAR), FAR)


def goals(chain: Chain) -> tuple[Goal, ...]:
    """One for each target of the file that this version can judge."""
    stated = [name for name in FAVOURS if f"target.{name}" in chain.given]
    return tuple(_goal(chain, name, chain.numbers[f"target.{name}"]) for name in stated)


def _goal(chain: Chain, name: str, want: float) -> Goal:
    if name == "gain":
        slack = (chain.get("target.gain_tolerance", TOLERANCE_DB) or TOLERANCE_DB) / NEPER_DB
        return Goal(name, want, slack, True, 0.5 * slack)
    if name == "peaking":
        return Goal(name, want, 0.0, True, 0.25 * want / NEPER_DB)
    return Goal(name, want, 0.0, True, 0.15 * want if name in LINEAR else EASE)


def favoured(known: Sequence[Goal], name: str, got: float) -> tuple[Goal, ...]:
    """The goals with one for a figure that has no target, measured from what it is today."""
    if any(goal.name == name for goal in known):
        return tuple(known)
    return (*known, Goal(name, got, 0.0, False, -inf))


def with_target(chain: Chain, name: str, want: float) -> Chain:
    """The chain with a target that the file does not state, so that its ledger judges by it."""
    path = f"target.{name}"
    return replace(chain, numbers=MappingProxyType({**chain.numbers, path: want}), given=chain.given | {path})


def check(name: str) -> None:
    """Raises PathRefused for a figure that can't be favoured."""
    if name and name not in FAVOURS:
        raise PathRefused(f"{name} is no figure that a plan could favour", f"those are {listed(FAVOURS)}",
                          "name one of them, or none")


def got(of: Ledger) -> Mapping[str, Target]:
    """The targets of a ledger by name."""
    return {target.name: target for target in of.targets}
