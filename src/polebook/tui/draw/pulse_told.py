"""Below the step response: the height at the cursor, the figures, and what the rise is set against."""

from __future__ import annotations

from math import inf, sqrt

from polebook.book.ledger import Ledger
from polebook.report import figures as show
from polebook.tui.draw import against, nodes
from polebook.tui.draw import pulse_curves as curves
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.pulse_figures import (
    WORDS,
    Figure,
    chosen,
    listed,
    marks,
    moved,
    target_of,
    text_of,
    wanted,
    why,
)
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, width

GAP = 3
LEAST_SIDE = 38  # cells of a table beside another
LEAST_TABLE = 9
LEAST_SHARE = 0.005  # that rounds to something
FAR = 1000.0  # per cent that an estimate may be off and still be compared


def absent(scene: Scene, reason: str, room: int) -> list[Line]:
    """In the page's place: why there is no curve, and how there would be one."""
    upper = scene.view.upper
    what = "step response" if upper else "sag"
    lines: list[Line] = [(Span(f" {part}", "warn"),) for part in scene.pen.wrapped(f"No {what}: {reason}.", room - 2)]
    if lengthless(scene):
        fix = "Enter goes to it, among the targets: how long a pulse has to keep its height."
        lines += [(Span(f" {part}", "dim"),) for part in scene.pen.wrapped(fix, room - 2)]
    return lines


def lengthless(scene: Scene) -> bool:
    """Whether there is no sag as nobody has said how long a pulse is."""
    return not scene.view.upper and scene.chain.get("target.pulse") is None


def rows(scene: Scene, t: float, room: int, most: int, table: int, focus: str) -> list[Line]:
    """The height at the cursor in a line, then the figures in tables of at most `table` rows, else in at most `most`
    rows in all."""
    first = _fitted(_cursor(scene, t), room)
    if table >= LEAST_TABLE:
        return [first, BLANK, *_tables(scene, room, table - 2, focus)]
    pieces = [_piece(scene, one, focus) for one in listed(scene.figures, scene.view.upper)]
    estimates = [(Span(f"{word} ", "dim"), Span(scene.pen.text(text)), Span(f" {off}" if off else "", "dim"))
                 for word, text, off in _estimates(scene)]
    flowing = _flowing([*pieces, *estimates, *_more(scene)], room)
    droop = [] if scene.view.upper else [_fitted(_droop(scene), room)]
    return [first, *flowing, *droop][:most]


def _cursor(scene: Scene, t: float) -> list[Line]:
    """Time and height at the cursor, of what, and where the pinned response is then."""
    pen, of, upper = scene.pen, scene.figures, scene.view.upper
    at = curves.step_at if upper else curves.sag_at
    unit = "V/V" if scene.chain.source_kind == "voltage" else "V/A"
    gain = of.solution.gain
    size = show.gain(gain, unit) if scene.view.decibels else show.ratio(abs(gain)) if unit == "V/V" else \
        show.eng(abs(gain), "Ω")
    name = next((name for name, when, _ in marks(of, upper) if when == t), "")
    height = at(of, t)
    told: list[Line] = [(Span(f" {pen.sign('▴')} ", "select"), Span(pen.text(show.eng(t, "s", 4)), "head")),
                        (Span(f"{100.0 * height:.2f} %"),
                         Span(f" of {'the final value' if upper else 'its height'}", "dim"),
                         Span(pen.text(f", {size}") if upper else "", "dim"))]
    if not upper:
        told.append((Span("lost ", "dim"), Span(f"{100.0 * (1.0 - height):.2f} %")))
    base = scene.session.baseline
    if base is not None and base is not of and not why(base, upper):
        word = pen.text(f"{against.short(scene.session)} ")
        told.append((Span(word, "dim"), Span(f"{100.0 * at(base, t):.2f} %", "moved")))
    if name:
        told.append((Span(f"here: {name}", "select"),))
    return told


def _piece(scene: Scene, figure: Figure, focus: str) -> Line:
    """A figure, what was wanted of it and whether it is so, by how much it moved."""
    pen, of = scene.pen, scene.figures
    value, target = figure.get(of), target_of(of, figure)
    spans = [Span(pen.text(f"{figure.word.replace('within ', '±')} "), "dim"),
             Span(pen.text(text_of(figure, value)), "focus" if figure.name == focus else "")]
    if change := moved(scene, figure):
        spans += [Span(" "), Span(pen.text(change), "moved")]
    if target is not None:
        word, style = WORDS[target.met]
        spans += [Span(pen.text(f" for {wanted(figure, target)}"), "dim"), Span(f" {word}", style)]
    return tuple(spans)


def _more(scene: Scene) -> list[Line]:
    """What is no figure of the ledger: how far the response first goes the wrong way; how long the pulse is."""
    of, pen = scene.figures, scene.pen
    if not scene.view.upper:
        return [(Span("of a pulse of ", "dim"), Span(pen.text(show.eng(of.sag.pulse_s, "s"))))]
    dip = next((height for name, _, height in marks(of, True) if name == "dip"), None)
    return [] if dip is None else [(Span("undershoot ", "dim"), Span(f"{-100.0 * dip:.2f} %"))]


def _estimates(scene: Scene) -> list[tuple[str, str, str]]:
    """(by what, rise, how far off the exact one) of the rise by the edge, and by the nodes' poles."""
    if not scene.view.upper:
        return []
    from polebook.book.pulse import rise_by_edge, rise_by_nodes  # deferred with the step response

    of = scene.figures
    rise, found = of.pulse.rise_time_s, []
    for word, value in (("0.35/edge", rise_by_edge(of.upper_hz)), ("by nodes", rise_by_nodes(of.sites))):
        if value is not None:
            off = 100.0 * (value / rise - 1.0) if rise else inf
            found.append((word, show.eng(value, "s"), f"{round(off):+d} %" if abs(off) < FAR else ""))
    return found


