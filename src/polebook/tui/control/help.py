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
    ("unsaved work", "is kept outside the file within two seconds of an edit, and offered when the file is opened "
     "again after anything but leaving by choice. What another program does to the file is noticed and asked about."),
    ("the baseline", "p pins today's figures; from then on every figure that moved shows by how much. Page 0 has "
     "posts and revisions to take in their place."),
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
    "response": (
        ("g, p, d, Z", "at the end of a curve: gain, phase (in dots, on the right axis), delay, size of an impedance"),
        ("b", "the baseline, in dashes"),
        ("m, m1, m2", "sweeps measured on a bench, at the end of each; phases of them in dots. B takes them away. "
         "Nothing is drawn outside of what was swept; at the cursor: planned, measured, and how far off"),
        ("own curve", "s: that of the selected line beside the chain's; of impedances the line's in place of the "
         "chain's"),
        ("limits", "the upright lines are the targets' edges; between them the response must stay above -3 dB, "
         "the dotted level"),
        ("\u25cf", "today's edges, on that level"),
        ("\u00d7", "poles, on the axis; those of the selected line stand out. Complex pairs stand at their |p|/(2 pi)"),
        ("cursor", "moves on round frequencies, about a column a step; closer steps where the plot is zoomed. Enter "
         "takes it to the next edge or target"),
        ("window", "z Z closer, further about the cursor; [ ] sideways, Home End to the ends; Esc the whole band"),
        ("lost", "dB below the midband gain, of the chain and of each line; negative where it rises above"),
        ("delay", "group delay. Where it spans too much for a plain axis, equal ratios; negative parts then in dots"),
        ("Z in, Z out", "into n0 with the source's impedance away; at the last node with the load away. As: the "
         "resistance and capacitance (or coil) in parallel that it looks like there"),
    ),
    "pulse": (
        ("the curve", "the step response with couplings and bypasses shorted, in per cent of its final value; b: a "
         "pulse as the lower end lets it sag"),
        ("\u25cf", "where the figures are read: 10 and 90 %, the top, within 1 % and 0.1 % for good; Enter takes the "
         "cursor there"),
        ("rise", "from the first time at 10 % to the first at 90 %"),
        ("0.35/edge", "the rise that one pole at the upper edge would have"),
        ("by nodes", "the root of the sum of the squares of what each node's pole would take alone"),
        ("limits", "upright: when the rise has to be at 90 %; dotted at the top: how far it may overshoot; of a pulse "
         "its end and what has to be left of it"),
        ("falls by", "the parts that let go of the pulse's height at first, by their time constants; target.pulse is "
         "its length"),
        ("b", "at the end of a curve: the baseline"),
        ("window", ", . move the cursor; z Z closer, further about it; [ ] Home End sideways; Esc the whole again"),
    ),
    "noise": (
        ("n", "the density of the noise, referred to the input: what would stand there to make what comes out; v: as "
         "it is at the output"),
        ("its dashes", "what the chosen row makes of it by itself; of the first where a figure is chosen"),
        ("\u25cf", "the density at the reference frequency: the figure, and what the target is held against"),
        ("noise figure", "what the chain adds to the noise of the source's resistance at 290 K"),
        ("total in, out", "over the noise band, whose ends are upright lines where it has any"),
        ("margin", "the smallest signal's rms over the total at the input"),
        ("at ..., %", "who makes it at the reference frequency, by share of the power; s: line by line. Under the "
         "cursor's sign at the cursor's frequency"),
        ("gm, ib, ig", "a device's main current, its base current, its gate leakage; en, in: an amplifier's own noise"),
        ("Enter", "to the key of the row: a part's own, the card of a device; of a figure the target or the source"),
        ("b", "at the end of a curve: the baseline"),
    ),
    "levels": (
        ("b", "from the d.c. plan to the levels and back; where there is room both are in sight"),
        ("control, lower", "what a meter shows there against ground; base and emitter, gate and source, grid and "
         "cathode. Output: collector, drain, anode; of a cascode's lower device where the upper one stands on it"),
        ("across, heat", "d.c. voltage across the device, and what it dissipates; of p_max: of its card's rating"),
        ("given, solved", "where the current comes from; network: what the resistors would make of a given one; ! "
         "past a rating, or given and solved far apart"),
        ("from, into", "what the selected line draws from each rail and passes into it"),
        ("the diagram", "a bar a node on one scale of dB over 1 V peak: noise floor in dots (as a sine of its power), "
         "the signal from smallest to largest, room up to the clip level; x what of it lies under the noise"),
        ("clip, room", "peak at which the stage before the node clips and by what; dB from the largest signal to it"),
        ("clips first", "the stage that ends first as the source grows, and the largest source that passes it"),
        ("dynamic range", "that source over the input noise; noise margin: the smallest source over it"),
        ("full power to", "highest frequency at which the slowest stage still follows the largest signal"),
    ),
    "leverage": (
        ("1 % more of", "parts, figures of cards and stated currents, that first which moves the ranking figure most"),
        ("gain ... noise", "per cent that each moves by; where a part sets the bias, what that does is in it"),
        ("role", "the end of the band at which the part acts; card: it moves every stage that uses the card"),
        ("a sweep", "Enter puts the part through a decade either way: gain, edges and input noise over today's, which "
         "the dot marks; the slope there is the leverage"),
        ("its limits", "≥ ≤ at the left: target of the figure that ranks; = on the axis: all that has a target is as "
         "wanted"),
        ("its cursor", ", . move it; Enter sets the part to the value there, the nearest of its preferred series; "
         "z Z [ ] sweep another range"),
        ("one more figure", "s: rise time, the largest source that passes, full power, supply current, in the place of "
         "a figure that does not rank; then none again"),
    ),
    "spread": (
        ("builds", "the file's chain again and again, every part, figure of a card and rail drawn within its "
         "tolerance, the bias of each solved anew; s builds them, * / ten times as many or a tenth, "
         "[ ] with another seed"),
        ("yield", "share of the builds that meet every target, and where it may lie (95 % sure); was: before the edit, "
         "by the same draws"),
        ("the bars", "how many builds have which value, the middle 99.8 % of them; upright: what the target allows"),
        ("\u25cf \u00d7", "the chain as its file has it; the worst corner of the tolerances, solved"),
        ("0.1 % ... 99.9 %", "so many of the builds lie below; then the standard deviation"),
        ("halved, none", "yield in % that half of this tolerance would bring, or none; ~ by slopes, else solved again"),
        ("worst, of it", "the end at which the worst corner has it; its share of what the figure varies, by leverage"),
        ("v", "another figure, at last the table of all; Enter goes to the key of the row"),
    ),
    "apportion": (
        ("a plan", "values for the keys that may change, which reach the targets: few moved, and little, bought from "
         "the file's series; s or Enter looks for one, Esc stops with the best so far"),
        ("\u25cf \u00b7", "the key may change; it stays. Space changes that, / for its stage, * for all; at first what "
         "the file calls free, else every part that is fitted. Space on the sheet adds its key"),
        ("favoured", "v: the figure of which the most is made once all targets are met"),
        ("proposed", "where the plan puts the key, and how far that is; what the chain's figures would be"),
        ("Enter", "takes the plan in as one edit, which u takes back; after an edit it is an old one: s runs it again"),
        ("=", "the plan in words: what keeps it from a target, which target would have to give, what would help"),
        ("[ ]", "another seed: other values to begin at, beside today's"),
    ),
    "history": (
        ("a post", "what was found of the chain on a day, kept in the record beside the file; 1 is the newest. It "
         "holds targets, the lines' figures and the account, and no curves. P makes one of the saved file"),
        ("a revision", "the file as git has it, by the beginning of its hash; its whole ledger is solved here"),
        ("=", "what has the same chain, whatever its notes, its order and the way values are spelled"),
        ("Enter", "the row is the baseline: every page shows what moved since; again: no baseline"),
        ("\u25cf", "the row that is the baseline"),
        ("then, now", "figures of the row and of the text as it stands here; by: from then to now"),
        ("what changed", "from the row to now, by meaning; v shows all of it"),
        ("s", "looks again at the record and at git, as opening the page and writing the file do"),
    ),
}


