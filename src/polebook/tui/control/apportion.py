"""Keys of the apportion page: which keys may change, what is favoured, a run, the plan taken in or told in words."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from polebook.chain.said import said
from polebook.problem import Problem
from polebook.quantity import DIMENSIONS
from polebook.report.apportion import plan_lines
from polebook.report.figures import eng
from polebook.report.look import Look
from polebook.session.sheets import content_of
from polebook.session.state import apply
from polebook.tui import apportions
from polebook.tui.apportions import FAVOURS, Row, choosing, chosen, handle_of, holds, known
from polebook.tui.control import jobs
from polebook.tui.control.apportion_run import begin, to_row
from polebook.tui.control.base import (
    Done,
    Work,
    at,
    attempt,
    done,
    focused,
    line,
    lines,
    refuse,
    say,
    stepping,
    still,
    to_sheet,
)
from polebook.tui.view import Overlay, State

_WIDTH = 74


def rows(state: State) -> int:
    """How many rows the page has."""
    return len(apportions.rows(state))


def _with(state: State, **changed: Any) -> State:
    return at(state, apportion=replace(state.view.apportion, **changed))


def _at(state: State, found: Sequence[Row]) -> int:
    """The number of the chosen row."""
    key = focused(state)
    return apportions.at(found, state.view.apportion, key.path if key is not None else "")


def _here(state: State) -> Row | None:
    """The chosen row."""
    found = apportions.rows(state)
    return found[_at(state, found)] if found else None


def _act(state: State, now: float) -> Done:
    """The shown plan taken in; where none of the text of now and of what is asked is shown, a run instead."""
    run = state.view.apportion.run
    if jobs.watched(state) is not None:
        return say(state, "it runs; Esc stops it")
    if run is None or not holds(state):
        return begin(state)
    if not run.edit:
        return refuse(state, "no value moves", "v favours a figure, [ ] looks from other values, s runs it again")
    return attempt(state, lambda: apply(state.session, run.edit, now))


def _row(state: State, by: int) -> Done:
    """The row before or after."""
    found = apportions.rows(state)
    if not found:
        return refuse(state, *_NO_ROWS)
    row = found[min(max(_at(state, found) + by, 0), len(found) - 1)]
    return say(to_row(state, row), _about(state, row))


_NO_ROWS = "no part is soldered in", "Tab, then Space on a key of the sheet lets it change"


def _about(state: State, row: Row) -> str:
    """What a plan may do with a key."""
    if row.handle is None:
        return f"{said(row.path)} is {row.text or 'absent'} now, and no plan can set it"
    one, unit = row.handle, DIMENSIONS[row.handle.dimension].unit
    reach = f"from {eng(one.low, unit)} to {eng(one.high, unit)}"
    absent = ", or be left off" if one.optional else ""
    return f"{said(row.path)} may change {reach}{absent}" if row.path in chosen(state) else \
        f"{said(row.path)} stays as it is; Space lets it change {reach}"


def _line(state: State, to: int) -> Done:
    """Another line, and the first row of it."""
    names = lines(state.session)
    name = names[min(max(to, 0), len(names) - 1)]
    key = focused(state)
    state = at(to_sheet(state, name, key.key if key is not None else ""), focus=state.view.focus)
    row = next((row for row in apportions.rows(state) if row.owner == name), None)
    return done(state if row is None else to_row(state, row))


def _step_line(state: State, by: int) -> Done:
    return _line(state, lines(state.session).index(line(state)) + by)


def _choose(state: State) -> Done:
    """The row's key may change, or stays; with the sheet focused its key, which is then among the rows."""
    if state.view.focus == "sheet":
        key = focused(state)
        path = key.path if key is not None else ""
    else:
        row = _here(state)
        path = row.path if row is not None else ""
    chain = state.session.chain
    if not path or chain is None:
        return refuse(state, *_NO_ROWS)
    if path not in known(state).handles:
        found = handle_of(chain, content_of(state.session.history.text)[0], path)
        if isinstance(found, Problem):
            return refuse(state, f"{found.what}: {found.why}", "choose another key")
        path = found.path
        state = _with(state, also=(*state.view.apportion.also, path))
    paths = chosen(state) ^ {path}
    word = "may change" if path in paths else "stays as it is"
    return _chose(_with(state, row=path), paths, f"{said(path)} {word}")


def _chose(state: State, paths: frozenset[str], told: str) -> Done:
    state = _with(state, chosen=choosing(state, paths))
    return say(state, f"{told}; {len(chosen(state))} of {len(known(state).handles)} may change")


def _stage(state: State) -> Done:
    """All keys of the row's stage may change; again: none of them."""
    row = _here(state)
    if row is None:
        return refuse(state, *_NO_ROWS)
    own = {path for path in known(state).handles if Row(path, "").owner == row.owner}
    if own <= chosen(state):
        return _chose(state, chosen(state) - own, f"{said(row.owner)} stays as it is")
    return _chose(state, chosen(state) | own, f"all of {said(row.owner)} may change")


def _all(state: State) -> Done:
    """All keys may change; again: none."""
    every = frozenset(known(state).handles)
    if not every:
        return refuse(state, *_NO_ROWS)
    whole = chosen(state) == every
    return _chose(state, frozenset() if whole else every, "none may change" if whole else "all may change")


def _favour(state: State, by: int) -> Done:
    """The figure before or after, of which the most is made once all targets are met; or none."""
    to = FAVOURS[(FAVOURS.index(state.view.apportion.favour) + by) % len(FAVOURS)]
    told = f"{to} is favoured: the most is made of it once all targets are met" if to else \
        "nothing is favoured: as little moves as meets the targets"
    return say(_with(state, favour=to), told)


def _seed(state: State, by: int) -> Done:
    """Another seed: other values from which the search begins beside today's."""
    seed = max(state.view.apportion.seed + by, 0)
    return say(_with(state, seed=seed), f"seed {seed}: other values to begin at, beside today's; s runs it")


def _whole(state: State) -> Done:
    """The shown plan as the command tells it, over the page."""
    run = state.view.apportion.run
    if run is None:
        return refuse(state, "there is no plan to account for", "s looks for one")
    look = Look(encoding="ascii" if state.plain else "utf-8", width=_WIDTH)
    text = tuple(text.removeprefix(" ") for text in plan_lines(run.told, look))
    return done(at(state, overlay=Overlay("working", "the plan in words", text=text), field=None))


OWN: Mapping[str, Work] = {
    "act": _act,
    "single lines": still(begin),
    "choose": still(_choose),
    "row before": stepping(_row, -1),
    "row after": stepping(_row, 1),
    "line before": stepping(_step_line, -1),
    "line after": stepping(_step_line, 1),
    "first line": lambda state, now: _line(state, 0),
    "last line": lambda state, now: _line(state, len(lines(state.session)) - 1),
    "figure before": stepping(_favour, -1),
    "figure after": stepping(_favour, 1),
    "next curve": stepping(_favour, 1),
    "curve before": stepping(_favour, -1),
    "decade up": still(_all),
    "decade down": still(_stage),
    "pan left": stepping(_seed, -1),
    "pan right": stepping(_seed, 1),
    "working": still(_whole),
}
"""Action -> what it does on this page."""
