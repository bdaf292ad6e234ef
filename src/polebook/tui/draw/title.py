"""The title: the file, whether it is saved, the targets, and what there is to be warned of."""

from __future__ import annotations

from os.path import basename

from polebook.book.targets import Target
from polebook.report.look import cells
from polebook.session.state import stands
from polebook.tui.draw import against
from polebook.tui.draw.pen import ends
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span, line, width

_MISSED = "short"
_WORDS = {True: ("met", "good"), False: (_MISSED, "bad"), None: ("not judged", "warn")}
LEAST_NAME = 24


def title(scene: Scene, room: int) -> Line:
    """One line of at most `room` cells."""
    flags = _flags(scene)
    name = scene.pen.text(basename(scene.session.path) or scene.session.path)
    left = room - 3 - sum(len(text) + 2 for text, _ in flags)
    told = _told(scene, left - 3 - min(cells(name), LEAST_NAME))
    fits = max(left - width(told) - 2, 1)
    begin: list[Span] = [Span(" "), Span(scene.pen.name(name, fits), "head")]
    if scene.state.unsaved:
        begin.append(Span(" *", "warn"))
    for text, style in flags:
        begin += [Span("  "), Span(text, style)]
    return ends(tuple(begin), (*told, Span(" ")), room)


def _flags(scene: Scene) -> list[tuple[str, str]]:
    session = scene.session
    flags = []
    if not session.exists:
        flags.append(("new", "warn"))
    if session.read_only or session.held:
        flags.append(("read-only", "warn"))
    theirs = scene.state.care.theirs
    if theirs is not None:
        flags.append(("gone from disk" if theirs.identity is None else "changed on disk", "bad"))
    if scene.state.care.taken and scene.state.unsaved:
        flags.append(("recovered", "warn"))
    if scene.state.care.unkept:
        flags.append((scene.pen.text(f"no recovery: {scene.state.care.unkept}"), "bad"))
    if stands(session):
        flags.append((scene.pen.text(against.flag(session)), "moved"))
    return flags


def _told(scene: Scene, room: int) -> Line:
    """Targets and counts within `room` cells: first all, then those met as a number, then the counts alone."""
    count = _counts(scene)
    judged = [] if scene.stale or scene.ledger is None else scene.ledger.targets
    each = [_target(target) for target in judged]
    missed = [_target(target) for target in judged if target.met is not True]
    met = len(judged) - len(missed)
    few = [*missed, line(Span(f"{met} met" if missed else f"all {met} met", "good"))] if met else missed
    short = sum(target.met is False for target in judged)
    least = [line(Span(f"{short} {_MISSED}", "bad"))] if short else few[-1:]
    for told, gap in ((each, 3), (each, 2), (few, 3), (few, 2), (least, 2), ([], 2)):
        parts = [*told, *count]
        joined = tuple(span for number, part in enumerate(parts)
                       for span in ((Span(" " * gap), *part) if number else part))
        if width(joined) <= room:
            return joined
    return ()


def _target(target: Target) -> Line:
    word, style = _WORDS[target.met]
    if target.name == "gain" and target.met is False and (target.got or 0.0) > target.want:
        word = "over"
    return line(f"{target.name} ", Span(word, style))


def _counts(scene: Scene) -> list[Line]:
    if not scene.session.exists and not scene.session.history.text:
        return []
    if scene.problems:
        faults = len(scene.problems)
        return [line(Span(f"{faults} fault{'s' if faults > 1 else ''}", "bad"))]
    if scene.ledger is None:
        return []
    counts = []
    if scene.ledger.unstable:
        counts.append(line(Span("unstable", "bad")))
    cautions = len(scene.ledger.cautions)
    if cautions:
        counts.append(line(Span(f"{cautions} caution{'s' if cautions > 1 else ''}", "warn")))
    return counts
