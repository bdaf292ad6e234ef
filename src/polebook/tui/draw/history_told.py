"""Below the list of the history page: figures of the chosen row then against now, and what changed by meaning."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from polebook.book.compare import Change, Moves, Way, changes
from polebook.report import figures as show
from polebook.session.baselines import SincePost, got, met
from polebook.tui.draw import moved
from polebook.tui.draw.grid import Cell, Column, grid
from polebook.tui.draw.grid import Row as Cells
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.histories import NOW, Row, Then, then_of
from polebook.tui.lines import Line, Span, width

LEAST = 5  # rows below the list: what it is, the heading, gain and edges
SIDE = 24  # cells of the changes beside the figures, at the least
GAP = 3
_EDGES = (("gain", "gain_db", "dB"), ("lower", "lower_edge_hz", "Hz"), ("upper", "upper_edge_hz", "Hz"),
          ("peaking", "peaking_db", "dB"))
_WAYS: Mapping[str, tuple[Way, str]] = {"noise": ("ratio", "V/√Hz"), "swing": ("ratio", "V"), "current": ("ratio", "A"),
                                        "rise": ("ratio", "s"), "overshoot": ("points", ""), "sag": ("points", ""),
                                        "yield": ("points", "")}
_MET = {True: ("met", "good"), False: ("short", "bad")}
PER_CENT = frozenset({"overshoot", "sag", "yield"})


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure then and now, as it is shown; by: from then to now; then_met, now_met: of its target, None without."""

    word: str
    then: str
    now: str
    by: str
    then_met: bool | None
    now_met: bool | None


def told(scene: Scene, row: Row, room: int, rows: int) -> list[Line]:
    """At most `rows` lines about the chosen row."""
    if row.key == NOW:
        return _now(scene, room)[:rows]
    then = then_of(scene.state, row)
    lines = [_head(scene, row, room)]
    if row.post is None and then is None:
        return [*lines, (Span(scene.pen.text(" solving it …"), "dim"),)][:rows]
    if then is not None and then.ledger is None:
        text = f"no figures: {then.problem.what}; {then.problem.why}" if then.problem is not None else "no figures"
        return [*lines, *_wrapped(scene, text, room, "bad")][:rows]
    changed = () if then is None else then.changes
    if scene.view.past.spread and then is not None:
        return [*lines, *_changes(scene, changed, room, rows - 1)]
    table = _table(scene, found_of(scene, row, then), room)[:rows - 1]
    side = room - max(map(width, table), default=0) - GAP
    if side < SIDE:
        return [*lines, *table][:rows]
    beside = _held(scene, row, side) if then is None else _changes(scene, changed, side, rows - 1)
    return [*lines, *_beside(scene, table, beside[:rows - 1], room - side)]


def brief(scene: Scene, row: Row, room: int) -> Line:
    """The chosen row in one line: what gain and edges were, and by how much they have moved."""
    then = then_of(scene.state, row)
    begin: Line = (Span(scene.pen.text(f" {row.name}"), "head"),)
    if row.key == NOW:
        return begin
    for one in found_of(scene, row, then)[:3]:
        piece: Line = (Span("  "), Span(f"{one.word} ", "dim"), Span(scene.pen.text(one.then)),
                       *([Span(f" {one.by}", "moved")] if one.by else []))
        if width(begin) + width(piece) > room:
            break
        begin = (*begin, *piece)
    return begin


def found_of(scene: Scene, row: Row, then: Then | None) -> list[Figure]:
    """Gain, edges, peaking where it is wanted or moved, and the targets beyond them that then or now has."""
    of = scene.figures
    unit = "V/V" if of.chain.source_kind == "voltage" else "V/A"
    before = then.ledger if then is not None else None
    since: Moves | None = SincePost(of, row.post) if row.post is not None else \
        changes(before, of) if before is not None else None
    if since is None:
        return []
    now = {target.name: target for target in of.targets}
    old = {target.name: target for target in before.targets} if before is not None else {}
    targets = row.post.figures["targets"] if row.post is not None else old

    def judged(name: str) -> tuple[bool | None, bool | None]:
        was = met(row.post, name) if row.post is not None else old[name].met if name in old else None
        return was, now[name].met if name in now else None

    found = []
    for name, key, in_unit in _EDGES:
        change = since.overall(key)
        if change is None or (name == "peaking" and name not in now and not moved.text(change)):
            continue
        found.append(_figure(name, change, in_unit, unit, judged(name)))
    for name, (way, in_unit) in _WAYS.items():
        if name not in now and name not in targets:
            continue
        was = _posted(row, name) if row.post is not None else old[name].got if name in old else None
        change = Change(was, now[name].got if name in now else None, way)
        found.append(_figure(name, change, in_unit, unit, judged(name)))
    return found


