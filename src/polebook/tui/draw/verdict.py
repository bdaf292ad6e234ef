"""The verdict, and in its place what is wrong with a file that has no ledger."""

from __future__ import annotations

import re
from dataclasses import replace
from os.path import basename

from polebook.problem import Problem, render
from polebook.tui.draw.pen import NO_BREAK
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span

_REASON = re.compile(r" {4}(?:why|fix) {2}")
_EXCERPT = re.compile(r" *\d* \| ")
_SENTENCE = re.compile(r"(?<=\.) (?=[A-Zn])")
_UNIT = re.compile(r"(?<=\(K) (?=-?\d)|(?<=\d) (?=(?:[fpnumkMGT]?(?:Hz|F|H|Ω|V|A|s|S|W)|dBΩ?)\b|%)")


def verdict(scene: Scene, room: int, rows: int = 99) -> list[Line]:
    """The verdict in lines of at most `room` cells; no figure is parted from its unit.

    Where it takes more than `rows` lines, sentences are left out from its end.
    """
    if scene.stale or scene.ledger is None:
        return problems(scene, room)[:rows]
    sentences = _SENTENCE.split(_UNIT.sub(NO_BREAK, scene.ledger.verdict))
    parts: list[str] = []
    for count in range(len(sentences), 0, -1):
        parts = scene.pen.wrapped(" ".join(sentences[:count]), room - 2)
        if len(parts) <= rows:
            break
    if rows and len(parts) > rows:
        parts = [*parts[:rows - 1], scene.pen.cut(" ".join(parts[rows - 1:]), room - 2)]
    return [(Span(f" {part}"),) for part in parts[:rows]]


def problems(scene: Scene, room: int) -> list[Line]:
    """Each problem by its line of the file: what is wrong, then how to mend it."""
    lines: list[Line] = []
    for problem in scene.problems:
        lines += _one(scene, problem, room)
    return lines


def _one(scene: Scene, problem: Problem, room: int) -> list[Line]:
    place = problem.place
    where = f"line {place.line}" if place is not None and place.line else ""
    lead = f" {where:<8} " if where else " "
    pad = " " * len(lead)
    told = scene.pen.wrapped(problem.what, room - len(lead) - 1)
    lines: list[Line] = [(Span(lead if number == 0 else pad, "dim"), Span(part, "bad"))
                         for number, part in enumerate(told)]
    return lines + [(Span(pad), Span(part, "dim")) for part in scene.pen.wrapped(problem.fix, room - len(lead) - 1)]


def faults(scene: Scene, room: int) -> list[Line]:
    """Every problem whole, with the file's own line under it: what a page shows that has no ledger to show."""
    lines: list[Line] = []
    for problem in scene.problems:
        place = problem.place
        near = replace(problem, place=replace(place, file=basename(place.file))) if place is not None else problem
        for number, text in enumerate(render(near, scene.session.history.text).split("\n")):
            found = _REASON.match(text)
            hang = len(found[0]) if found else 4
            parts = [scene.pen.cut(scene.pen.text(text), room - 2)] if _EXCERPT.match(text) else \
                scene.pen.wrapped(text.strip(), room - 2 - (hang if found else 0), "" if found else " " * hang)
            lead = text[:hang] if found else ""
            for part in parts:
                shown = part.removeprefix(lead.strip()).lstrip() if found else part
                lines.append((Span(f" {lead}{shown}", "" if number else "bad"),))
                lead = " " * len(lead)
        lines.append(())
    return lines[:-1]
