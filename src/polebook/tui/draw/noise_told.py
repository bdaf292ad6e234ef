"""Beside and below the density: the figures of the noise, who makes it, and what there is at the cursor."""

from __future__ import annotations

from math import sqrt

from polebook.book.ledger import Ledger
from polebook.report import figures as show
from polebook.tui.draw import against
from polebook.tui.draw import noise_curves as curves
from polebook.tui.draw.grid import NOTHING, Cell, Column, Row, grid
from polebook.tui.draw.noise_makers import (
    FIGURES,
    Figure,
    baseline,
    chosen,
    listed,
    moved,
    share_moved,
    text_of,
    unit_of,
    what,
    why,
)
from polebook.tui.draw.pen import window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, width

GAP = 3
WIDE = 46  # cells from which on the table tells what each maker is
NAME = 17
LEAST = 0.0005  # share that rounds to something
_WORDS = {True: ("met", "good"), False: ("short", "bad"), None: ("not judged", "warn")}


def absent(scene: Scene, reason: str, room: int) -> list[Line]:
    """In the page's place: why there is no noise to show."""
    lines: list[Line] = [(Span(f" {part}", "warn"),) for part in
                         scene.pen.wrapped(f"No noise is told: {reason}.", room - 2)]
    if scene.figures.noise is not None and scene.figures.noise.untold:
        lines += [(Span(f" {part}", "dim"),) for part in scene.pen.wrapped("Enter goes to its stage.", room - 2)]
    return lines


def figure_table(scene: Scene, room: int, focus: str) -> list[Line]:
    """The figures of the whole chain, a row each."""
    lit, body = scene.view.focus == "page", []
    for number, one in enumerate(FIGURES):
        at = lit and number == chosen(scene)
        word, style = _judged(scene, one)
        body.append(Row([Cell(scene.pen.sign("▸") if at else ""), Cell(one.word),
                         Cell(text_of(scene, one), figure=one.name), Cell(moved(scene, one), "moved"),
                         Cell(word, style)], "select" if at else ""))
    columns = [Column(least=1, gap=0), Column("", 12, right=False), Column("", 11), Column("", 0, drop=1),
               Column("", 0, right=False)]
    return grid(columns, body, room, scene.pen, focus)[1:]


def _judged(scene: Scene, figure: Figure) -> tuple[str, str]:
    """Whether a figure is as wanted, in a word and its style; nothing where nothing is wanted."""
    if figure is not FIGURES[0]:
        return "", ""
    target = next((one for one in scene.figures.targets if one.name == "noise"), None)
    return ("", "") if target is None else _WORDS[target.met]


def maker_table(scene: Scene, hz: float, room: int, rows: int, focus: str) -> list[Line]:
    """Who makes the noise at the reference frequency, the rows around the chosen one; and what each makes at hz."""
    if rows < 2:
        return []
    pen, found, here = scene.pen, listed(scene), curves.here(scene.figures, hz)
    at = chosen(scene) - len(FIGURES)
    first = window(len(found), rows - 1, max(at, 0))
    most = found[0].share if found else 0.0
    lit, wide, pinned = scene.view.focus == "page", room >= WIDE, baseline(scene) is not None
    body = []
    for number, one in enumerate(found[first:first + rows - 1], start=first):
        marked, mine = lit and number == at, one.stage == scene.names[scene.at]
        at_hz = float(here.parts[list(one.places)].sum()) / here.square if here is not None and here.square else 0.0
        body.append(Row([
            Cell(pen.sign("▸") if marked else ""),
            Cell(pen.cut(pen.text(one.name), NAME)),
            Cell(pen.cut(pen.text(what(scene, one)), 17) if wide else "", "dim"),
            Cell(_per_cent(one.share), figure=f"{one.name}.noise_share"),
            Cell(share_moved(scene, one), "moved") if pinned else NOTHING,
            Cell(bar=one.share / most, style="bar") if most and one.share >= LEAST else NOTHING,
            Cell(_per_cent(at_hz), "dim"),
        ], "select" if marked or mine else ""))
    title = show.eng(scene.figures.reference_hz, "Hz")
    columns = [Column(least=1, gap=0), Column(f"at {title}", 13, right=False),
               Column("", 0, right=False, drop=3, gap=1 if wide else 0), Column("%", 4),
               Column("", 4, drop=2) if pinned else Column("", 0, gap=0),
               Column("", 7 if wide else 3, right=False, drop=1, most=14), Column(f"{pen.sign('▴')} %", 4)]
    return grid(columns, body, room, pen, focus)[:rows]


