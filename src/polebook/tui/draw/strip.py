"""The strip: source, stages, nodes and load in signal order, three lines high."""

from __future__ import annotations

from dataclasses import dataclass

from polebook.quantity import letter
from polebook.report.figures import about
from polebook.report.look import cells
from polebook.tui.draw.pen import window
from polebook.tui.draw.scene import Scene
from polebook.tui.lines import Line, Span

HEIGHT = 3
INDENT = 3
LONGEST_NAME = 12
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
        size = max((room - INDENT - 6) // max(least), 1)
        first = window(len(blocks), size, scene.at)
        last = min(first + size, len(blocks))
    return _drawn(scene, blocks[first:last], (first, len(blocks) - last), room)


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
    mark = pen.fill(scene.account.lost.get(node), scene.account.allotted.get(node)) if node else ""
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


def _drawn(scene: Scene, blocks: list[_Block], hidden: tuple[int, int], room: int) -> list[Line]:
    pen = scene.pen
    lead = [f"{pen.sign('‹')}{hidden[0]} " if hidden[0] else "", f" {pen.sign('›')}{hidden[1]}" if hidden[1] else ""]
    over = room - INDENT - sum(map(cells, lead)) - 1
    before, after = _dashes(blocks, over)
    rows: list[list[Span]] = [[], [], []]
    widths = [0, 0, 0]

    def put(row: int, text: str, style: str = "") -> None:
        rows[row].append(Span(text, style))
        widths[row] += cells(text)

    def fill(row: int, to: int) -> None:
        if to > widths[row]:
            put(row, " " * (to - widths[row]))

    dash = pen.sign("─")
    start = max(INDENT, cells(lead[0]) + 1)
    fill(0, start - cells(lead[0]))
    put(0, lead[0], "dim")
    for number, block in enumerate(blocks):
        last = block.at == len(scene.names) - 1
        chosen = block.at == scene.at
        if last and block.mark:  # a load behind its own capacitor has a node of its own
            put(0, f"{block.mark} ", "bad" if block.mark == pen.sign("●") else "")
        base = widths[0]
        style = "select" if chosen else "dim" if block.name.startswith("(") else "head"
        put(0, block.name, style)
        for row, text in ((1, block.kind), (2, block.share)):
            fill(row, base)
            put(row, text, "dim" if row == 1 else "head" if block.at == scene.greatest else "")
        if last:
            break
        head = base + block.head(before)
        put(0, " " + dash * (head - widths[0] - 1), "dim")
        if block.mark:
            put(0, block.mark, "bad" if block.mark == pen.sign("●") else "")
            fill(1, head)
            put(1, block.node, "dim")
            put(0, dash * after, "dim")
        following = scene.names[-1] if number + 1 == len(blocks) else blocks[number + 1].name
        into_load = block.at == len(scene.names) - 2
        if number + 1 < len(blocks):
            put(0, f"{dash if into_load else pen.sign('▷')} ", "dim")
        elif following:
            put(0, lead[1], "dim")
    return [tuple(row) for row in rows]


def _dashes(blocks: list[_Block], room: int) -> tuple[int, int]:
    """Dashes before and after a mark: as many as there is room for, up to what looks well."""
    for before, after in ((5, 5), (5, 4), (4, 4), (4, 3), (3, 3), (3, 2), (2, 2), (2, 1)):
        if sum(block.width(before, after) for block in blocks) + 4 <= room:
            return before, after
    return 1, 1