def _posted(row: Row, name: str) -> float | None:
    """A post's figure of a target, in the target's own unit."""
    value = got(row.post, name) if row.post is not None else None
    return value / 100.0 if value is not None and name in PER_CENT else value


def _figure(name: str, change: Change, unit: str, gain_unit: str, judged: tuple[bool | None, bool | None]) -> Figure:
    """As it is shown; gain and peaking come in dB."""
    if unit == "dB":
        noun = "dBΩ" if name == "gain" and gain_unit != "V/V" else "dB"
        before, after = show.decibel(change.before, noun), show.decibel(change.after, noun)
    else:
        before, after = (show.target(name, value, gain_unit) for value in (change.before, change.after))
    return Figure(name, before, after, moved.text(change, unit), *judged)


def _table(scene: Scene, found: list[Figure], room: int) -> list[Line]:
    """Figures below each other."""
    body = [Cells([Cell(one.word), Cell(one.then), _met(one.then_met), Cell(one.now), _met(one.now_met),
                   Cell(one.by, "moved")]) for one in found]
    columns = [Column("", 7, right=False, gap=1), Column("then", 9), Column("", 5, right=False), Column("now", 9),
               Column("", 5, right=False), Column("by", 5)]
    return grid(columns, body, room, scene.pen)


def _met(of: bool | None) -> Cell:
    return Cell() if of is None else Cell(*_MET[of])


def _head(scene: Scene, row: Row, room: int) -> Line:
    """What the row is, its text whole as far as it goes."""
    pen = scene.pen
    text = " ".join(row.text.split())
    begin = f" {row.full if row.post is not None else f'{row.name} of {row.day}'}"
    line: Line = (Span(pen.text(begin), "head"),)
    rest = room - width(line) - 3
    return (*line, Span(pen.text(": ") + pen.cut(pen.text(text), rest))) if text and rest > 8 else line


def _held(scene: Scene, row: Row, room: int) -> list[Line]:
    """What a post does not hold, and who has it."""
    holders = [name for name in row.same if name != NOW and not name.startswith("post ")]
    text = "A post holds targets, lines and account, no curves and no values. " + (
        f"{holders[0]} has the same chain: choose it for those." if holders else
        "It is the chain that stands here." if NOW in row.same else "No revision known here has its chain.")
    told = _wrapped(scene, text, room, "dim")
    if row.post is not None:
        told += [(Span(scene.pen.text(f" by polebook {row.post.version}"), "dim"),)]
    return told


def _changes(scene: Scene, changed: tuple[str, ...], room: int, rows: int) -> list[Line]:
    """What changed from then to now, one after the other; how many more there are where they do not fit."""
    if not changed:
        return _wrapped(scene, "nothing changed by meaning since", room, "dim")
    lines: list[Line] = [(Span(" changed since", "dim"),)]
    for number, text in enumerate(changed):
        parts = scene.pen.wrapped(text, room - 3, "  ")
        more = len(changed) - number
        if len(lines) + len(parts) > rows - (more > 1) and lines[1:]:
            hint = "" if scene.view.past.spread else "; v"
            return [*lines, (Span(f" and {more} more{hint}", "dim"),)][:max(rows, 1)]
        lines += [(Span(f" {part}"),) for part in parts]
    return lines[:rows]


def _now(scene: Scene, room: int) -> list[Line]:
    """What the page is for, where the first row is chosen."""
    text = "Choose a post or a revision to see its figures against those of now; Enter makes it the baseline of " \
           "every page. P posts the saved file with a message."
    return _wrapped(scene, text, room, "dim")


def _wrapped(scene: Scene, text: str, room: int, style: str) -> list[Line]:
    return [(Span(f" {part}", style),) for part in scene.pen.wrapped(text, room - 2)]


def _beside(scene: Scene, table: list[Line], other: list[Line], at: int) -> list[Line]:
    """The table, and what else is told from cell `at` on."""
    tall = max(len(table), len(other))
    table, other = table + [BLANK] * (tall - len(table)), other + [BLANK] * (tall - len(other))
    return [(*scene.pen.fitted(one, at), *more) for one, more in zip(table, other, strict=True)]


