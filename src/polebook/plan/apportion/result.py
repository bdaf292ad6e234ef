"""What apportioning is asked for, how far it is, and what it came to."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from polebook.book.targets import Target
from polebook.plan.apportion.giving import Gives, Held, Lever
from polebook.plan.apportion.starts import SEED
from polebook.plan.apportion.task import Task, Trial
from polebook.plan.proposal import Proposal


@dataclass(frozen=True, slots=True)
class Request:
    """text and file  the chain file, and the name that messages carry
    free    paths that may be set, or names of stages for every part fitted in them; () for what the file says is
            free, else for every part that is fitted
    favour  a target's name whose margin is to grow once all are met, "" for the least change that meets them
    seed    of the starts beside today's values
    """

    text: str
    file: str
    free: tuple[str, ...] = ()
    favour: str = ""
    seed: int = SEED


@dataclass(frozen=True, slots=True)
class Best:
    """The best plan so far, before its values are snapped: `values` by path, SI; `targets` by name.

    origin, starts  as of the result
    """

    task: Task = field(repr=False)
    trial: Trial = field(repr=False)
    origin: str
    starts: int

    @property
    def values(self) -> Mapping[str, float]:
        return {handle.path: value for handle, value in zip(self.task.handles, self.trial.values, strict=True)}

    @property
    def targets(self) -> Mapping[str, Target]:
        return self.trial.targets


@dataclass(frozen=True, slots=True)
class Result:
    """The plan that was found.

    proposal  with every free key among its keys, and the edit that makes it
    origin    who says what is free: "chosen", "file", "fitted"
    trials    how many ledgers it took;  starts  from how many values the search began
    stopped   it was stopped, and is what had been found by then
    gives     where a target is missed: those that alone would have to give, and how far
    held      parts at their bounds that would help a missed target
    levers    keys that were not free and would help one
    notes     keys that the file calls free and no plan can set, and why
    """

    proposal: Proposal
    origin: str
    favour: str
    seed: int
    trials: int
    starts: int
    stopped: bool
    gives: tuple[Gives, ...]
    held: tuple[Held, ...]
    levers: tuple[Lever, ...]
    notes: tuple[str, ...]

    def document(self) -> dict[str, Any]:
        """As plain data: the proposal's, and what there is to say of it."""
        return {
            "free": {"from": self.origin, "keys": [key.path for key in self.proposal.keys]},
            "favour": self.favour or None, "seed": self.seed, "starts": self.starts, "trials": self.trials,
            "stopped": self.stopped, **self.proposal.document(),
            "gives": [{"target": one.target, "want": one.want, "got": one.got} for one in self.gives],
            "held": [{"path": one.path, "value": one.value, "bound": "upper" if one.upper else "lower",
                      "target": one.target, "leverage": one.leverage} for one in self.held],
            "levers": [{"path": one.path, "target": one.target, "leverage": one.leverage} for one in self.levers],
            "notes": list(self.notes),
        }
