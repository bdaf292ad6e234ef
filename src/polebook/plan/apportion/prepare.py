"""From a chain, the keys that are free and a favoured figure to the task."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from polebook.book.ledger import ledger
from polebook.book.levels import Levels
from polebook.book.targets import Target
from polebook.chain.located import PathRefused
from polebook.chain.model import Chain
from polebook.circuit.build import circuit
from polebook.plan.apportion.goals import Goal, favoured, goals, with_target
from polebook.plan.apportion.guards import APART_EASE
from polebook.plan.apportion.handles import Handle
from polebook.plan.apportion.limits import apart_rows, clip_rows, passes
from polebook.plan.apportion.task import CLIP, MEANS, Row, Task, Trial, of_bias

CLIP_EASE = 0.02  # neper by which the largest signal should pass, where it does


def bare(chain: Chain, free: Sequence[Handle], notes: tuple[str, ...] = ()) -> Task:
    """A task without rows, to look for values at which the chain has figures.

    Raises ProblemsFound where the chain has no network.
    """
    points = circuit(chain).points
    today = {name: float(point.current) for name, point in points.items() if point.current is not None}
    return Task(chain, tuple(free), (), "", today, (), None, (), notes=notes)


def prepared(task: Task, favour: str, seen: Trial | None) -> Task:
    """The task of a bare one with all its rows, as `seen`, a trial of it that has figures, shows them.

    Raises ProblemsFound where what is favoured has neither a target nor a value.
    """
    chain, known = task.chain, goals(task.chain)
    if seen is None or seen.of is None:
        return replace(task, goals=known, favour=favour)
    targets = seen.targets
    silent = [goal for goal in known if _silent(targets[goal.name])]
    known = tuple(goal for goal in known if goal not in silent)
    if favour and all(goal.name != favour for goal in known):
        chain, known = _favouring(seen.of.chain, chain, known, favour)
    solution = seen.of.solution
    levels = Levels(solution)
    limits = tuple((clip.stage, bound.by) for clip in levels.clips for bound in clip.bounds if bound.volts is not None)
    stated = chain.numbers["source.largest"] if "source.largest" in chain.given else None
    largest = min(stated, levels.largest_source) if stated and levels.largest_source else None
    given = [name for name, point in solution.circuit.points.items() if point.origin == "given" and point.current]
    near = zip(given, apart_rows(seen.of.chain, solution, given), strict=True)
    apart = tuple(name for name, row in near if 0.0 <= row < 1.0)
    task = replace(task, chain=chain, goals=known, favour=favour, limits=limits, largest=largest, apart=apart)
    return replace(task, rows=tuple(_rows(task, seen)))


def _silent(target: Target) -> bool:
    """A target that no value of the chain's parts would make judged."""
    return target.met is None and target.got is None and target.name in ("noise", "swing", "current")


def _favouring(seen: Chain, chain: Chain, known: tuple[Goal, ...], name: str) -> tuple[Chain, tuple[Goal, ...]]:
    """The chain and its goals with a figure that has no target."""
    target = next(one for one in ledger(with_target(seen, name, 1.0)).targets if one.name == name)
    if target.got is None:
        raise PathRefused(f"{name} can't be favoured", target.why or "the chain has none",
                          "favour another figure, or give what is missing")
    return with_target(chain, name, target.got), favoured(known, name, target.got)


def _rows(task: Task, seen: Trial) -> Iterator[Row]:
    """The rows; of what is no target the ease is no more than there is of it."""
    for goal in task.goals:
        if goal.name == "swing":
            yield from (Row("swing", what, stage, goal.judged, goal.ease, "levels") for stage, what in task.limits)
            continue
        for side in range(goal.rows):
            yield Row(goal.name, ("above", "below")[side] if goal.rows == 2 else "", "", goal.judged, goal.ease,
                      MEANS.get(goal.name, "exact"))
    assert seen.of is not None
    for guard in of_bias(task, seen.of):
        yield Row("", guard.what, guard.stage, True, min(guard.ease, max(float(guard.value), 0.0)), "exact")
    clips = clip_rows(task.largest, passes(task.limits, seen.of.solution))
    for (stage, _), passing in zip(task.limits, clips, strict=bool(clips)):
        yield Row("", CLIP, stage, True, min(CLIP_EASE, max(passing, 0.0)), "levels")
    for name in task.apart:
        yield Row("", "apart", name, True, APART_EASE, "apart")
