"""The page of the step response: the curve, its marks and figures, and what its rise is set against."""

from __future__ import annotations

from math import ceil, floor

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, table

TALL = 16  # rows that the plot may take
ROWS = (0.1, 0.25, 0.5, 1.0)  # share of the final value that a row may stand for
LABEL = 7  # cells of the scale beside the plot
BAR = 16
LEAST = 0.0005  # share that rounds to something
SEEN = 0.005  # % of undershoot that is told


def summary(document: Document, look: Look) -> list[str]:
    """One line for the ledger: rise, overshoot, settling, sag and delay."""
    overall = document["overall"]
    rise, over, settled = (overall[key] for key in ("rise_time_s", "overshoot_percent", "settling_1_s"))
    told = []
    if rise is not None:
        told.append(f"rises in {show.eng(rise, 's')}")
    if over is not None:
        told.append(f"overshoots by {_per_cent(over)}")
    if settled is not None:
        told.append(f"is within 1 % after {show.eng(settled, 's')}")
    if overall["sag_percent"] is not None:
        told.append(f"sags by {_per_cent(overall['sag_percent'])}")
    if not told:
        return []
    text = f"step response: {', '.join(told)}"
    if overall["group_delay_s"] is not None:
        text += f"; group delay {show.eng(overall['group_delay_s'], 's')}"
    return paragraph(unparted(f"{text}."), look)


def plot(document: Document, look: Look) -> list[str]:
    """The response over time, in characters; or why there is none."""
    pulse = document.get("pulse")
    if not pulse:
        return []
    if not pulse["curve"]:
        return paragraph(f"No step response: {pulse['why']}.", look, "warn")
    heights = [height for _, height in pulse["curve"]]
    step = next((row for row in ROWS if (max(heights) - min(*heights, 0.0)) / row < TALL), None)
    if step is None:
        step = ROWS[-1] * ceil((max(heights) - min(heights)) / TALL)
    low, high = min(0, round(min(heights) / step)), max(round(1.0 / step), round(max(heights) / step))
    wide = look.width - LABEL - 2
    places = [round(_between(heights, at / (wide - 1)) / step) for at in range(wide)]
    lines = paragraph("step response with couplings and bypasses shorted, % of its final value", look)
    for row in range(high, low - 1, -1):
        halves = round(row * step * 2.0, 6)
        label = "" if halves % 1.0 else f"{50.0 * halves:.0f}"
        rule = "\u2500" if row == 0 or abs(row * step - 1.0) < 1e-9 else " "
        cells = "".join("\u2588" if _crosses(places, at, row) else rule for at in range(wide))
        lines.append(f" {label:>{LABEL - 1}} {look.text(cells)}".rstrip())
    return [*lines, " " + look.paint(look.text(_axis(pulse["curve"][-1][0], wide)), "dim")]


def _between(heights: list[float], share: float) -> float:
    """Height at a share of the window."""
    place = share * (len(heights) - 1)
    at = min(floor(place), len(heights) - 2)
    return heights[at] + (heights[at + 1] - heights[at]) * (place - at)


def _crosses(places: list[int], at: int, row: int) -> bool:
    """Whether the curve is in that cell: on it, or on its way to the next column's height."""
    here, there = places[at], places[min(at + 1, len(places) - 1)]
    return row == here or min(here, there) < row < max(here, there)


