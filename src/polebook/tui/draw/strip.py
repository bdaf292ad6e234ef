"""The strip: source, stages, nodes and load in signal order, three lines high."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import accumulate

from polebook.quantity import letter
from polebook.report.figures import about
from polebook.report.look import cells
from polebook.tui.draw.pen import window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span

HEIGHT = 3
INDENT = 3
LONGEST_NAME = 12
UNKNOWN = "?"
"""Mark of a node where nothing can be told of losses: the chain is unstable."""
HIDDEN = 6  # cells for what tells how many lines are out of sight
_SHORT = {
    "common-emitter": "CE", "common-base": "CB", "emitter-follower": "EF", "common-source": "CS", "common-gate": "CG",
    "source-follower": "SF", "common-cathode": "CC", "common-grid": "CG", "cathode-follower": "CF",
    "cascode": "casc", "noninverting": "non-inv", "inverting": "inv", "transimpedance": "transimp",
}


@dataclass(frozen=True, slots=True)
class _Block:
    """A line of the ledger: its name, what it is, the share it owns; the node behind it and that node's mark."""

    at: int
    name: str
    kind: str
    share: str
    node: str
    mark: str

    def width(self, before: int, after: int) -> int:
        """Cells up to the next name, with `before` and `after` dashes about the mark."""
        return self.head(before) + (1 + after + 2 if self.mark else 2 * (after > 0))

    def head(self, before: int) -> int:
        """Cells up to the mark."""
        if not self.mark:
            return max(cells(self.name) + 1 + before, cells(self.kind) + 1, cells(self.share) + 1)
        return max(cells(self.name) + 1 + before, cells(self.kind) + 1)


def strip(scene: Scene, room: int) -> list[Line]:
    """Three lines of at most `room` cells; the selected line is always among what is seen."""
    blocks = [_block(scene, at) for at in range(len(scene.names))]
    least = [block.width(1, 1) for block in blocks]
    first, last = 0, len(blocks)
    if sum(least) + INDENT > room:
        size = _seen(least, room - INDENT - HIDDEN)
        first = window(len(blocks), size, scene.at)
        last = min(first + size, len(blocks))
    return _drawn(scene, blocks[first:last], (first, len(blocks) - last), room)


def _seen(least: list[int], room: int) -> int:
    """How many blocks in a row fit, wherever the row begins."""
    sums = [0, *accumulate(least)]
    for size in range(len(least), 1, -1):
        if max(sums[first + size] - sums[first] for first in range(len(least) - size + 1)) <= room:
            return size
    return 1


def _block(scene: Scene, at: int) -> _Block:
    pen, name = scene.pen, scene.names[at]
    last = at == len(scene.names) - 1
    shown = pen.cut(pen.text(name), LONGEST_NAME)
    share = scene.owns[at]
    owned = "" if share is None else about(share)
    if at == scene.greatest:
        owned += f" {pen.sign('◂')}"
    if at == 0:
        shown = "EMF" if scene.chain.source_kind == "voltage" else "I"
    node = scene.own_node(at)
    mark = "" if not node else UNKNOWN if not scene.figures.judged else pen.fill(
        scene.account.lost.get(node), scene.account.allotted.get(node))
    if not last:
        stage = scene.chain.stages[at - 1] if at else None
        if stage is not None and stage.left_out:
            return _Block(at, f"({shown})", "left out", "", node, mark)
        return _Block(at, shown, pen.text(_kind(scene, at)), owned, node, mark)
    return _Block(at, shown, pen.text(_kind(scene, at)), owned, "", mark)


def _kind(scene: Scene, at: int) -> str:
    """What a line is, in few letters: a source and a load by their values."""
    if 0 < at < len(scene.names) - 1:
        kind = scene.chain.stages[at - 1].kind
        return _SHORT.get(kind, kind)
    owner = scene.names[at]
    values = [(scene.chain.get(f"{owner}.{key}"), key) for key in ("resistance", "capacitance")]
    return " ".join(letter(value, key) for value, key in values if value)


class _Rows:
    """Three lines that grow to the right together."""

    def __init__(self) -> None:
        self.spans: tuple[list[Span], list[Span], list[Span]] = ([], [], [])
        self.widths = [0, 0, 0]

    def put(self, row: int, text: str, style: str = "", at: int = 0) -> None:
        """Text on a row, after blanks up to column `at`."""
        text = " " * max(at - self.widths[row], 0) + text
        self.spans[row].append(Span(text, style))
        self.widths[row] += cells(text)


def _drawn(scene: Scene, blocks: list[_Block], hidden: tuple[int, int], room: int) -> list[Line]:
    pen, rows = scene.pen, _Rows()
    before, after = _dashes(blocks, room - INDENT - HIDDEN * any(hidden) - 1)
    dash, full = pen.sign("─"), pen.sign("●")
    if hidden[0]:
        rows.put(0, f" {pen.sign('‹')}{hidden[0]}", "dim")
    start = max(INDENT, rows.widths[0] + 1)
    for block in blocks:
        last = block.at == len(scene.names) - 1
        mark_style = "bad" if block.mark == full else ""
        if last and block.mark:  # a load behind its own capacitor has a node of its own
            rows.put(0, block.mark, mark_style, start)
            start += 2
        style = "select" if block.at == scene.at else "dim" if block.name.startswith("(") else "head"
        rows.put(0, " " * (start - rows.widths[0]))
        rows.put(0, block.name, style)
        rows.put(1, block.kind, "dim", start)
        rows.put(2, block.share, "head" if block.at == scene.greatest else "", start)
        if last:
            break
        mark = start + block.head(before)
        rows.put(0, " " + dash * (mark - rows.widths[0] - 1), "dim")
        if block.mark:
            rows.put(0, block.mark, mark_style)
            rows.put(0, dash * after, "dim")
            rows.put(1, block.node, "dim", mark)
        if block is not blocks[-1]:
            rows.put(0, dash if block.at == len(scene.names) - 2 else pen.sign("▷"), "dim")
        start = rows.widths[0] + 1
    if hidden[1]:
        rows.put(0, f" {pen.sign('›')}{hidden[1]}", "dim")
    return [tuple(row) for row in rows.spans]


def _dashes(blocks: list[_Block], room: int) -> tuple[int, int]:
    """Dashes before and after a mark: as many as there is room for, up to what looks well."""
    for before, after in ((5, 5), (5, 4), (4, 4), (4, 3), (3, 3), (3, 2), (2, 2), (2, 1)):
        if sum(block.width(before, after) for block in blocks) + 4 <= room:
            return before, after
    return 1, 1