def _per_cent(share: float) -> str:
    return f"{round(100.0 * share, 1) + 0.0:.1f}"


def lines(scene: Scene, hz: float, room: int, tall: bool) -> list[Line]:
    """Frequency and densities at the cursor, and over which band the totals are: two lines where there is room, else
    one; more where there is no total, with the reason."""
    pen, of = scene.pen, scene.figures
    told: list[Line] = [(Span(f" {pen.sign('▴')} ", "select"), Span(pen.text(show.eng(hz, "Hz", 4)), "head"))]
    if curves.here(of, hz) is None:
        return [(*told[0], Span("   beyond what a number can hold", "warn"))]
    output = scene.view.noise.what == "output"
    sides = [(Span(pen.text(_density(scene, of, hz, side))), Span(f" at the {'output' if side else 'input'}", "dim"))
             for side in (output, not output)]
    told.append(sides[0])
    base = baseline(scene)
    if base is not None and not why(base):
        word = pen.text(f"{against.short(scene.session)} ")
        told.append((Span(word, "dim"), Span(pen.text(_density(scene, base, hz, output)), "moved")))
    noise = of.noise
    if noise is not None and noise.output_rms is None:
        reason = pen.wrapped(f"no total: {noise.totals.why}", room - 2)
        return [_fitted([*told, sides[1]], room), *((Span(f" {part}", "warn"),) for part in reason)]
    if tall:
        return [_fitted([*told, sides[1]], room), (Span(" "), *_fitted(_band(scene), room - 1))]
    return [_fitted([*told, *_band(scene)[:1], sides[1]], room)]


def _density(scene: Scene, of: Ledger, hz: float, output: bool) -> str:
    found = curves.here(of, hz)
    if found is None:
        return show.NONE
    size = sqrt(found.square)
    return show.eng(size * abs(found.gain), "V/√Hz") if output else show.eng(size, unit_of(scene, "density"))


def _band(scene: Scene) -> list[Line]:
    """Over which band the totals are, and where the smallest signal lies."""
    pen, noise = scene.pen, scene.figures.noise
    if noise is None:
        return []
    low, high = noise.from_hz, noise.to_hz
    if high is None:
        text = f"from {show.eng(low, 'Hz')} upward" if low else "over all frequencies"
    else:
        text = f"from {show.eng(low, 'Hz')} to {show.eng(high, 'Hz')}" if low else f"up to {show.eng(high, 'Hz')}"
    told: list[Line] = [(Span("total ", "dim"), Span(pen.text(text)))]
    smallest, margin = scene.chain.get("source.smallest"), FIGURES[-1].get(scene.figures)
    if smallest and margin is not None:
        told.append((Span("the smallest signal, ", "dim"), Span(pen.text(show.eng(smallest, unit_of(scene, "source")))),
                     Span(f", lies {show.decibel(abs(margin), 'dB')} {'above' if margin >= 0 else 'below'} it", "dim")))
    return told


def _fitted(pieces: list[Line], room: int) -> Line:
    """The pieces that there is room for."""
    spans: list[Span] = []
    for piece in pieces:
        if spans and width(tuple(spans)) + GAP + width(piece) > room:
            break
        spans += [*([Span(" " * GAP)] if spans else []), *piece]
    return tuple(spans)
