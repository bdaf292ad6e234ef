"""Page 1, the ledger: a line each for source, stages, load and total; a bank of columns for each end of the band."""

from __future__ import annotations

from collections.abc import Sequence
from math import pi

from polebook.book.account import BUDGET_DB
from polebook.book.build import decibels
from polebook.book.verdict_words import stated
from polebook.report import figures as show
from polebook.tui.draw import moved
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.pen import window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line

FRAME_ROWS = 2
"""Rows of the page beside the lines: the heading and the total."""
LEAST_BAR_DB = 0.005  # less is shown as 0.00


def figures(scene: Scene) -> tuple[str, ...]:
    """The figures in the selected line's row, in their order, by the names that `working` takes."""
    name, node = scene.names[scene.at], scene.own_node(scene.at)
    gain = f"{name}.{'gain_db' if scene.view.decibels else 'gain'}"
    ends = (f"{node}.lost_{scene.end}_db", f"{node}.allotted_{scene.end}_db") if node else ()
    pole = (f"{name}.k", *((f"{node}.pole_hz",) if node else ())) if scene.view.upper else ()
    return (gain, *pole, *ends, f"{name}.owns_{scene.end}")


def page(scene: Scene, room: int, rows: int, focus: str = "") -> list[Line]:
    """At most `rows` lines of at most `room` cells; the selected line among them."""
    columns = _columns(scene)
    count = len(scene.names)
    size = max(min(rows - FRAME_ROWS, count), 1)
    first = window(count, size, scene.at)
    most = max([BUDGET_DB, *(lost for lost in scene.account.lost.values() if lost is not None)])
    body = [_row(scene, at, most) for at in range(first, min(first + size, count))]
    lines = grid(columns, [*body, _total(scene)], room, scene.pen, focus)
    return lines[:rows]


def _columns(scene: Scene) -> list[Column]:
    """Those of the shown end. With a pin each figure has its change beside it, and what tells least makes room."""
    pinned = scene.changes is not None
    change = [Column(least=moved.WIDTH, right=False)] if pinned else []
    gain = ("gain dB" if scene.chain.source_kind == "voltage" else "gain dBΩ") if scene.view.decibels else "gain"
    hz = scene.account.edge_hz
    judged = "" if hz is None else f"at {stated(hz, 'Hz') if _target_given(scene) else show.eng(hz, 'Hz')}"
    tight = 1 if pinned else 2
    role = 10 if pinned else 4
    low = [Column("part", 6, right=False, drop=role, gap=2), Column("corner", 6, drop=role)]
    return [
        Column(least=1, right=False), Column("line", 6, right=False),
        Column(gain, 7, gap=tight), *change,
        *([Column("K", 6, gap=tight, drop=3), *([Column(least=moved.WIDTH, right=False, drop=3)] if pinned else [])]
          if scene.view.upper else []),
        Column("node", 4, right=False, gap=2, drop=1),
        *([Column("pole", 6), *change] if scene.view.upper else low),
        Column("lost", 6),
        Column(judged, max(len(judged), 5), right=False, drop=9, most=14), *change,
        Column("allot", 5, gap=tight, drop=8),
        Column("left", 6, drop=10 if pinned else 0),
        *([Column(least=moved.WIDTH, right=False, drop=10)] if pinned else []),
        Column("owns", 4, gap=tight), *([Column(least=3, right=False, drop=2)] if pinned else []),
        Column(least=1, right=False),
    ]


def _target_given(scene: Scene) -> bool:
    return f"target.{scene.end}" in scene.chain.given


def _row(scene: Scene, at: int, most: float) -> Row:
    line, pen, chosen = scene.lines[at], scene.pen, at == scene.at
    node = scene.own_node(at)
    lost, allotted = scene.account.lost.get(node), scene.account.allotted.get(node)
    share = scene.owns[at]
    end = scene.end
    cells = [
        Cell(pen.sign("▸") if chosen else ""), Cell(pen.cut(pen.text(line.name), 14)),
        *_gain(scene, at),
        *(_figure(scene, _ratio(line.k), f"{line.name}.k", ("line", line.name, "k"), "") if scene.view.upper else ()),
        Cell(node, "dim"),
        *(_pole(scene, node, line.name) if scene.view.upper else _low_role(scene, at)),
        *_barred(_figure(scene, _db(lost), f"{node}.lost_{end}_db", ("node", line.name, f"lost_{end}_db") if node else
                         None, "dB", "bad" if scene.changes and lost is not None and lost > (allotted or 0.0) else ""),
                 NOTHING if lost is None or lost < LEAST_BAR_DB else Cell(bar=lost / most, style="bar")),
        Cell(_db(allotted), figure=f"{node}.allotted_{end}_db"),
        *_left(scene, lost, allotted, line.name if node else ""),
        *_figure(scene, "" if share is None else _whole(share), f"{line.name}.owns_{end}",
                 ("line", line.name, f"owns_{end}"), "%"),
        Cell(pen.sign("◂") if at == scene.greatest else "", "head"),
    ]
    return Row(cells, "select" if chosen else "dim" if line.left_out else "")


