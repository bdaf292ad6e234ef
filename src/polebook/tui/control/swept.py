"""The sweep of a part: begun in the background, moved along, narrowed and widened; the part set to a value of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from math import log
from typing import Any

from polebook.book.reach import within_reach
from polebook.chain.said import said
from polebook.problem import ProblemsFound
from polebook.session.state import set_value
from polebook.tui.control import jobs
from polebook.tui.control.base import Done, at, attempt, done, refuse, say
from polebook.tui.control.makers import maker
from polebook.tui.draw.levers import ALSO, Mover
from polebook.tui.sweeps import at_cursor, fresh, snapped
from polebook.tui.view import Job, State, Sweep, Takes

POINTS = 41
SPAN = 100.0  # from the least value to the greatest
LEAST_SPAN, MOST_SPAN = 1.05, 1e6
SAME = 1e-9  # two ranges whose ratios differ by less are alike
FURTHEST = 1e6  # from today's value
NO_FIGURES = "there are no figures to follow over a sweep", "! tells what is wrong with the file"


def begin(state: State, mover: Mover) -> Done:
    """The sweep of a row: that which stands, where it still holds, else a new one over a decade either way."""
    sweep, ledger = state.view.lever.sweep, state.session.ledger
    if ledger is None:
        return refuse(state, *NO_FIGURES)
    if sweep is not None and sweep.row == mover.name and fresh(state, sweep) and _whole(state, sweep):
        return done(at(state, lever=replace(state.view.lever, open=True)))
    path, told = mover.path, ""
    if not path:
        made = maker(ledger, mover)
        if not made.path:
            return refuse(state, f"{mover.name} can't be swept: {made.why}", made.fix)
        path, told = made.path, made.why
    value = ledger.chain.numbers.get(path, 0.0)
    if not value:
        return refuse(state, f"{said(path)} is 0, and a sweep goes by ratios of its value", "give it a value first")
    return _run(state, mover.name, path, _around(value, SPAN), told)


def act(state: State, sweep: Sweep, now: float) -> Done:
    """The part set to the value at the cursor; a sweep of an earlier text is made again instead."""
    if not fresh(state, sweep):
        return _again(state, sweep, sweep.values)
    text = snapped(state, sweep)
    if not text:
        return refuse(state, f"the file has no {said(sweep.path)} now", "Esc, then another row")
    after, outcome = attempt(state, lambda: set_value(state.session, sweep.path, text, now))
    if after.session is state.session and not after.view.bad:
        return say(after, f"{said(sweep.path)} is {text} already")
    return after, outcome


def follow(state: State, sweep: Sweep) -> Done:
    """The next further figure, or none: the sweep made again where its points have not got it."""
    keys = ["", *(one.key for one in ALSO)]
    now = state.view.lever.also
    also = keys[(keys.index(now) + 1) % len(keys)] if now in keys else keys[0]
    state = at(state, lever=replace(state.view.lever, also=also))
    told = next((f"{one.word} too" for one in ALSO if one.key == also), "gain, edges and noise again")
    if all(one.name in point.figures for one in ALSO if one.key == also for point in (sweep.today, *sweep.points)):
        return say(state, told)
    after, outcome = _again(state, sweep, sweep.values, sweep.cursor)
    return (after, outcome) if after.view.bad else say(after, told)


def move(state: State, sweep: Sweep, by: int) -> Done:
    """The cursor along the values."""
    to = min(max(sweep.cursor + by, 0), len(sweep.values) - 1)
    return done(_with(state, replace(sweep, cursor=to)))


def zoom(state: State, by: float) -> Done:
    """The range around the cursor, its ratio raised to `by`, swept anew."""
    sweep = state.view.lever.sweep
    if sweep is None:
        return _nothing(state)
    span = _span(sweep)
    wanted = min(max(span**by, LEAST_SPAN), MOST_SPAN)
    if abs(log(wanted / span)) < SAME:
        return say(state, "the range goes no " + ("wider" if by > 1 else "narrower"))
    return _again(state, sweep, _around(at_cursor(sweep), wanted), POINTS // 2)


def pan(state: State, by: float) -> Done:
    """The range moved by a share of itself, and swept anew."""
    sweep = state.view.lever.sweep
    if sweep is None:
        return _nothing(state)
    factor = _span(sweep)**by
    moved = [value * factor for value in sweep.values]
    if not all(1.0 / FURTHEST <= value / sweep.today.value <= FURTHEST for value in (moved[0], moved[-1])):
        return say(state, "the range goes no further")
    here = at_cursor(sweep)
    return _again(state, sweep, tuple(moved), _nearest(moved, here))


def _nothing(state: State) -> Done:
    return refuse(state, "nothing is swept yet", "Enter on a row sweeps it")


def _span(sweep: Sweep) -> float:
    return sweep.values[-1] / sweep.values[0]


def _whole(state: State, sweep: Sweep) -> bool:
    """Whether a sweep has all of its points, or will have."""
    return len(sweep.points) == len(sweep.values) or jobs.watched(state) is not None


def _around(value: float, span: float) -> tuple[float, ...]:
    """Values of equal ratio with `value`, exactly, in their middle."""
    half = POINTS // 2
    return tuple(value * span ** ((number - half) / (POINTS - 1)) for number in range(POINTS))


def _nearest(values: Sequence[float], value: float) -> int:
    """The number of the value whose ratio to `value` is nearest to one."""
    return min(range(len(values)), key=lambda number: abs(log(values[number] / value)))


def _again(state: State, sweep: Sweep, values: tuple[float, ...], cursor: int | None = None) -> Done:
    """The sweep made from the text as it is now; around today's value where that has left the range."""
    if state.session.ledger is None:
        return refuse(state, *NO_FIGURES)
    value = state.session.ledger.chain.numbers.get(sweep.path)
    if not value:
        return refuse(state, f"the file has no {said(sweep.path)} now", "Esc, then another row")
    if not 1.0 / FURTHEST <= value / values[len(values) // 2] <= FURTHEST:  # of the other sign too
        values = _around(value, values[-1] / values[0])
    return _run(state, sweep.row, sweep.path, values, cursor=cursor)


def _run(state: State, row: str, path: str, values: tuple[float, ...], told: str = "",
         cursor: int | None = None) -> Done:
    """A sweep begun; the cursor on the value nearest to today's where it is not said."""
    from polebook.plan.named import Figure  # deferred: nothing else of the app needs these, 4 ms of the first paint
    from polebook.plan.sweep import Point
    from polebook.plan.sweep import sweep as sweeping

    if (ledger := state.session.ledger) is None:
        return refuse(state, *NO_FIGURES)
    chain = ledger.chain
    try:
        with within_reach(chain):
            also = [one for one in ALSO if one.key == state.view.lever.also]
            today = Point(chain.numbers[path], ledger.solution.gain, ledger.lower_hz, ledger.upper_hz,
                          {one.name: one.today(ledger) for one in also},
                          noise=ledger.noise.density if ledger.noise else None)
    except ProblemsFound as found:
        return refuse(state, found.problems[0].what, found.problems[0].fix)
    if cursor is None:
        cursor = _nearest(values, today.value)
    sweep = Sweep(row, path, chain, today, values, cursor=cursor)
    figures = [Figure(one.name, one.unit, "overall") for one in also]
    state = jobs.begin(state, Job(f"sweep of {said(path)}", "leverage", sweeping(chain, path, values, figures), _TAKES,
                             total=len(values)))
    return say(at(state, lever=replace(state.view.lever, sweep=sweep, open=True)), told)


def _with(state: State, sweep: Sweep) -> State:
    return at(state, lever=replace(state.view.lever, sweep=sweep))


def _piece(state: State, point: Any) -> State:
    sweep = state.view.lever.sweep
    return state if sweep is None else _with(state, replace(sweep, points=(*sweep.points, point)))


def _ended(state: State, whole: bool) -> State:
    sweep = state.view.lever.sweep
    if sweep is None or whole:
        return state
    done_of = f"{len(sweep.points)} of {len(sweep.values)} values"
    return at(state, message=f"sweep of {said(sweep.path)} stopped after {done_of}: these stay", bad=False)


_TAKES = Takes(_piece, _ended)