def _nodes(of: Ledger) -> list[tuple[str, float, float, float]]:
    """(name, pole in Hz, rise in s, share of the sum of the squares) of every site with a pole, the slowest first."""
    from polebook.book.pulse import RISE  # deferred with the step response

    found = [(site.name, site.pole_hz, RISE / site.pole_hz) for site in of.sites if site.pole_hz]
    total = sum(rise * rise for _, _, rise in found)
    return sorted(((*one, one[2] * one[2] / total) for one in found), key=lambda one: -one[3])


def _droop(scene: Scene) -> list[Line]:
    """The parts that the pulse falls by at first, the fastest first."""
    pen, parts = scene.pen, scene.figures.solution.circuit.layout.parts
    told: list[Line] = []
    for index, _, share in nodes.ranked(scene):
        name = pen.text(f"{parts[index].stage}.{parts[index].name}")
        lead = "" if told else " at first it falls by "
        told.append((Span(f"{lead}{name} ", "dim"), Span(show.about(share))))
    return told


def _tables(scene: Scene, room: int, most: int, focus: str) -> list[Line]:
    """The figures, and beside them what they are set against; or one over the other where the room is narrow."""
    left = _figure_table(scene, room, focus)
    size = max([LEAST_SIDE, *map(width, left)])
    own = _node_table if scene.view.upper else _droop_table
    if room - size - GAP < LEAST_SIDE:
        right = own(scene, room, most - len(left) - 1)
        return [*left, BLANK, *right][:most]
    right = own(scene, room - size - GAP, most)
    count = max(len(left), len(right))
    left += [BLANK] * (count - len(left))
    right += [BLANK] * (count - len(right))
    return [(*scene.pen.fitted(a, size), Span(" " * GAP), *b) for a, b in zip(left, right, strict=True)][:most]


def _figure_table(scene: Scene, room: int, focus: str) -> list[Line]:
    of, upper = scene.figures, scene.view.upper
    lit, body = scene.view.focus == "page", []
    for number, one in enumerate(listed(of, upper)):
        target = target_of(of, one)
        word, style = WORDS[target.met] if target is not None else ("", "")
        at = lit and number == chosen(scene)
        body.append(Row([
            Cell(scene.pen.sign("▸") if at else ""), Cell(one.word), Cell(text_of(one, one.get(of)), figure=one.name),
            Cell(moved(scene, one), "moved"), Cell("" if target is None else f"for {wanted(one, target)}", "dim"),
            Cell(word, style),
        ], "select" if at else ""))
    for span in _more(scene):
        body.append(Row([NOTHING, Cell(span[0].text.strip()), Cell(span[1].text), NOTHING, NOTHING, NOTHING]))
    body += [Row([NOTHING, Cell(word), Cell(text), NOTHING, Cell(off), NOTHING], "dim")
             for word, text, off in _estimates(scene)]
    title = "step response" if upper else "pulse"
    columns = [Column(least=1, gap=0), Column(title, 13, right=False), Column("", 8, gap=2), Column("", 0, drop=2),
               Column("", 0, right=False, drop=1), Column("", 0, right=False)]
    return grid(columns, body, room, scene.pen, focus)


def _node_table(scene: Scene, room: int, most: int) -> list[Line]:
    """The rise that each node's pole would have alone, and its share of the sum of the squares."""
    found = _nodes(scene.figures)
    if not found or most < 3:
        return []
    rest = found[max(most - 2, 1):] if len(found) > most - 1 else []
    shown = found[:len(found) - len(rest)]
    body = [Row([Cell(name), Cell(show.eng(pole)), Cell(show.eng(rise)), Cell(f"{100 * share:.0f}"),
                 Cell(bar=share / found[0][3], style="bar") if share >= LEAST_SHARE else NOTHING])
            for name, pole, rise, share in shown]
    if rest:
        body.append(Row([Cell(f"{len(rest)} more"), NOTHING, Cell(show.eng(sqrt(sum(one[2]**2 for one in rest)))),
                         Cell(f"{100 * sum(one[3] for one in rest):.0f}"), NOTHING], "dim"))
    columns = [Column("rise by nodes", 9, right=False, gap=0), Column("pole Hz", 7, drop=1), Column("alone s", 7),
               Column("%", 3), Column("", 3, right=False, most=12)]
    return grid(columns, body, room, scene.pen)


def _droop_table(scene: Scene, room: int, most: int) -> list[Line]:
    """The parts that a pulse falls by, with their time constants."""
    return nodes.constants(scene, room, most, "") if nodes.ranked(scene) else []


def _fitted(pieces: list[Line], room: int) -> Line:
    """The pieces that there is room for."""
    spans: list[Span] = []
    for piece in pieces:
        if spans and width(tuple(spans)) + GAP + width(piece) > room:
            break
        spans += [*([Span(" " * GAP)] if spans else []), *piece]
    return tuple(spans)


def _flowing(pieces: list[Line], room: int) -> list[Line]:
    """Pieces side by side in as many lines as they take, each of them whole."""
    lines: list[list[Span]] = [[Span(" ")]]
    for piece in pieces:
        used = width(tuple(lines[-1]))
        if used > 1 and used + GAP + width(piece) > room:
            lines.append([Span(" ")])
            used = 1
        lines[-1] += [*([Span(" " * GAP)] if used > 1 else []), *piece]
    return [tuple(line) for line in lines]
