"""The figures at the cursor: of the chain, and of every line as far as there is room."""

from __future__ import annotations

from math import atan2, degrees, isfinite, pi

from polebook.book.account import BUDGET_DB
from polebook.report import figures as show
from polebook.tui.draw import against, benches, curves
from polebook.tui.draw.curves import Here
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.pen import BLANK, Pen, window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, width

LEAST_TABLE = 4
FAINT = 1e-6  # of an admittance: a side that is not told
Piece = tuple[Span, ...]


def rows(scene: Scene, what: str, hz: float, room: int, most: int, table: int) -> list[Line]:
    """The chain's figures in a line, then all lines in a table of at most `table` rows, else in at most `most` in all.

    what  "gain", "delay", "input" or "output": which of the figures come first
    """
    at = curves.here(scene.figures, hz)
    first = _fitted(_chain(scene, what, at), room, 3)
    swept = [(Span(" "), *piece) for piece in benches.pieces(scene, at, size)] if what == "gain" else []
    swept = [scene.pen.fitted(line, room) for line in swept[:max(most - 1, table // 3)]]
    if table >= min(LEAST_TABLE, len(scene.names)) + 2:
        return [first, *swept, BLANK, *_table(scene, at, room, table - 2 - len(swept))]
    return [first, *swept, *_flowing(_short(scene, at), room, most - 1)][:most]


def _chain(scene: Scene, what: str, at: Here) -> list[Piece]:
    """Pieces about the whole chain, what the plot shows first."""
    pen = scene.pen
    frequency = (Span(f" {pen.sign('▴')} ", "select"), Span(show.eng(at.hz, "Hz", 4), "head"))
    gain: list[Piece] = [
        (Span("gain ", "dim"), Span(pen.text(size(scene, at.gain_db, True)))), *_pinned(scene, at),
        (Span("phase ", "dim"), Span(angle(pen, at.phase_deg))),
        (Span("lost ", "dim"), Span(pen.text(show.decibel(at.lost_db, "dB"))))]
    delay = [(Span("delay ", "dim"), Span(pen.text(show.eng(at.delay_s, "s"))))]
    if what in ("input", "output"):
        return [frequency, *_ohms(scene, what, at), *gain]
    return [frequency, *delay, *gain] if what == "delay" else [frequency, *gain, *delay]


def _pinned(scene: Scene, at: Here) -> list[Piece]:
    base = scene.session.baseline
    if base is None or base is scene.ledger:
        return []
    text = size(scene, curves.here(base, at.hz).gain_db, False)
    word = scene.pen.text(f"{against.short(scene.session)} ")
    return [(Span(word, "dim"), Span(scene.pen.text(text), "moved"))]


def _ohms(scene: Scene, what: str, at: Here) -> list[Piece]:
    """The impedance, its angle, and the resistance and capacitance or inductance in parallel that it looks like."""
    pen, line = scene.pen, port(scene, what)
    z = curves.ohms_here(scene.figures, at.hz, what == "output", line)
    whose = f" of {scene.names[line]}" if scene.view.plot.single else ""
    name = f"Z {'in' if what == 'input' else 'out'}{whose} "
    if not (isfinite(z.real) and isfinite(z.imag)):
        return [(Span(pen.text(name), "dim"), Span(pen.text("without bound")))]
    told = [(Span(pen.text(name), "dim"), Span(pen.text(show.eng(abs(z), "Ω")))),
            (Span(angle(pen, degrees(atan2(z.imag, z.real)))),)]
    if z == 0:
        return told[:1]
    y = 1.0 / z
    sides = [show.eng(1.0 / y.real, "Ω")] if abs(y.real) > FAINT * abs(y) else []
    if y.imag > FAINT * abs(y):
        sides.append(show.eng(y.imag / (2 * pi * at.hz), "F"))
    elif y.imag < -FAINT * abs(y):
        sides.append(show.eng(-1.0 / (2 * pi * at.hz * y.imag), "H"))
    return [*told, (Span("as ", "dim"), Span(pen.text(" ∥ ".join(sides))))]


def port(scene: Scene, what: str) -> int:
    """The line whose impedance is shown: of the chain, or the selected one where single lines are asked for."""
    last = len(scene.names) - 1
    if what == "output":
        return min(scene.at, last - 1) if scene.view.plot.single else last - 1
    return max(scene.at, 1) if scene.view.plot.single else 1


def _short(scene: Scene, at: Here) -> list[Piece]:
    """A piece a line: name, gain, phase, loss. The selected one first, with words; then what loses most."""
    lost = at.losses_db.tolist()
    order = sorted(range(len(lost)), key=lambda k: (k != scene.at, -lost[k] if isfinite(lost[k]) else 0.0))
    result: list[Piece] = []
    for k in order:
        name = scene.pen.cut(scene.pen.text(scene.names[k]), 12)
        own = k == scene.at
        told = (f" {size(scene, at.gains_db[k], own)} {angle(scene.pen, at.phases_deg[k])} "
                f"{'lost ' if own else ''}{show.decibel(lost[k])}")
        result.append((Span(name, "select" if k == scene.at else "head"), Span(scene.pen.text(told))))
    return result


def _flowing(pieces: list[Piece], room: int, most: int) -> list[Line]:
    """Pieces side by side in at most so many lines, each of them whole."""
    lines: list[list[Span]] = [[Span(" ")]]
    for piece in pieces:
        used = width(tuple(lines[-1]))
        if used > 1 and used + 3 + width(piece) > room:
            if len(lines) == most:
                break
            lines.append([Span(" ")])
            used = 1
        lines[-1] += [*([Span("   ")] if used > 1 else []), *piece]
    return [tuple(line) for line in lines]


def _fitted(pieces: list[Piece], room: int, gap: int) -> Line:
    """The pieces that there is room for."""
    spans: list[Span] = []
    for piece in pieces:
        if spans and width(tuple(spans)) + gap + width(piece) > room:
            break
        spans += [*([Span(" " * gap)] if spans else []), *piece]
    return tuple(spans)


def _table(scene: Scene, at: Here, room: int, most: int) -> list[Line]:
    """All lines, or those about the selected one."""
    count = len(scene.names)
    size_ = max(most - 1, 1)
    first = window(count, size_, scene.at)
    losses = at.losses_db.tolist()
    greatest = max((loss for loss in losses if isfinite(loss)), default=0.0)
    greatest = max(greatest, BUDGET_DB)  # next to nothing lost is next to no bar
    body = []
    for k in range(first, min(first + size_, count)):
        chosen, loss = k == scene.at, losses[k]
        bar = loss / greatest if isfinite(loss) and loss > 0 else None
        body.append(Row([
            Cell(scene.pen.sign("▸") if chosen else ""), Cell(scene.pen.cut(scene.pen.text(scene.names[k]), 16)),
            Cell(size(scene, at.gains_db[k], False)), Cell(angle(scene.pen, at.phases_deg[k])),
            Cell(show.eng(float(at.delays_s[k]), "s")), Cell(show.decibel(loss)),
            Cell(bar=bar, style="bar") if bar is not None else NOTHING,
        ], "select" if chosen else ""))
    columns = [Column(least=1, gap=0), Column("line", 6, right=False),
               Column("gain dB" if scene.view.decibels else "gain", 8, gap=2), Column("phase", 7, gap=2),
               Column("delay", 8, gap=2), Column("lost dB", 8, gap=2), Column("", 3, right=False, most=20)]
    return grid(columns, body, room, scene.pen)


def size(scene: Scene, db: float, unit: bool) -> str:
    """A gain in dB or as a plain ratio, with its unit where that is asked for."""
    volts = scene.chain.source_kind == "voltage"
    if not isfinite(db):
        return show.NONE
    if scene.view.decibels:
        return show.decibel(db, ("dB" if volts else "dBΩ") if unit else "")
    ratio = 10.0 ** (min(max(db, -6000.0), 6000.0) / 20.0)
    return show.ratio(ratio) if volts else show.eng(ratio, "Ω")


def angle(pen: Pen, deg: float) -> str:
    """A phase, as the terminal can have it."""
    return pen.text(f"{round(deg):d}°" if isfinite(deg) else show.NONE).rstrip()
