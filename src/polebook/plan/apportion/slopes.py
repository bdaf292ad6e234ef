"""What every row of a task does as each handle moves: exact by adjoint and complex step, else by differences.

Gain, edges, peaking and noise come from one adjoint solution each, the bias from a complex step through its solution.
Swing, current and pulse have no such way: what they rest on is computed anew for each handle that can move them, and
only where the row is near enough to its limit to matter.
"""

from __future__ import annotations

from collections.abc import Collection, Generator
from dataclasses import dataclass

import numpy as np

from polebook.book.asked import ASKED
from polebook.book.ledger import Ledger
from polebook.book.leverage import STEP, of_edge, of_gain, through_bias
from polebook.book.noise_slopes import slopes_of
from polebook.book.shares import derivatives
from polebook.circuit import bias
from polebook.circuit.build import moved as moved_circuit
from polebook.plan.apportion.goals import LINEAR, NEPER_DB
from polebook.plan.apportion.guards import guards
from polebook.plan.apportion.limits import apart_rows, clip_rows, passes, swing_rows
from polebook.plan.apportion.task import CLIP, MEANS, Array, Task, Trial
from polebook.problem import ProblemsFound

APART_X = 1e-4  # neper between the two ends of a difference
REACH, SHARE_REACH = 0.2, 0.02  # from its ease up to which a row that takes differences is followed: neper, a share
OLDEST = 6  # times that differences are brought up to date before they are taken anew
NEAR = 0.4  # neper that a part may have moved for it
SLIGHT = 0.01  # leverage on an edge
_EDGES = {"pulse": "upper", "sag": "lower"}
_MOVED_BY: dict[str, tuple[str, ...]] = {"levels": ("",), "rails": ("",), "apart": ("",), "pulse": ("", "high"),
                                         "sag": ("", "low")}


@dataclass(frozen=True, slots=True)
class Slopes:
    """by is (rows, handles): d row/d ln size at `at`.

    followed  what differences were taken of;  age  how often they were only brought up to date since
    """

    by: Array
    at: Trial
    followed: frozenset[str]
    age: int = 0


def slopes(task: Task, at: Trial, old: Slopes | None = None) -> Generator[None, None, Slopes]:
    """The slopes at a trial; yields between pieces of the work.

    Differences are not taken anew where `old`, of a trial near by, tells how the rows moved from there to here: then
    they are brought up to date by that alone (the secant update of C. G. Broyden, A class of methods for solving
    nonlinear simultaneous equations, Mathematics of Computation 19, 1965; from memory).
    """
    result = np.zeros((len(task.rows), len(task.handles)))
    of = at.of
    assert of is not None
    if old is not None and old.at is at:
        return old
    with np.errstate(all="ignore"):
        exact = _exact(task, of)
        yield
        for goal in task.goals:
            if (figure := exact.get(goal.name)) is not None:
                for row, slope in zip(task.numbers(goal.name), goal.slopes(figure), strict=True):
                    result[row] = slope
        first = sum(bool(row.goal) for row in task.rows)
        bias_slopes = _of_bias(task, of)
    result[first:first + bias_slopes.shape[0]] = bias_slopes
    yield
    age, means = 0, _followed(task, at)
    if means and old is not None and old.age < OLDEST and means <= old.followed \
            and np.abs(at.x - old.at.x).max() < NEAR:
        _bring_up(task, at, old, result)
        age, means = old.age + 1, old.followed
    elif means:
        yield from _differences(task, at, means, exact, result)
    result[~np.isfinite(result)] = 0.0
    return Slopes(result, at, means, age)


def _followed(task: Task, at: Trial) -> frozenset[str]:
    """The means of the rows that differences are to be taken of."""
    return frozenset(row.means for k, row in enumerate(task.rows) if row.means != "exact"
                     and (at.rows[k] < row.ease + (SHARE_REACH if row.goal in LINEAR else REACH)
                          or row.goal == task.favour != ""))


def _bring_up(task: Task, at: Trial, old: Slopes, result: Array) -> None:
    """Fills in the rows that have no exact derivative from those near by."""
    rows = [k for k, row in enumerate(task.rows) if row.means != "exact"]
    way = at.x - old.at.x
    size = float(way @ way)
    missed = at.rows[rows] - old.at.rows[rows] - old.by[rows] @ way
    result[rows] = old.by[rows] + (np.outer(missed, way) / size if size else 0.0)


