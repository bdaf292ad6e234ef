"""The head of the apportion page, and beside the keys: targets and figures today and as proposed, and what to know."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from polebook.report import figures as show
from polebook.report.apportion import other_figures
from polebook.report.apportion_words import moved, sentences, verdict
from polebook.tui.apportions import Going, Run, asked, chosen, known, standing
from polebook.tui.draw.grid import Cell, Column, Row, grid
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.spread_told import flowing
from polebook.tui.lines import Line, Span
from polebook.tui.view import State

LEAST = 22  # cells that say something
BAR = 10
TITLED = 5  # rows from which on there is a heading
_MET = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("not judged", "warn")}
_DECIBELS, _SHARES = frozenset(("gain", "peaking")), frozenset(("overshoot", "sag", "yield"))
_TITLES = {"none": ("today", ""), "fresh": ("today", "proposed"), "accepted": ("was", "today"),
           "old": ("then", "proposed")}


@dataclass(frozen=True, slots=True)
class _Aim:
    """One target: as it stands, and as it would (`there`: that is known)."""

    name: str
    want: float
    before: float | None
    after: float | None
    met: bool | None
    there: bool = True


def running(state: State) -> bool:
    return state.job is not None and state.job.page == "apportion"


def head(scene: Scene, room: int) -> Line:
    """How far a run is, or whether the targets are met by what is shown; whether that holds; what the next one is."""
    run, state = scene.view.apportion.run, scene.state
    if running(state):
        return flowing([_progress(scene), *_behind(scene)], room)
    if run is None:
        return flowing([_asks(scene), *_favours(scene)], room)
    how = standing(state)
    text, style = verdict(run.told)
    told: list[Line] = []
    if how == "old":
        told.append((Span(" of before the edit", "warn"), Span("; s runs it again", "dim")))
    elif how == "accepted":
        told.append((Span(" accepted", "head"), Span("; u takes it back", "dim")))
    if run.told["stopped"]:
        told.append((Span(" stopped: the best so far" if not told else "stopped", "warn"),))
    told.append((Span(f"{'' if told else ' '}{text}", "dim" if how == "old" else style),))
    if how == "fresh" and (values := moved(run.told)):
        told.append((Span(f"{values} move{'s' * values.startswith('1 ')}"),))
    if run.asked != asked(state):
        told.append((Span("next: ", "dim"), Span(", ".join(_next(scene)), "select")))
    elif words := _next(scene)[1:]:
        told.append((Span(", ".join(words), "dim"),))
    return flowing(told, room)


def _progress(scene: Scene) -> Line:
    job, going, pen = scene.state.job, scene.view.apportion.going, scene.pen
    if job is None or going is None or not going.begun:
        return (Span(" begins"),)
    if job.halting:
        return (Span(" stopping, with the best so far"),)
    bar = pen.look.bar(job.done / job.total if job.total else 0.0, BAR)
    stated = {target.name for target in going.targets}
    short = sum(one.met is not True for one in going.reached if one.name in stated)
    so_far = "no figures" if not going.reached else f"{short} missed" if short else "all met"
    return (Span(" "), Span(bar, "bar"), Span(pen.text("·") * (BAR - len(bar)), "dim"),
            Span(f" {job.done} of at most {job.total} trials, {so_far} so far"))


def _behind(scene: Scene) -> Iterator[Line]:
    going = scene.view.apportion.going
    if going is not None and going.text != scene.session.history.text:
        yield (Span("of before the edit", "warn"),)


def _asks(scene: Scene) -> Line:
    can, may = known(scene.state), chosen(scene.state)
    if not can.handles:
        return (Span(" no key may change", "warn"),)
    who = {"file": "as the file says", "fitted": "every part that is fitted"}.get(can.origin, "") \
        if scene.view.apportion.chosen is None else "as chosen"
    count = f" {len(may)} key{'s' * (len(may) != 1)} may change"
    return (Span(count, "head"), Span(f": {who}" if who else "", "dim"))


def _favours(scene: Scene) -> list[Line]:
    here = scene.view.apportion
    told: list[Line] = [(Span(here.favour), Span(" favoured", "dim")) if here.favour else
                        (Span("nothing favoured", "dim"),)]
    return [*told, *([(Span(f"seed {here.seed}", "dim"),)] if here.seed != 1 else [])]


def _next(scene: Scene) -> list[str]:
    """What a run is asked, in a few words."""
    here, may = scene.view.apportion, chosen(scene.state)
    return [f"{len(may)} key{'s' * (len(may) != 1)}", *([f"{here.favour} favoured"] if here.favour else []),
            *([f"seed {here.seed}"] if here.seed != 1 else [])]


def aside(scene: Scene, room: int, size: int) -> list[Line]:
    """At most `size` lines of at most `room` cells; what is left out `=` tells."""
    run, going = scene.view.apportion.run, scene.view.apportion.going
    pen = scene.pen
    if running(scene.state) and going is not None:
        return _table(scene, list(_sought(going)), ("today", "so far"), room, size)[:size]
    if run is None:
        aims = list(_today(scene))
        lines = _table(scene, aims, _TITLES["none"], room, size) if aims else []
        told = [(Span(text, "dim"),) for text in pen.wrapped(begins(scene), room)]
        return ([*lines, BLANK, *told] if lines and size > len(lines) + len(told) else [*lines, *told])[:size]
    titles = _TITLES[standing(scene.state)]
    lines = _table(scene, list(_planned(run)), titles, room, size)
    said: list[Line] = [(Span(text),) for one in sentences(run.told, "page 8") for text in pen.wrapped(one, room, "  ")]
    said += [(Span(text, "warn"),) for one in run.told["cautions"]
             for text in pen.wrapped(f"caution: {one}", room, "  ")]
    said += [(Span(text),) for one in run.told["mended"] for text in pen.wrapped(f"mended: {one}", room, "  ")]
    figures = _figures(scene, run, room)
    for part in (said, figures):
        if part:
            lines += [*([BLANK] if lines and size > DENSE else []), *part]
    if len(lines) > size:
        lines = [*lines[:size - 1], (Span("= ", "key"), Span("tells the rest", "dim"))]
    return [_faded(line) for line in lines] if titles[0] == "then" else lines


DENSE = 9  # rows up to which nothing is left blank


def _faded(line: Line) -> Line:
    return tuple(Span(span.text, span.style or "dim") for span in line)


def _today(scene: Scene) -> Iterator[_Aim]:
    for one in scene.session.ledger.targets if scene.session.ledger is not None else ():
        yield _Aim(one.name, one.want, one.got, None, one.met, False)


def _sought(going: Going) -> Iterator[_Aim]:
    reached = {one.name: one for one in going.reached}
    for one in going.targets:
        there = reached.get(one.name)
        yield _Aim(one.name, one.want, one.got, there.got if there else None, there.met if there else one.met,
                   there is not None)


def _planned(run: Run) -> Iterator[_Aim]:
    for one in run.told["targets"]:
        yield _Aim(one["name"], one["want"], one["before"]["got"], one["after"]["got"], one["after"]["met"])


def _table(scene: Scene, aims: list[_Aim], titles: tuple[str, str], room: int, size: int) -> list[Line]:
    """The targets; where there is no room for all those first that are missed."""
    if not aims:
        return []
    titled = size >= TITLED
    if len(aims) + titled > size:
        aims = sorted(aims, key=lambda aim: aim.met is True)
    unit = "V/V" if scene.chain.source_kind == "voltage" else "V/A"
    then = bool(titles[1])
    body = [Row([Cell(aim.name), Cell(show.target(aim.name, aim.want, unit), "dim"),
                 Cell(_short(aim.name, aim.before, unit), "" if not then else "dim"),
                 *([Cell(_short(aim.name, aim.after, unit) if aim.there else "")] if then else []), _MET[aim.met]])
            for aim in aims]
    columns = [Column("target", 7, right=False, gap=0), Column("want", 7, drop=2), Column(titles[0], 5, drop=1 * then),
               *([Column(titles[1], 5)] if then else []), Column("", 3, right=False)]
    lines = grid(columns, body, room, scene.pen)
    return lines if titled else lines[1:]


def _short(name: str, value: float | None, unit: str) -> str:
    """A target's figure without its unit, which stands beside what is wanted."""
    if name in _DECIBELS or name in _SHARES:
        return show.target(name, value, unit).partition(" ")[0]
    return show.eng(value)


