"""The head of a sheet: what a line is, what drives it and what it drives, its bias."""

from __future__ import annotations

from functools import lru_cache

from polebook.book.ledger import Ledger
from polebook.circuit.bias_solution import Operating, compared
from polebook.circuit.build import CURRENT_KEYS
from polebook.report import figures as show
from polebook.report.look import cells
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span

Piece = tuple[str, str]
APART = 0.2
_TABLES = {"target": ("targets", "what the chain must reach"), "supply": ("supply", "rails and temperature"),
           "tolerance": ("tolerances", "how far parts may be off"),
           "preferred": ("preferred series", "what + and - step along"), "file": ("the file", "its title and note")}
_ACROSS = {"bjt": "vce", "triode": "vak"}


def head(scene: Scene, room: int) -> Line:
    """One line of at most `room` cells; what there is no room for is left out from the end."""
    spans = [Span(" ")]
    used = 1
    for number, (text, style) in enumerate(pieces(scene)):
        gap = "  " if number else ""
        shown = scene.pen.text(text)
        if used + len(gap) + cells(shown) > room - 1:
            if number == 0:
                spans.append(Span(scene.pen.cut(shown, room - 2), style))
            break
        spans += [Span(gap), Span(shown, style)]
        used += len(gap) + cells(shown)
    return tuple(spans)


def pieces(scene: Scene) -> list[Piece]:
    """What the head tells, the most telling first, each with its style."""
    name = scene.sheet
    if name in _TABLES:
        words, about = _TABLES[name]
        return [(words, "head"), (about, "dim")]
    if name.startswith("device."):
        return _card(scene, name.removeprefix("device."))
    kind = next((row.text for row in scene.keys if row.key == "kind"), "")
    found: list[Piece] = [(name, "head"), *([(kind, "")] if kind else [])]
    if any(row.key == "left_out" and row.text == "true" for row in scene.keys):
        found.append(("left out", "warn"))
    if scene.ledger is None or scene.stale or scene.names[scene.at] != name:
        return found
    return [*found, *_place(scene), *_bias(scene)]


def _card(scene: Scene, name: str) -> list[Piece]:
    words = [row.text for row in scene.keys if row.key in ("family", "polarity") and row.text]
    found: list[Piece] = [(f"card {name}", "head"), (" ".join(words), "")]
    if scene.ledger is not None:
        users = [stage.name for stage in scene.chain.stages if name in (stage.device, stage.upper)]
        found.append((f"used by {' '.join(users)}" if users else "not used", "dim"))
    return found


def _place(scene: Scene) -> list[Piece]:
    """What drives the line, and what it drives."""
    at, lines = scene.at, scene.lines
    if lines[at].left_out:
        return []
    words = []
    ahead = next((line for line in reversed(lines[:at]) if not line.left_out), None)
    behind = next((line for line in lines[at + 1:] if not line.left_out), None)
    if ahead is not None and ahead.output_ohm is not None:
        words.append(f"driven by {show.eng(ahead.output_ohm, 'Ω')}")
    if behind is not None and behind.input_ohm is not None:
        words.append(f"into {show.eng(behind.input_ohm, 'Ω')}")
    if behind is None and lines[at].input_ohm is not None:
        words.append(f"takes {show.eng(lines[at].input_ohm, 'Ω')}")
    return [(", ".join(words), "")] if words else []


def _bias(scene: Scene) -> list[Piece]:
    """Current and voltage of the line's device; whether stated current and solved one are apart."""
    if not 0 < scene.at < len(scene.names) - 1:
        return []
    stage = scene.chain.stages[scene.at - 1]
    points = scene.figures.solution.circuit.points
    point = points.get(stage.name)
    if point is None:
        return []
    found: list[Piece] = []
    family = scene.chain.cards[stage.device].family if stage.device in scene.chain.cards else ""
    if point.current is not None:
        told = f"{CURRENT_KEYS.get(family, 'id')} {show.eng(point.current, 'A')} {point.origin or ''}".rstrip()
        solved = by_network(scene.figures).get(stage.name) if point.origin == "given" else None
        if solved is not None:
            told += f" ({show.eng(solved)} solved)"
        apart = solved is not None and point.current and abs(solved / point.current - 1.0) > APART
        found.append((f"{told} !" if apart else told, "warn" if apart else ""))
    if point.across is not None:
        found.append((f"{_ACROSS.get(family, 'vds')} {show.eng(point.across, 'V')}", ""))
    elif point.current is None and point.output_v is not None:
        found.append((f"out {show.eng(point.output_v, 'V')} d.c.", ""))
    upper = points.get(f"{stage.name}_upper")
    if upper is not None and upper.across is not None:
        found.append((f"upper {show.eng(upper.across, 'V')}", ""))
    return found


@lru_cache(maxsize=2)
def by_network(of: Ledger) -> dict[str, float]:
    """The current that the network would give each stage whose current is stated; costs a bias solution each."""
    circuit = of.solution.circuit
    points: dict[str, Operating] = compared(circuit.plan, of.chain.get, dict(circuit.points))
    return {name: float(point.solved_current) for name, point in points.items() if point.solved_current is not None}
