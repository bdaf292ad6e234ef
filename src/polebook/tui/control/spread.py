"""Keys of the spread page: a run begun and stopped, what the next one is asked for, figures, rows, their keys."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

from polebook.chain.model import Chain
from polebook.chain.said import said
from polebook.session.state import keys_of, sheets_of
from polebook.tui import spread_apart
from polebook.tui.control import jobs
from polebook.tui.control.base import Done, Work, at, done, refuse, say, stepping, still, to_path, told
from polebook.tui.spreads import (
    ALL,
    LEAST_BUILDS,
    MOST_BUILDS,
    STEP,
    TABLE,
    Row,
    Run,
    Told,
    chosen,
    figures,
    fresh,
    looked_at,
    same,
)
from polebook.tui.spreads import rows as rows_of
from polebook.tui.view import Job, State, Takes

LEAST = 5e-4  # of a yield that is told
_EDGES = {True: "upper_edge_hz", False: "lower_edge_hz"}


def begin(state: State) -> Done:
    """Builds drawn and solved anew, of the text as it is now. What was shown stays until there is something of it."""
    ledger, spread = state.session.ledger, state.view.spread
    if ledger is None:
        return refuse(state, "there is no chain to build", "! tells what is wrong with the file")
    work = spread_apart.spread(ledger.chain, spread.builds, spread.seed)
    job = Job(f"{spread.builds:,} builds", "spread", work, Takes(_piece(ledger.chain), _ended(work)))
    return say(_with(jobs.begin(state, job), asked=spread.builds), "")


def _piece(chain: Chain) -> Callable[[State, Told | None], State]:
    """What it comes to so far, shown in the place of what there was before."""
    first: list[Told] = []

    def shown(state: State, piece: Told | None) -> State:
        if piece is None:
            return state
        spread = state.view.spread
        before = spread.before
        if not first and spread.run is not None and not same(spread.run.chain, chain):
            before = spread.run if spread.run.told.done == spread.run.told.builds else None
        first[:] = [piece]
        return _with(state, run=Run(chain, piece), before=before)

    return shown


def _ended(work: Any) -> Callable[[State, bool], State]:
    """What it has come to as a message; what is given up is ended in the other process too."""
    def message(state: State, whole: bool) -> State:
        work.close()
        run = state.view.spread.run
        if not whole:
            kept = f" after {run.told.done:,} of {run.told.builds:,} builds: these stay" if run and not \
                run.told.complete else ""
            return at(state, message=f"spread stopped{kept}", bad=False)
        return at(state, message=_summary(run.told) if run else "", bad=False)

    return message


def _summary(of: Told) -> str:
    share = of.yields.get(ALL)
    spent = f"{of.seconds:.1f} s" if of.seconds >= 0.1 else "less than 0.1 s"
    text = f"{of.done:,} built chains in {spent}"
    if share is not None:
        text += f", {round(share.share * of.done):,} of them as wanted"
    return "; ".join([text, *(told(problem) for problem in of.cautions)])


def _with(state: State, **changed: Any) -> State:
    return at(state, spread=replace(state.view.spread, **changed))


def rows(state: State) -> int:
    """How many rows the page has."""
    return len(rows_of(state.view.spread))


def act(state: State) -> Done:
    """To the key of the row; where nothing that holds is shown a run instead."""
    spread = state.view.spread
    if jobs.watched(state) is not None and spread.run is None:
        return say(state, "it runs; Esc stops it")
    found = rows_of(spread)
    if jobs.watched(state) is None and (not found or not fresh(state)):
        return begin(state)
    if not found:
        return refuse(state, "nothing is off in a built chain", "t, then tolerance: how far each part may be")
    row = found[chosen(spread, found)]
    own = tolerance_of(state, row)
    note = f"{said(row.path)}; {own} says how far it may be off" if own else ""
    return say(at(_to(state, row), focus="sheet"), note)


def tolerance_of(state: State, row: Row) -> str:
    """Path of the key that sets the tolerance of a row; "" where the file can't have one."""
    owner, _, key = row.path.partition(".")
    own = f"{owner}.tolerance.{key.partition('.')[0]}"
    if owner in sheets_of(state.session) and own in {one.path for one in keys_of(state.session, owner)}:
        return own
    if row.sort in ("resistor", "capacitor", "inductor", "device", "beta", "matching", "supply"):
        return f"tolerance.{row.sort}"
    return ""