def _axis(end: float, wide: int) -> str:
    """Five labels of time under their places."""
    line = [" "] * (LABEL + wide)
    for quarter in range(5):
        number, _, unit = show.eng(end * quarter / 4.0, "s", 4).partition(" ")
        label = f"{number.rstrip('0').rstrip('.') if '.' in number else number} {unit}" if quarter else "0"
        at = LABEL + round((wide - 1) * quarter / 4.0)
        at = min(at if not quarter else at - len(label) // 2, LABEL + wide - len(label))
        line[at:at + len(label)] = label
    return "".join(line).rstrip()


def marks(document: Document, look: Look) -> list[str]:
    """Where the figures are read, in the order of time."""
    listed = (document.get("pulse") or {}).get("marks") or ()
    rows = [[row["mark"], show.eng(row["time_s"], "s"), _per_cent(100.0 * row["height"])] for row in listed]
    columns = [Column("marks", right=False), Column("after the step"), Column("of the final\nvalue")]
    return table(columns, rows, look) if rows else []


def figures(document: Document, look: Look) -> list[str]:
    """Rise, overshoot, settling, sag and delay, with what is to be said beside each."""
    pulse, overall = document.get("pulse"), document["overall"]
    if not pulse or (pulse["why"] and overall["group_delay_s"] is None):
        return []
    delays = pulse["delays"]
    spread = "" if not delays else (f"from {show.eng(delays['least_s'], 's')} at {show.eng(delays['least_hz'], 'Hz')} "
                                    f"to {show.eng(delays['most_s'], 's')} at {show.eng(delays['most_hz'], 'Hz')}")
    sag = f"of a pulse of {show.eng(pulse['pulse_s'], 's')}" if pulse["pulse_s"] is not None else pulse["sag_why"]
    reference = overall["reference_hz"]
    rows: list[list[Cell | str]] = [
        ["rise, 10-90 %", show.eng(overall["rise_time_s"], "s"), ""],
        ["overshoot", _per_cent(overall["overshoot_percent"]), "above the final value"],
        ["undershoot", _per_cent(pulse["undershoot_percent"]), "the wrong way, before the rise"],
        ["settled to 1 %", show.eng(overall["settling_1_s"], "s"), ""],
        ["settled to 0.1 %", show.eng(overall["settling_01_s"], "s"), ""],
        ["sag", _per_cent(overall["sag_percent"]), sag],
        ["group delay", show.eng(overall["group_delay_s"], "s"),
         "" if reference is None else f"at {show.eng(reference, 'Hz')}"],
        ["its spread", show.eng(overall["group_delay_spread_s"], "s"), spread],
    ]
    lines = table([Column("step", right=False), Column(""), Column("", right=False)], rows, look)
    return [*lines, *_wrong_way(document, look), *_method(pulse, look)]


def _wrong_way(document: Document, look: Look) -> list[str]:
    """Zeros in the right half-plane send the response the wrong way first: whether that is seen here."""
    zeros = sorted((zero for zero in entries(document, "zeros") if zero["re"] > 0), key=lambda zero: float(zero["hz"]))
    under = document["pulse"]["undershoot_percent"]
    if not zeros or under is None:
        return []
    count = "A zero" if len(zeros) == 1 else f"{len(zeros)} zeros"
    nearest = f"that of {zeros[0]['stage']} at {show.eng(zeros[0]['hz'], 'Hz')}"
    where = nearest.removeprefix("that ") if len(zeros) == 1 else f"the nearest {nearest}"
    text = f"{count} in the right half-plane ({where}) {'sends' if len(zeros) == 1 else 'send'} the response the " \
           f"wrong way first: undershoot {_per_cent(under)}."
    if under < SEEN:
        text = f"{count} in the right half-plane ({where}): too far out for an undershoot to show."
    return paragraph(unparted(text), look)


def _method(pulse: Entry, look: Look) -> list[str]:
    if pulse["by"] != "matrix":
        return []
    return paragraph(f"Its {pulse['poles']} poles lie too close together for residues: computed from the matrix "
                     "exponential.", look)


def estimates(document: Document, look: Look) -> list[str]:
    """The rise against 0.35 over the edge, and against what the node poles would take, their squares added."""
    pulse, rise = document.get("pulse"), document["overall"]["rise_time_s"]
    if not pulse or not pulse["nodes"]:
        return []
    total = pulse["by_nodes_s"]
    rows: list[list[Cell | str]] = []
    for node in pulse["nodes"]:
        share = (node["rise_s"] / total) ** 2
        rows.append([node["name"], show.eng(node["pole_hz"], "Hz"), show.eng(node["rise_s"], "s"), show.share(share),
                     look.bar(share, BAR) if share >= LEAST else ""])
    columns = [Column("rise by nodes", right=False), Column("pole"), Column("rise\nalone"),
               Column("of the sum\nof squares"), Column("", right=False)]
    lines = table(columns, rows, look)
    told = []
    edge = pulse["by_edge_s"]
    if edge is not None:
        told.append(f"0.35 over the upper edge gives {show.eng(edge, 's')}{_times(edge, rise)}")
    told.append(f"the nodes' rises, their squares added, give {show.eng(total, 's')}{_times(total, rise)}")
    own = f"rise {show.eng(rise, 's')}: " if rise is not None else ""
    return [*lines, *paragraph(unparted(f"{own}{'; '.join(told)}."), look)]


def _times(estimate: float, rise: float | None) -> str:
    """How an estimate compares with the figure itself."""
    return f" ({estimate / rise:.2f} times)" if rise else ""


def _per_cent(value: float | None) -> str:
    return show.NONE if value is None else f"{round(value, 2) + 0.0:.2f} %"