def _figures(scene: Scene, run: Run, room: int) -> list[Line]:
    body = [Row([Cell(name), Cell(show.bare(before, unit), "dim"), Cell(show.by_unit(after, unit))])
            for name, unit, before, after in other_figures(run.told)]
    columns = [Column("other figures", 8, right=False, gap=0), Column("", 5), Column("", 6)]
    return grid(columns, body, room, scene.pen) if body else []


def begins(scene: Scene) -> str:
    """What a run would do, or what has to be done before one can be."""
    state, here, session = scene.state, scene.view.apportion, scene.session
    if session.chain is None:
        return "There is no chain to plan for: ! tells what is wrong with the file."
    if not known(state).handles:
        return ("No part is soldered in that a plan could change. Tab, then Space on a key of the sheet lets it "
                "change, such as the gain of a block.")
    if not chosen(state):
        return "No key may change: Space lets that of the row, / those of its stage, * all."
    if not session.chain.has_targets and not here.favour:
        return "The file states no targets, and nothing is favoured: t sets targets, v favours a figure."
    if session.ledger is not None and session.ledger.unstable:
        return "Unstable as it is. Enter looks for values at which it is not, and that reach the targets."
    if not here.favour and session.ledger is not None and all(one.met for one in session.ledger.targets):
        return "All are met as the file is, so nothing has to change. v favours a figure: then the most is made of it."
    most = f" The most is then made of {here.favour}." if here.favour else ""
    return ("Enter looks for values that reach the targets: few parts moved, and little, to values of the file's "
            f"series.{most} Nothing is edited before you accept it.")
