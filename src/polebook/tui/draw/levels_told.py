"""Figures of the levels page in running lines: each a piece of a word, a figure, its change, kept whole."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from polebook.book.compare import Change
from polebook.book.targets import Target
from polebook.report import figures as show
from polebook.tui.draw import moved
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, width

GAP = 3
JUDGED = {True: ("met", "good"), False: ("short", "bad"), None: ("not judged", "warn")}
Pieces = Callable[[bool], list[Line]]
"""Makes the pieces of a line, with changes against the baseline or without."""


def flowing(pieces: Sequence[Line], room: int, most: int) -> list[Line]:
    """Pieces side by side in at most so many lines of at most `room` cells, each of them whole."""
    return _laid(pieces, room, most)[0]


def told(make: Pieces, room: int, most: int) -> list[Line]:
    """Pieces, the first ones with their changes, as many as leave room for all the pieces."""
    moved_, plain = make(True), make(False)
    for kept in range(len(moved_), 0, -1):
        lines, whole = _laid([*moved_[:kept], *plain[kept:]], room, most)
        if whole:
            return lines
    return flowing(plain, room, most)


def _laid(pieces: Sequence[Line], room: int, most: int) -> tuple[list[Line], bool]:
    """The lines, and whether every piece is in them."""
    lines: list[list[Span]] = [[Span(" ")]]
    for piece in pieces:
        used = width(tuple(lines[-1]))
        if used > 1 and used + GAP + width(piece) > room:
            if len(lines) >= most:
                return [tuple(line) for line in lines][:max(most, 0)], False
            lines.append([Span(" ")])
            used = 1
        lines[-1] += [*([Span(" " * GAP)] if used > 1 else []), *piece]
    return [tuple(line) for line in lines], True


def piece(scene: Scene, focus: str, name: str, word: str, text: str, change: str = "", style: str = "",
          sign: Span | None = None) -> Line:
    """A word and a figure; `name` is the one that `working` takes, "" for what has none."""
    pen = scene.pen
    spans = [sign] if sign is not None else []
    if word:
        spans.append(Span(f"{pen.text(word)} ", "dim"))
    spans.append(Span(pen.text(text), "focus" if name and name == focus else style))
    if change:
        spans.append(Span(f" {pen.text(change)}", "moved"))
    return tuple(spans)


def change_of(change: Change | None, unit: str, wanted: bool = True) -> str:
    """By how much a figure moved; "" where it did not, or is not `wanted`."""
    return moved.text(change, unit) if wanted else ""


def target(scene: Scene, name: str) -> Target | None:
    """A target that the file has."""
    return next((one for one in scene.figures.targets if one.name == name), None)


def judged(scene: Scene, focus: str, name: str, word: str, change: str) -> list[Line]:
    """A target beside what was got: [] where the file has none of that name."""
    found = target(scene, name)
    if found is None:
        return []
    unit = {"swing": "V", "current": "A"}[name]
    verdict, style = JUDGED[found.met]
    begin = piece(scene, focus, f"target.{name}.got", word, show.eng(found.got, unit), change,
                  "bad" if found.met is False else "")
    return [(*begin, Span(scene.pen.text(f" for {show.eng(found.want, unit)} "), "dim"), Span(verdict, style))]
