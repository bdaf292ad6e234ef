"""The spread page before its first run: what it does, with which tolerances, how long it takes, the key that begins."""

from __future__ import annotations

from polebook.tui.draw.pen import BLANK
from polebook.tui.draw.scene import Scene
from polebook.tui.draw.spread_told import progress, running
from polebook.tui.lines import Line, Span
from polebook.tui.spreads import JUDGED, seconds

_SORTS = ("resistor", "capacitor", "inductor", "device", "beta", "matching", "supply")


def empty(scene: Scene, room: int, rows: int) -> list[Line]:
    """At most `rows` lines of at most `room` cells."""
    pen, spread = scene.pen, scene.view.spread
    busy = running(scene.state)
    begin: Line = (Span("  "), *progress(pen, scene.state), Span("   Esc stops it", "dim")) if busy else (
        Span("  Enter", "key"), Span(" begins: about "), Span(_time(seconds(scene.state)), "head"),
        Span(", in the background; Esc stops, what is done stays", "dim"))
    told = pen.wrapped(f"Will the built boards hold? {spread.builds:,} chains are drawn with the tolerances of the "
                       "file, each is solved, bias and all, and held against the targets.", room - 2)
    tail = [*_lines(scene, f"off by at most: {_tolerances(scene)}", room), *_lines(scene, _judged(scene), room)]
    asked = (Span("  * /", "key"), Span(" ten times as many, a tenth", "dim"), Span("   [ ]", "key"),
             Span(f" seed {spread.seed}: other draws", "dim"))
    lines = [*((Span(f" {text}"),) for text in told), BLANK, begin, asked, BLANK, *tail]
    return lines if len(lines) <= rows else [line for line in lines if line]


def _lines(scene: Scene, text: str, room: int) -> list[Line]:
    return [(Span(f" {line}", "dim"),) for line in scene.pen.wrapped(text, room - 2)]


def _tolerances(scene: Scene) -> str:
    """The tolerances of the file by sort, and how many stages have their own."""
    chain = scene.chain
    found = [f"{sort} {100.0 * share:.3g} %" for sort in _SORTS if (share := chain.numbers.get(f"tolerance.{sort}"))]
    own = sum(".tolerance." in path for path in chain.given)
    shape = "evenly spread" if chain.spread_shape == "uniform" else "normal, a third of that the deviation"
    return ", ".join([*found, *([f"{own} of their own"] if own else [])]) + f" ({shape})"


def _judged(scene: Scene) -> str:
    names = [name for name in JUDGED if f"target.{name}" in scene.chain.given]
    return f"judged: {', '.join(names)}" if names else "no target to judge by: there will be spreads but no yield"


def _time(seconds: float) -> str:
    """A guess, in round figures."""
    if seconds < 90.0:
        return f"{max(round(seconds, 0 if seconds >= 1 else 1), 0.1):g} s"
    return f"{round(seconds / 60.0):d} min"