_WRITING = (
    ("e", "opens the file as text, at its first fault, else at the focused key; every character is text there"),
    ("Esc", "leaves it and takes the text in as one edit, faults and all; u takes it back, e mends it"),
    ("! before a line", "a fault stands on it; below, the fault of the cursor's line or the next one"),
    ("ctrl+n ctrl+p", "to the fault after, before"),
    ("ctrl+u ctrl+y", "undo, redo what was written; ctrl+g goes back to what the page was opened with"),
    ("ctrl+f", "find a text; Enter the next, Up the one before"),
    ("Tab", "to the next value; shift+Tab to the one before"),
    ("ctrl+x ctrl+k", "take out the line, the rest of the line; ctrl+w the word before"),
    ("ctrl+s", "write the file and stay; ctrl+q takes the text in and leaves"),
    ("the figures", "are of the text as it stands, beside what has moved since the page was opened; with faults those "
     "of before"),
)


def overlay(state: State) -> Overlay:
    """Keys first, then the words of the page in sight, the other page, and the frame."""
    lines = keys.help_lines(state.plain)
    pages: list[Page] = [state.view.page, *(name for name in _WORDS if name != state.view.page)]
    for name in pages:
        lines += ["", f"Words of the {name} page", *_told(_WORDS[name])]
    lines += ["", "The text page", *_told(_WRITING)]
    lines += ["", "Around the page", *_told(_FRAME)]
    return Overlay("help", "keys and words", text=tuple(lines))


def _told(words: tuple[tuple[str, str], ...]) -> list[str]:
    room = max(len(word) for word, _ in words)
    lines = []
    for word, about in words:
        first, *more = wrap(about, keys.HELP_CELLS - room - 4)
        lines += [f"  {word:{room}}  {first}", *(f"  {'':{room}}  {line}" for line in more)]
    return lines
