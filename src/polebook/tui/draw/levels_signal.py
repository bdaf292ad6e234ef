"""Second bank of the levels page: noise floor, signal, headroom and clip level from node to node as a diagram."""

from __future__ import annotations

from collections.abc import Sequence

from polebook.book.levels import Level, Levels, over_noise_db
from polebook.report import figures as show
from polebook.report import level_bar
from polebook.report.level_bar import Marks, Scale
from polebook.tui.draw import moved
from polebook.tui.draw.grid import Cell, Column, Row, grid
from polebook.tui.draw.levels_told import change_of, flowing, judged, piece, target, told
from polebook.tui.draw.pen import left, window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, padded, width

OF_NODE = ("noise_v", "smallest_v", "largest_v", "clip_v", "headroom_db")
OF_CHAIN = ("largest_source", "dynamic_range_db", "noise_margin_db", "full_power_hz")
MOST_TOLD = 3
LEAST_BAR = 24
MOST_NAME = 8
UNSTABLE = "the chain is unstable: it has no levels, and clips at whatever stage ends first"
UNKNOWN = "whether the chain is stable could not be told, so no levels are given"
_STYLES = {level_bar.NOISE: "dim", level_bar.UNDER: "warn", level_bar.SIGNAL: "bar", level_bar.HEADROOM: "dim",
           level_bar.CLIP: "head"}


def figures(scene: Scene) -> tuple[str, ...]:
    """The figures of the selected line's node, then those of the chain and the target for the swing."""
    if scene.figures.levels is None:
        return ()
    node = scene.nodes[scene.at]
    return (*(f"{node}.{key}" for key in OF_NODE), *(f"overall.{key}" for key in OF_CHAIN),
            *(("target.swing.got",) if target(scene, "swing") is not None else ()))


def rows_for_all(scene: Scene) -> int:
    """Lines that the bank takes with everything in sight."""
    levels = scene.figures.levels
    if levels is None:
        return 2
    more = levels.unknown or target(scene, "swing") is not None or scene.changes is not None
    return 1 + len(levels.rows) + 1 + (MOST_TOLD if more else 2)


def bank(scene: Scene, room: int, most: int, focus: str) -> list[Line]:
    """At most `most` lines of at most `room` cells; the selected line's node among them."""
    levels = scene.figures.levels
    if levels is None:
        text = UNSTABLE if scene.figures.unstable else UNKNOWN
        lines: list[Line] = [(Span(f" {part}", "bad"),) for part in scene.pen.wrapped(text, room - 2)]
        return lines[:most]
    spare = most - 2 - len(levels.rows)
    below = _told(scene, levels, room, (max(most - 5, 1), spare), focus) if most > 3 else []
    above = most - len(below) - 1
    diagram = _diagram(scene, levels, room, max(above, 1), focus)
    return [*diagram, _node(scene, levels, room, focus), *below][:most]


def _diagram(scene: Scene, levels: Levels, room: int, most: int, focus: str) -> list[Line]:
    """A bar a node on one scale of dB; its name at the left, clip level and headroom at the right."""
    listed = levels.rows
    size = max(most - 1, 1)
    names = [row.node for row in listed]
    at = names.index(scene.nodes[scene.at])
    first = window(len(listed), size, at)
    seen = range(first, min(first + size, len(listed)))
    marks = [level_bar.marks(scene.figures.noise_at(row.node), row.smallest, row.largest, row.clip) for row in listed]
    begin = _names(scene, listed, seen, at, room)
    side = width(begin[0])
    end = _ends(scene, levels, seen, at, focus, room - side - LEAST_BAR - 3)
    wide = room - side - max(map(width, end)) - 3
    scale = level_bar.scale(marks, wide)
    head = (Span(left("", 1) + (f"{scale.labels():{wide}}" if scale else " " * wide), "dim"), Span("  "))
    lines: list[Line] = [(*begin[0], *head, *end[0])]
    for number, one, other in zip(seen, begin[1:], end[1:], strict=True):
        lines.append((*one, Span(" "), *_bar(scene, scale, marks[number], wide), Span("  "), *other))
    return lines


