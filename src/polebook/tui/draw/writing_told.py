"""What a text that is being written comes to: its figures, and what moved since the page was opened; its faults."""

from __future__ import annotations

from collections.abc import Iterable

from polebook.book.compare import Change, changes
from polebook.book.ledger import Ledger
from polebook.problem import Problem
from polebook.report import figures as show
from polebook.report.look import cells
from polebook.tui.draw import moved
from polebook.tui.draw.pen import Pen, left, right
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, width

Figure = tuple[str, str, str]
"""Name, value, and by how much it moved."""

_WORDS = {True: ("met", "good"), False: ("short", "bad"), None: ("not judged", "warn")}
_GAP = 3


def figures(of: Ledger, begun: Ledger | None) -> list[Figure]:
    """Gain and edges, with what moved since the page was opened."""
    since = changes(begun, of) if begun is not None and begun is not of else None
    rows = (("gain", show.gain(of.solution.gain, _unit(of)), "gain_db", "dB"),
            ("lower", show.eng(of.lower_hz, "Hz"), "lower_edge_hz", "Hz"),
            ("upper", show.eng(of.upper_hz, "Hz"), "upper_edge_hz", "Hz"))
    return [(name, value, _moved(since.overall(key), unit) if since else "") for name, value, key, unit in rows]


def _moved(change: Change | None, unit: str) -> str:
    """By how much a figure moved, with its unit: "+0.31 dB", "-11 kHz"."""
    text = moved.text(change, unit)
    prefix = text[-1] if text[-1:].isalpha() else ""
    return f"{text.removesuffix(prefix)} {prefix}{unit}" if text else ""


def figure_line(scene: Scene, found: list[Figure], room: int) -> Line:
    """The figures in one line, as many as there is room for; faded where they are of another text."""
    spans: list[Span] = []
    for name, value, change in found:
        value = scene.pen.text(value)
        piece = [Span(" " * (_GAP if spans else 1)), Span(f"{name} ", "dim"), Span(value, "dim" if scene.stale else "")]
        piece += [Span(f" {scene.pen.text(change)}", "moved")] * bool(change)
        if width((*spans, *piece)) > room:
            break
        spans += piece
    return tuple(spans)


def table(scene: Scene, found: list[Figure], room: int) -> list[Line]:
    """The figures below each other, beside what the targets ask for."""
    pen, style, unit = scene.pen, "dim" if scene.stale else "", _unit(scene.figures)
    targets = {target.name: target for target in scene.figures.targets}
    rows = [*found, *((name, pen.text(show.target(name, target.got, unit)), "") for name, target in targets.items()
                      if name not in {one for one, _, _ in found})]
    names, values = max(cells(row[0]) for row in rows), max(cells(pen.text(row[1])) for row in rows)
    moves = max(cells(row[2]) for row in rows)
    wants = {name: pen.text(show.target(name, target.want, unit)) for name, target in targets.items()}
    size = max(map(cells, wants.values()), default=0)
    fits = names + values + moves + size + 20 <= room
    lines: list[Line] = []
    for name, value, change in rows:
        spans = [Span(f" {left(name, names)}  ", "dim"), Span(right(pen.text(value), values), style),
                 Span(f" {left(pen.text(change), moves)}", "moved")]
        if (target := targets.get(name)) is not None and not scene.stale:
            word, look = _WORDS[target.met]
            if name == "gain" and target.met is False and (target.got or 0.0) > target.want:
                word = "over"
            spans += [Span(f" for {right(wants[name], size)}" if fits else "", "dim"), Span(f"  {word}", look)]
        lines.append(tuple(spans))
    return lines


def _unit(of: Ledger) -> str:
    return "V/V" if of.chain.source_kind == "voltage" else "V/A"


def ordered(problems: Iterable[Problem]) -> list[Problem]:
    """Problems in the order of their lines, those without one first."""
    return sorted(problems, key=_line)


def nearest(problems: Iterable[Problem], line: int) -> Problem | None:
    """The problem of a line of the text, else the next one below it, else the first."""
    found = ordered(problems)
    return next((one for one in found if _line(one) >= line), found[0] if found else None)


def told(scene: Scene, problem: Problem, room: int, rows: int) -> list[Line]:
    """A problem whole: what is wrong, why, how to mend it; the reason is left out first where rows are short."""
    what = _hung(scene.pen, _where(problem), problem.what, room, "bad")
    why = _hung(scene.pen, "    why  ", problem.why, room, "")
    fix = _hung(scene.pen, "    fix  ", problem.fix, room, "")
    lines = [*what, *why, *fix]
    return lines if len(lines) <= rows else [*what[:max(rows - len(fix), 1)], *fix][:max(rows, 1)]


def listed(scene: Scene, problems: Iterable[Problem], chosen: Problem | None, room: int, rows: int) -> list[Line]:
    """Every problem in a line or two, the chosen one whole; those above it give way where rows are short."""
    parts: list[list[Line]] = []
    at = 0
    for problem in ordered(problems):
        if problem is chosen:
            at = len(parts)
            parts.append(told(scene, problem, room, 99))
        else:
            parts.append(_hung(scene.pen, _where(problem), problem.what, room, "dim")[:2])
    while at and sum(map(len, parts[:at + 1])) > rows:
        parts, at = parts[1:], at - 1
    return [line for part in parts for line in part][:max(rows, 0)]


def _line(problem: Problem) -> int:
    return problem.place.line if problem.place is not None else 0


def _where(problem: Problem) -> str:
    return f" line {_line(problem)}  " if _line(problem) else " "


def _hung(pen: Pen, lead: str, text: str, room: int, style: str) -> list[Line]:
    """A text behind a lead, its further lines under its own beginning."""
    parts = pen.wrapped(text, room - len(lead) - 1)
    return [(Span(lead if not number else " " * len(lead), "dim"), Span(part, style))
            for number, part in enumerate(parts)]