def _total(scene: Scene) -> Row:
    of, account, end = scene.figures, scene.account, scene.end
    shown = _db(decibels(of.solution.gain)) if scene.view.decibels else _plain_gain(scene, of.solution.gain, False)
    gain = ("overall", "", "gain_db") if scene.view.decibels else None  # a change of the whole is told in dB alone
    left = account.left_db
    edge = _figure(scene, _eng(scene.edge_hz), "", ("overall", "", f"{end}_edge_hz"), "Hz")
    return Row([
        NOTHING, Cell("total"), *_figure(scene, shown, "", gain, "dB"),
        *([NOTHING] * len(_figure(scene, "", "", None, "")) if scene.view.upper else ()),
        NOTHING,
        *(edge if scene.view.upper else (Cell("edge", "dim"), edge[0])),
        *_barred(_figure(scene, _db(account.total_db), "", ("overall", "", f"lost_{end}_db"), "dB"), NOTHING),
        Cell(_db(BUDGET_DB) if account.total_db is not None else ""),
        *_left(scene, account.total_db, None if left is None else BUDGET_DB, None),
        *_figure(scene, "100" if scene.owns_parts else "", "", None, "%"),
        Cell("%" if scene.owns_parts else ""),
    ], "head")


def _figure(scene: Scene, text: str, figure: str, change: tuple[str, str, str] | None, unit: str,
            style: str = "") -> Sequence[Cell]:
    """A figure, and its change beside it where something is pinned."""
    cell = Cell(text, style, figure=figure)
    if scene.changes is None:
        return (cell,)
    return (cell, Cell(_change(scene, change, unit), "moved"))


def _barred(figure: Sequence[Cell], bar: Cell) -> Sequence[Cell]:
    """A figure, its bar, and its change."""
    return (figure[0], bar, *figure[1:])


def _change(scene: Scene, asked: tuple[str, str, str] | None, unit: str) -> str:
    changes = scene.changes
    if asked is None or changes is None:
        return ""
    group, name, figure = asked
    if group == "overall":
        return moved.text(changes.overall(figure), unit)
    return moved.text((changes.line if group == "line" else changes.node)(name, figure), unit)


def _gain(scene: Scene, at: int) -> Sequence[Cell]:
    line = scene.lines[at]
    if scene.view.decibels:
        return _figure(scene, _db(decibels(line.gain)), f"{line.name}.gain_db", ("line", line.name, "gain_db"), "dB")
    return _figure(scene, _plain_gain(scene, line.gain, at > 0), f"{line.name}.gain", ("line", line.name, "gain"), "")


def _plain_gain(scene: Scene, gain: float, stage: bool) -> str:
    """V/V; V/A as ohms."""
    if stage or scene.chain.source_kind == "voltage":
        return show.ratio(gain)
    return scene.pen.text(show.eng(gain, "Ω"))


def _pole(scene: Scene, node: str, line: str) -> Sequence[Cell]:
    site = scene.sites.get(node) if node else None
    return _figure(scene, "" if site is None else _eng(site.pole_hz), f"{node}.pole_hz",
                   ("node", line, "pole_hz") if node else None, "Hz")


def _low_role(scene: Scene, at: int) -> Sequence[Cell]:
    """The line's part that owns most of the lower edge, and its corner."""
    parts = scene.figures.solution.circuit.layout.parts
    taus = scene.figures.solution.constants.by_part
    own = [k for k, tau in taus.items() if tau and parts[k].segment == at and parts[k].role == "low"]
    if not own:
        return NOTHING, NOTHING
    worst = max(own, key=lambda k: 1.0 / abs(taus[k] or 1.0))
    return Cell(scene.pen.text(parts[worst].name)), Cell(_eng(1.0 / (2 * pi * (taus[worst] or 1.0))))


def _left(scene: Scene, lost: float | None, allotted: float | None, line: str | None) -> Sequence[Cell]:
    """What is left of what was allotted; line None: of the whole chain, "" of a line without a node."""
    left = None if lost is None or allotted is None else allotted - lost
    asked = None if line == "" else ("overall", "", f"left_{scene.end}_db") if line is None else \
        ("node", line, f"left_{scene.end}_db")
    return _figure(scene, _db(left), "", asked, "dB", "bad" if left is not None and left < 0.0 else "")


def _db(value: float | None) -> str:
    return "" if value is None else show.decibel(value)


def _eng(value: float | None) -> str:
    return "" if value is None else show.eng(value)


def _ratio(value: float | None) -> str:
    return "" if value is None else show.ratio(value)


def _whole(share: float) -> str:
    return show.about(share).removesuffix(" %")
