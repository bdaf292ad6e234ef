"""The help: every key from the table, and what the words of each page mean."""

from __future__ import annotations

from textwrap import wrap

from polebook.tui import keys
from polebook.tui.view import Overlay, Page, State

_FRAME = (
    ("the strip", "source, stages, nodes and load in signal order. A node's mark fills with what it loses of what it "
     "was allotted; under each stage the share of the edge that it owns."),
    ("the sheet", "every key of the selected line. Type a value as on paper: 4k7, 100n, 1.5M. A bad one stays open, "
     "with the reason."),
    ("the verdict", "what limits the chain now, and by which mechanism."),
    ("the baseline", "p pins today's figures; from then on every figure that moved shows by how much."),
)
_WORDS: dict[Page, tuple[tuple[str, str], ...]] = {
    "ledger": (
        ("gain", "of the line, into what it really drives; all lines multiply to the chain's"),
        ("K", "gain from a bridging part's input side to its output side: at the input it counts (1 - K) times"),
        ("node, pole", "the node at the line's output, and the pole that its resistance and capacitance make"),
        ("lost", "dB that the node takes from the response at the target edge (at the edge itself without a target)"),
        ("allot, left", "the node's part of the 3.01 dB that may be lost, and what is left of it"),
        ("owns", "how much of the edge the line's parts decide; all shares make 100 %"),
        ("low role", "the line's part that owns most of the lower edge, and its corner"),
    ),
    "nodes": (
        ("R, C, pole", "resistance and capacitance at the node, and the pole that they make"),
        ("drives, takes", "output resistance of what drives the node, input resistance of what it drives; the part of "
         "the open gain that is left between them"),
        ("what lands", "every capacitance at the node: from which part, its K, how much of it counts here"),
        ("constants", "every part with the resistance that it sees, ranked by its share of the estimate of the edge"),
        ("estimates", "from the sum of time constants and from the node poles, beside the exact edge: what the short "
         "cuts cost"),
    ),
}


def overlay(state: State) -> Overlay:
    """Keys first, then the words of the page in sight, the other page, and the frame."""
    lines = keys.help_lines(state.plain)
    pages: list[Page] = [state.view.page, *(name for name in _WORDS if name != state.view.page)]
    for name in pages:
        lines += ["", f"Words of the {name} page", *_told(_WORDS[name])]
    lines += ["", "Around the page", *_told(_FRAME)]
    return Overlay("help", "keys and words", text=tuple(lines))


def _told(words: tuple[tuple[str, str], ...]) -> list[str]:
    room = max(len(word) for word, _ in words)
    lines = []
    for word, about in words:
        first, *more = wrap(about, keys.HELP_CELLS - room - 4)
        lines += [f"  {word:{room}}  {first}", *(f"  {'':{room}}  {line}" for line in more)]
    return lines
