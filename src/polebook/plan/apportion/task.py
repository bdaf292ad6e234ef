"""A task of apportioning as rows over handles, and one trial of it: the chain at some values, how its rows stand."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from polebook.book.ledger import Ledger, ledger
from polebook.book.reach import within_reach
from polebook.book.targets import Target
from polebook.chain.model import Chain
from polebook.plan.apportion.goals import FAR, Goal, got
from polebook.plan.apportion.guards import Guard, guards
from polebook.plan.apportion.handles import Handle
from polebook.plan.apportion.limits import apart_rows, clip_rows, passes, swing_rows
from polebook.problem import ProblemsFound

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from polebook.book.solution import Solution

Array: TypeAlias = "NDArray[np.float64]"


@dataclass(frozen=True, slots=True)
class Row:
    """One thing that a plan has to keep above 0.

    goal   the target that it is of, "" for a guard;  what and stage  say which guard
    judged False for a figure that is only favoured: nothing is short of it
    ease   how far above 0 it should be
    means  how its derivative is had: "exact", or the figures that have to be computed anew for differences
    """

    goal: str
    what: str
    stage: str
    judged: bool
    ease: float
    means: str


CLIP = "clip"  # what a row is that keeps the largest signal from clipping
MEANS: Mapping[str, str] = {"swing": "levels", "current": "rails", "overshoot": "pulse", "rise": "pulse", "sag": "sag"}
"""Targets whose derivatives are differences -> what is computed anew for them."""


@dataclass(slots=True)
class Tally:
    """How many trials were made."""

    trials: int = 0


@dataclass(frozen=True, slots=True)
class Task:
    """chain     as the file has it, and the figure that is favoured among its targets
    handles   what may be moved;  goals  what is wanted
    rows      of the goals in their order, then of the guards
    today     current in A of every device in the file as it is
    favour    the figure whose margin is to grow once all is met, "" for none
    limits    (stage, what happens) of every known bound of a swing
    largest   peak of the largest signal that is not to clip: the file's, or what passes today where that is less
    apart     stages whose current is stated, and lies near what their network gives
    notes     keys that are called free and no plan can set, and why
    tally     counts the trials that were made of it
    """

    chain: Chain
    handles: tuple[Handle, ...]
    goals: tuple[Goal, ...]
    favour: str
    today: Mapping[str, float]
    limits: tuple[tuple[str, str], ...]
    largest: float | None
    apart: tuple[str, ...]
    rows: tuple[Row, ...] = ()
    notes: tuple[str, ...] = ()
    tally: Tally = field(default_factory=Tally, compare=False)

    @property
    def start(self) -> Array:
        """ln of today's sizes."""
        return np.log(np.abs([handle.now for handle in self.handles]))

    @property
    def bounds(self) -> tuple[Array, Array]:
        """ln of the least and the greatest size of every handle."""
        return np.log([handle.low for handle in self.handles]), np.log([handle.high for handle in self.handles])

    @property
    def shy(self) -> Array:
        return np.array([handle.shy for handle in self.handles])

    def numbers(self, goal: str) -> list[int]:
        """The rows of a goal."""
        return [k for k, row in enumerate(self.rows) if row.goal == goal]

    def sizes(self, x: Array) -> list[float]:
        """Signed values of the file's keys for the ln of their sizes; today's exactly where nothing moved."""
        return [handle.now if at == start else float(np.copysign(np.exp(at), handle.now))
                for handle, at, start in zip(self.handles, x.tolist(), self.start.tolist(), strict=True)]

    def with_values(self, values: Sequence[float]) -> Chain:
        """The chain with a value for every handle."""
        moved = dict(zip((handle.path for handle in self.handles), values, strict=True))
        return replace(self.chain, numbers=MappingProxyType({**self.chain.numbers, **moved}))


@dataclass(slots=True)
class Trial:
    """The chain at some values.

    x        ln of the sizes;  values  the same, signed, in SI units
    rows     as the task's rows; all of them -FAR where the chain has no figures there, and `why` says why
    targets  by name
    """

    x: Array
    values: list[float]
    rows: Array
    why: str = ""
    of: Ledger | None = None
    targets: Mapping[str, Target] = field(default_factory=dict)

    @property
    def lives(self) -> bool:
        return not self.why


def trial(task: Task, x: Array, values: Sequence[float] | None = None) -> Trial:
    """The task's chain at x, or at `values` that are beside it (0: the part is not there). Never raises."""
    sizes = list(values) if values is not None else task.sizes(x)
    task.tally.trials += 1
    try:
        with np.errstate(all="ignore"):
            return _trial(task, x, sizes)
    except ProblemsFound as found:
        return _dead(task, x, sizes, found.problems[0].what)
    except ArithmeticError:
        return _dead(task, x, sizes, "the values lie too far apart to be computed")


def _dead(task: Task, x: Array, values: list[float], why: str) -> Trial:
    return Trial(x, values, np.full(len(task.rows), -FAR), why)


def _trial(task: Task, x: Array, values: list[float]) -> Trial:
    chain = task.with_values(values)
    of = ledger(chain)
    unsolved = [name for name, point in of.solution.circuit.points.items() if not point.converged]
    if unsolved:
        return _dead(task, x, values, f"the bias of {unsolved[0]} is not solved")
    with within_reach(chain):
        if not of.judged:
            return _dead(task, x, values, "the chain is unstable")
        if not of.solution.band.clean:
            return _dead(task, x, values, "no clean midband")
        targets = got(of)
        passing = passes(task.limits, of.solution) if task.largest or "swing" in targets else []
        rows = [row for goal in task.goals for row in of_goal(goal, targets[goal.name], of.solution, passing)]
        rows += [float(guard.value) for guard in of_bias(task, of)]
        rows += clip_rows(task.largest, passing)
        rows += apart_rows(chain, of.solution, task.apart)
    stand = np.array(rows, dtype=float)
    if stand.size != len(task.rows) and task.rows:
        return _dead(task, x, values, "the bias has another shape there")
    stand = np.where(np.isfinite(stand), stand, -FAR)
    return Trial(x, values, np.clip(stand, -FAR, FAR), "", of, targets)


def of_goal(goal: Goal, target: Target, solution: Solution, passing: Sequence[float]) -> Sequence[float]:
    """The goal's rows for the target that a ledger judged; one that it can't judge is as bad as can be."""
    if goal.name == "swing":
        return swing_rows(goal.want, solution, passing)
    if target.got is None and not target.met:
        return (-FAR,) * goal.rows
    return goal.shortfalls(target.got)


def of_bias(task: Task, of: Ledger) -> list[Guard]:
    """The bias guards of a ledger."""
    circuit = of.solution.circuit
    return guards(of.chain, circuit.plan, circuit.points, of.chain.get, task.today)