def _bar(scene: Scene, scale: Scale | None, marks: Marks, wide: int) -> Line:
    """One bar in exactly `wide` cells; what goes past the clip level stands out."""
    text, spans, past = scale.bar(marks) if scale is not None else "", list[Span](), False
    for char in text:
        style = "bad" if past else _STYLES.get(char, "")
        past = past or char == level_bar.CLIP
        if spans and (spans[-1].style == style or char == " "):
            spans[-1] = Span(spans[-1].text + scene.pen.text(char), spans[-1].style)
        else:
            spans.append(Span(scene.pen.text(char), style))
    return padded(tuple(spans), wide)


def _names(scene: Scene, listed: Sequence[Level], seen: Sequence[int], at: int, room: int) -> list[Line]:
    """Node, and the line that it is the output of."""
    after = {node: scene.names[number] for number, node in reversed(list(enumerate(scene.nodes)))}
    body = [Row([Cell(scene.pen.sign("▸") if number == at else ""), Cell(listed[number].node),
                 Cell(scene.pen.cut(scene.pen.text(after.get(listed[number].node, "")), MOST_NAME), "dim")],
                "select" if number == at else "") for number in seen]
    columns = [Column(least=1, gap=0), Column("node", 4, right=False, gap=0), Column("after  dB", 9, right=False)]
    return grid(columns, body, room, scene.pen)


def _ends(scene: Scene, levels: Levels, seen: Sequence[int], at: int, focus: str, room: int) -> list[Line]:
    """Clip level, headroom, and what clips there."""
    changes, pen, body = scene.changes, scene.pen, []
    first = levels.first
    lines = {node: scene.names[number] for number, node in reversed(list(enumerate(scene.nodes)))}
    for number in seen:
        row = levels.rows[number]
        room_db, line = row.headroom_db, lines.get(row.node, "")
        own = row.stage == line
        clips = first is not None and levels.names[first.node] == row.node
        cells_ = [Cell(show.eng(row.clip) if row.clip is not None else show.NONE, "" if row.clip else "dim",
                       figure=f"{row.node}.clip_v")]
        if changes is not None:
            cells_.append(Cell(moved.text(changes.level(line, "clip_v"), "V"), "moved"))
        cells_.append(Cell(show.decibel(room_db), "bad" if room_db is not None and room_db < 0.0 else
                           "" if room_db is not None else "dim", figure=f"{row.node}.headroom_db"))
        if changes is not None:
            cells_.append(Cell(moved.text(changes.level(line, "headroom_db"), "dB"), "moved"))
        by = row.clips_by if own or not row.stage else f"as {row.stage}"
        cells_ += [Cell(by, "dim"), Cell(pen.sign("◂") if clips else "", "head")]
        body.append(Row(cells_, "select" if number == at else ""))
    change = [Column(least=moved.WIDTH, right=False)] if changes is not None else []
    columns = [Column("clip V", 6, gap=0), *change, Column("headroom", 8), *change,
               Column("by", 4, right=False, drop=1), Column(least=1)]
    return grid(columns, body, max(room, 20), pen, focus)


def _node(scene: Scene, levels: Levels, room: int, focus: str) -> Line:
    """The selected node's noise and signal, with the signs that they have in the diagram."""
    node = scene.nodes[scene.at]
    line = scene.names[scene.nodes.index(node)]
    row = next(one for one in levels.rows if one.node == node)
    noise = scene.figures.noise_at(node)

    def sign(char: str) -> Span:
        return Span(f"{scene.pen.text(char)} ", _STYLES[char])

    def pieces(with_changes: bool) -> list[Line]:
        changes = scene.changes if with_changes else None

        def change(key: str) -> str:
            return change_of(changes.level(line, key), "V") if changes is not None else ""

        signal = piece(scene, focus, f"{node}.smallest_v", "signal", show.eng(row.smallest, "V"), change("smallest_v"),
                       sign=sign(level_bar.SIGNAL))
        return [
            (Span(node, "select"), Span("  "), *piece(scene, focus, f"{node}.noise_v", "noise", _rms(noise),
                                                      change("noise_v"), sign=sign(level_bar.NOISE))),
            (*signal, *piece(scene, focus, f"{node}.largest_v", " to", show.eng(row.largest, "V"),
                             change("largest_v"))),
            *([(sign(level_bar.UNDER), Span("under the noise", "dim"))] if _under(noise, row) else []),
            (sign(level_bar.HEADROOM), Span("headroom", "dim")), (sign(level_bar.CLIP), Span("clip", "dim"))]

    lines = told(pieces, room, 1)
    return lines[0] if lines else ()