def _exact(task: Task, of: Ledger) -> dict[str, Array]:
    """Figure -> its derivative by every handle: of ln of it, of peaking in dB."""
    solution, names = of.solution, {goal.name for goal in task.goals}
    gain = of_gain(solution)
    partial: dict[str, dict[int, float] | None] = {"gain": gain}
    if "gain" in names and "target.reference" in of.chain.given and of.reference_hz is not None:
        partial["gain"] = _at(of, of.reference_hz, gain)
    for name, hz in (("lower", of.lower_hz), ("upper", of.upper_hz)):
        if name in names and hz is not None:
            partial[name] = of_edge(solution, hz, gain)
    if "peaking" in names and solution.band.peaking_db > 0.0:
        sweep = solution.sweep
        top = _at(of, float(sweep.hz[int(np.argmax(sweep.loss))]), gain)
        partial["peaking"] = {index: NEPER_DB * (top[index] - gain[index]) for index in gain}
    moving = slopes_of(of.noise) if "noise" in names and of.noise is not None else None
    if moving is not None:
        partial["noise"] = moving.elements
    rows = through_bias(solution, partial, moving, [handle.path for handle in task.handles])
    return {name: np.array([row[name] for row in rows], dtype=float)
            for name in partial if partial[name] is not None}


def _at(of: Ledger, hz: float, gain: dict[int, float]) -> dict[int, float]:
    """d ln|H|/d ln X at one frequency."""
    each = derivatives(of.solution.circuit.network, hz, resistive=True).by_part
    return {index: each[index].real if index in each else 0.0 for index in gain}


def _of_bias(task: Task, of: Ledger) -> Array:
    """(guards, handles) by a complex step through the bias."""
    numbers, count = of.chain.numbers, len(task.handles)
    override = {}
    for k, handle in enumerate(task.handles):
        stepped = np.full(count, numbers[handle.path], dtype=complex)
        stepped[k] *= 1 + 1j * STEP
        override[handle.path] = stepped
    plan = of.solution.circuit.plan

    def get(path: str) -> object:
        return override[path] if path in override else numbers.get(path)

    points = bias.solve(plan, get)
    found = guards(of.chain, plan, points, get, task.today)
    return np.array([np.broadcast_to(np.imag(guard.value) / STEP, (count,)) for guard in found]).reshape(-1, count)


def _differences(task: Task, at: Trial, means: frozenset[str], exact: dict[str, Array],
                 result: Array) -> Generator[None, None, None]:
    """Fills in the rows that have no exact derivative; a part that hardly moves an edge moves no pulse at that end."""
    of = at.of
    if of is None:
        return
    figures = _figures(task, of, means)
    for k, handle in enumerate(task.handles):
        wanted = [name for name in means if handle.role in _MOVED_BY[name] and _leans(exact, name, k)]
        if not wanted:
            continue
        try:
            near = task.with_values(_stepped(at.values, k))
            moved = _figures(task, Ledger(near, moved_circuit(of.solution.circuit, near)), wanted)
        except (ProblemsFound, OverflowError, ZeroDivisionError):
            continue
        yield
        for row, new in moved.items():
            if new is not None and (old := figures.get(row)) is not None:
                result[row, k] = (new - old) / APART_X


def _leans(exact: dict[str, Array], name: str, k: int) -> bool:
    """Whether the edge that lies at the end of a response leans on a handle at all; taken for granted where unknown."""
    edge = exact.get(_EDGES.get(name, ""))
    return edge is None or abs(float(edge[k])) > SLIGHT


def _stepped(values: list[float], k: int) -> list[float]:
    return [value * np.exp(APART_X) if at == k else value for at, value in enumerate(values)]


def _figures(task: Task, of: Ledger, means: Collection[str]) -> dict[int, float | None]:
    """Row number -> how it stands, of the rows that `means` serve; stability is not asked for again."""
    found: dict[int, float | None] = {}
    passing = passes(task.limits, of.solution) if "levels" in means else []
    for goal in task.goals:
        rows = task.numbers(goal.name)
        if goal.name == "swing":
            found |= dict(zip(rows, swing_rows(goal.want, of.solution, passing), strict=False))
        elif MEANS.get(goal.name, "") in means:
            got, _ = ASKED[goal.name](of, goal.want)
            found[rows[0]] = None if got is None else goal.shortfalls(got)[0]
    clips = [k for k, row in enumerate(task.rows) if row.what == CLIP]
    found |= dict(zip(clips, clip_rows(task.largest, passing), strict=False))
    if "apart" in means:
        apart = [k for k, row in enumerate(task.rows) if row.means == "apart"]
        found |= dict(zip(apart, apart_rows(of.chain, of.solution, task.apart), strict=True))
    return found