def _to(state: State, row: Row) -> State:
    """The state at a row, its key in sight on its sheet."""
    state = _with(state, row=row.name)
    owner, _, number = row.path.rpartition(".")
    return at(to_path(state, owner if number.isdecimal() else row.path), focus=state.view.focus)


def _row(state: State, by: int) -> Done:
    """The row before or after."""
    found = rows_of(state.view.spread)
    if not found:
        return refuse(state, *_NOTHING)
    row = found[min(max(chosen(state.view.spread, found) + by, 0), len(found) - 1)]
    return say(_to(state, row), _about(state, row))


def _about(state: State, row: Row) -> str:
    """What less of a tolerance does, in words."""
    off = f"{row.reach:.3g} °C" if row.sort == "temperature" else f"{100.0 * row.reach:.3g} %"
    text = f"{row.label} ±{off}"
    if row.half is None or row.none is None:
        return text
    half, none = (f"{100.0 * more:+.1f} %" if abs(more) >= LEAST else "no more" for more in (row.half, row.none))
    return f"{text}: half of it brings {half} yield{'' if row.solved else ' (by slopes)'}, none {none}"


_NOTHING = "nothing is built yet", "s builds and solves"


def _figure(state: State, by: int) -> Done:
    """The figure before or after; behind the last one the table of all."""
    spread = state.view.spread
    here = looked_at(spread)
    if here is None:
        return refuse(state, *_NOTHING)
    names = [*(one.name for one in figures(spread.run)), TABLE]
    now = TABLE if spread.figure == TABLE else here.name
    return done(_with(state, figure=names[(names.index(now) + by) % len(names)]))


def _band(state: State) -> Done:
    """The other end of the band, and its edge."""
    upper = not state.view.upper
    return say(_with(at(state, upper=upper), figure=_EDGES[upper]), f"{'upper' if upper else 'lower'} end of the band")


def _builds(state: State, up: bool) -> Done:
    """Ten times as many builds for the next run, or a tenth."""
    now = state.view.spread.builds
    to = min(max(now * STEP if up else now // STEP, LEAST_BUILDS), MOST_BUILDS)
    if to == now:
        return say(state, f"{now:,} builds are the {'most' if up else 'fewest'}")
    return _next(_with(state, builds=to))


def _seed(state: State, by: int) -> Done:
    """Another seed for the next run: other draws of the same tolerances."""
    return _next(_with(state, seed=max(state.view.spread.seed + by, 0)))


def _next(state: State) -> Done:
    spread = state.view.spread
    return say(state, f"next: {spread.builds:,} builds, seed {spread.seed}; s runs it")


def _nothing_here(state: State, now: float) -> Done:
    return refuse(state, "a histogram has no zoom", "v shows another figure, * and / change the number of builds")


OWN: Mapping[str, Work] = {
    "single lines": still(begin),
    "row before": stepping(_row, -1),
    "row after": stepping(_row, 1),
    "figure before": stepping(_figure, -1),
    "figure after": stepping(_figure, 1),
    "next curve": stepping(_figure, 1),
    "curve before": stepping(_figure, -1),
    "band": still(_band),
    "decade up": lambda state, now: _builds(state, True),
    "decade down": lambda state, now: _builds(state, False),
    "pan left": stepping(_seed, -1),
    "pan right": stepping(_seed, 1),
    "zoom in": _nothing_here,
    "zoom out": _nothing_here,
}
"""Action -> what it does on this page."""