def _rms(noise: float | None) -> str:
    return show.NONE if noise is None else f"{show.eng(noise, 'V')} rms"


def _under(noise: float | None, row: Level) -> bool:
    """Whether the smallest signal at a node lies under its noise."""
    margin = over_noise_db(row.smallest, noise)
    return margin is not None and margin < 0.0


def _told(scene: Scene, levels: Levels, room: int, rows: tuple[int, int], focus: str) -> list[Line]:
    """The stage that clips first and what passes it, dynamic range, noise margin, full power, the target's swing.

    rows  how many lines there may be; how many of them no node has to give way to
    """
    of = scene.figures
    unit = "V" if scene.chain.source_kind == "voltage" else "A"
    noise = of.input_noise

    def pieces(with_changes: bool) -> list[Line]:
        changes = scene.changes if with_changes else None

        def change(key: str, of_unit: str) -> str:
            return change_of(changes.overall(key), of_unit) if changes is not None else ""

        found = [*_first(scene, levels, unit, focus, change("largest_source", unit))]
        range_db, margin = over_noise_db(levels.largest_source, noise), over_noise_db(
            of.chain.get("source.smallest"), noise)
        found += [
            piece(scene, focus, "overall.dynamic_range_db", "dynamic range", show.decibel(range_db, "dB"),
                  change("dynamic_range_db", "dB")),
            piece(scene, focus, "overall.noise_margin_db", "noise margin", show.decibel(margin, "dB"),
                  change("noise_margin_db", "dB"), "bad" if margin is not None and margin < 0.0 else ""),
            piece(scene, focus, "overall.full_power_hz", "full power to", show.eng(levels.full_power_hz, "Hz"),
                  change("full_power_hz", "Hz")),
            *judged(scene, focus, "swing", "swing", change("swing_v", "V"))]
        if levels.unknown:
            text = f"clip level of {' '.join(levels.unknown)} not wholly known"
            found.append((Span(scene.pen.cut(scene.pen.text(text), 50), "warn"),))
        return found

    need = len(flowing(pieces(False), room, MOST_TOLD))
    return told(pieces, room, min(max(need, min(rows[1], MOST_TOLD)), rows[0]))


def _first(scene: Scene, levels: Levels, unit: str, focus: str, change: str) -> list[Line]:
    """Who clips first, the largest source that passes, and whether the largest signal does."""
    first = levels.first
    if first is None or first.least is None:
        return [piece(scene, focus, "overall.largest_source", "no clip level is known; largest source", show.NONE)]
    largest = scene.chain.get("source.largest") if "source.largest" in scene.chain.given else None
    passes = levels.largest_source
    short = largest is not None and passes is not None and passes < largest
    name = scene.pen.cut(scene.pen.text(first.stage), 12)
    begin = (Span(name, "head"), Span(scene.pen.text(f" clips first, by {first.least.by}, at "), "dim"))
    passing = (*begin, *piece(scene, focus, "overall.largest_source", "", show.eng(passes, unit), change,
                                "bad" if short else ""), Span(" of source", "dim"))
    if largest is None:
        return [passing]
    return [passing, (Span(scene.pen.text(f"largest {show.eng(largest, unit)} "), "dim"),
                   Span("too much" if short else "passes", "bad" if short else "good"))]
