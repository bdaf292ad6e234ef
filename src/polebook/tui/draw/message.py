"""The message line, with what moved against the pin, and the key line."""

from __future__ import annotations

from polebook import series
from polebook.book.compare import Moves
from polebook.book.workings.units import about
from polebook.chain.steps import series_of
from polebook.quantity import Refused, letter, parse
from polebook.report.figures import signed
from polebook.report.look import cells
from polebook.session.sheets import content_of
from polebook.session.state import KeyRow
from polebook.tui.draw import against as baseline
from polebook.tui.draw.focus import focused
from polebook.tui.draw.pen import Pen, ends
from polebook.tui.draw.scene import Scene
from polebook.tui.keys import Hint, words
from polebook.tui.lines import Line, Span, width

MOST_LINES = 3
LEAST_ABOUT = 34
_SECTIONS = {"bias": "bias", "rail": "rails", "target": "targets"}
_SERIES = {"resistance": "resistor", "capacitance": "capacitor", "inductance": "inductor"}


def message(scene: Scene, room: int) -> list[Line]:
    """One line, or up to three where what is wrong takes more."""
    field, pinned = scene.view.field, against(scene)
    if field is not None and field.refusal:
        return _lines(scene.pen, field.refusal, "bad", room)
    told = "" if field is not None else scene.view.message
    if scene.view.overlay is not None and not told:
        return [()]
    if told:
        lines = _lines(scene.pen, told, "bad" if scene.view.bad else "", room)
        if len(lines) > 1 or width(lines[0]) + width(pinned) + 3 > room:
            return lines
        begin = lines[0]
    else:
        space = room - width(pinned) - 3 * bool(pinned)
        begin = _figure(scene, space) if scene.view.focus == "page" and field is None else _key(scene, space)
    return [ends(begin, (*pinned, Span(" ")), room)] if pinned else [begin]


def _lines(pen: Pen, text: str, style: str, room: int) -> list[Line]:
    parts = pen.wrapped(text, room - 2)
    if len(parts) > MOST_LINES:
        parts = [*parts[:MOST_LINES - 1], pen.cut(" ".join(parts[MOST_LINES - 1:]), room - 2)]
    return [(Span(f" {part}", style),) for part in parts] or [()]


def _key(scene: Scene, room: int) -> Line:
    """What the focused key is, and what stepping it would give."""
    if not scene.keys:
        return ()
    row, pen = scene.keys[scene.key], scene.pen
    near = neighbours(scene, row)
    text = f"{row.key}: {row.about}"
    if row.default:
        text += f"; without it {row.default}"
    tail = f"   + {near[1]}  - {near[0]}" if near else ""
    left = room - 2 - cells(tail)
    shown = pen.cut(pen.text(text), left) if left >= min(cells(text), LEAST_ABOUT) else pen.cut(pen.text(row.key), left)
    return (Span(f" {shown}", "dim"), Span(tail))


def _figure(scene: Scene, room: int) -> Line:
    """What the focused figure is, by the name that its working goes by."""
    name = focused(scene)
    if not name:
        return ()
    owner, lever, key = name.partition(".leverage.")
    owner, key = (owner, f"leverage.{key}") if lever else (name.rpartition(".")[0], name.rpartition(".")[2])
    section = "parts" if "." in owner else "nodes" if owner in scene.sites else owner if owner == "overall" else "lines"
    also = {"parts": _SECTIONS.get(owner.partition(".")[0], ""), "nodes": "levels"}.get(section, "")
    told = scene.pen.text(f"{name}: {about(section, key) or about(also, key)}")
    return (Span(f" {scene.pen.clause(told, room - 2)}", "dim"),)


def neighbours(scene: Scene, row: KeyRow) -> tuple[str, str] | None:
    """The values of the series below and above that of a key; None where it is not stepped along one."""
    kind = _SERIES.get(row.dimension)
    if kind is None or not row.text or row.path.startswith("device."):
        return None
    try:
        value = parse(row.text, row.dimension)
        name = series_of(content_of(scene.session.history.text)[0], kind)
        return letter(series.down(value, name), row.dimension), letter(series.up(value, name), row.dimension)
    except (Refused, ValueError):
        return None


def against(scene: Scene) -> Line:
    """What gain and edges moved against the pinned figures; () where nothing is pinned."""
    changes = scene.changes
    if changes is None:
        return ()
    told = [text for text in (_moved(changes, *one) for one in (
        ("gain_db", "gain", "dB"), ("lower_edge_hz", "lower", "Hz"), ("upper_edge_hz", "upper", "Hz"))) if text]
    if not told:
        against = scene.session.against
        return (Span(scene.pen.text(f"as {'pinned' if against is None else against.name}"), "dim"),)
    return (Span(", ".join(told), "moved"), Span(scene.pen.text(f" against {baseline.name(scene.session)}"), "dim"))


def _moved(changes: Moves, figure: str, name: str, unit: str) -> str:
    change = changes.overall(figure)
    if change is None or not change.moved:
        return ""
    if change.before is None or change.after is None:
        return f"{name} {'gone' if change.after is None else 'new'}"
    text = signed(change.after - change.before, unit)
    if not text:
        return ""
    prefix = text[-1] if text[-1].isalpha() else ""
    return f"{name} {text.removesuffix(prefix)} {prefix}{unit}"


def keys(pen: Pen, hints: tuple[Hint, ...], room: int) -> Line:
    """As many hints as fit, the most useful first; the help keeps its place at the end."""
    sizes = [3 + cells(words(name, pen.plain)) + 1 + cells(words(word, pen.plain)) for name, word in hints]
    shown = len(hints)
    kept = hints[-1:] if hints and hints[-1][0] == "?" else ()
    while shown > len(kept) and sum(sizes[:shown]) + (sizes[-1] if kept and shown < len(hints) else 0) > room + 1:
        shown -= 1
    taken = hints[:shown] if shown == len(hints) else (*hints[:shown], *kept)
    spans: list[Span] = [Span(" ")]
    for number, (name, word) in enumerate(taken):
        spans += [Span("   " if number else ""), Span(words(name, pen.plain), "key"),
                  Span(f" {words(word, pen.plain)}", "dim")]
    return tuple(spans)
