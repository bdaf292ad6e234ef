"""The page of the time constants: ranked, with the edges that their sums estimate beside the exact ones."""

from __future__ import annotations

from math import pi

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries, part_name
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, table

BAR = 12
BLIND = 0.3  # an estimate further off than this share of the exact edge deserves a word
_WHY = {
    "upper": "the sum is blind to complex poles, and to poles that lie together",
    "lower": "the sum takes every corner for one of its own, also where corners lie together",
}


def constants(document: Document, end: str) -> list[tuple[Entry, float]]:
    """The parts that act at the "upper" or "lower" edge, each with its term of the sum, the greatest first.

    A term is the time constant in s for the upper edge, 1/tau in 1/s for the lower one.
    """
    role = {"upper": "high", "lower": "low"}[end]
    parts = [part for part in entries(document, "parts") if part["role"] == role and part["tau_s"]]
    terms = [(part, float(part["tau_s"]) if end == "upper" else 1 / float(part["tau_s"])) for part in parts]
    return sorted(terms, key=lambda one: one[1], reverse=True)


def seen(part: Entry) -> float | None:
    """The resistance that a part sees, Ω: R in tau = C·R or L/R; None for what has no ohm."""
    if part["type"] == "C" and part["value"]:
        return float(part["tau_s"] / part["value"])
    return float(part["value"] / part["tau_s"]) if part["type"] == "L" else None


def alone(part: Entry) -> float:
    """The edge in Hz that the part would make if it were the only one."""
    return abs(1 / (2 * pi * float(part["tau_s"])))


def upper(document: Document, look: Look) -> list[str]:
    """Open-circuit time constants: what each high-role part sees with all others at midband."""
    return _ranked(document, "upper", look)


def lower(document: Document, look: Look) -> list[str]:
    """Short-circuit time constants: what each low-role part sees with all others at midband."""
    return _ranked(document, "lower", look)


def _ranked(document: Document, end: str, look: Look) -> list[str]:
    ranked = constants(document, end)
    if not ranked:
        return [f" no part acts at the {end} edge"]
    total = sum(term for _, term in ranked)
    rows = []
    for part, term in ranked:
        share = term / total if total > 0 else None
        row: list[Cell | str] = [part_name(part), show.eng(part["value"], show.UNIT_OF_TYPE[part["type"]])]
        row += [show.eng(seen(part), "Ω"), show.eng(part["tau_s"], "s"), show.eng(alone(part), "Hz")]
        rows.append([*row, show.share(share), look.bar(share or 0.0, BAR)])
    names = (f"{end} edge", "value", "sees", "time\nconstant", "alone", "of the\nsum", "")
    columns = [Column(name, right=at not in (0, len(names) - 1)) for at, name in enumerate(names)]
    return [*table(columns, rows, look), *_estimates(document, end, total, len(ranked), look)]


def _estimates(document: Document, end: str, total: float, count: int, look: Look) -> list[str]:
    """What the sum estimates, the exact edge, the node estimate; a word where an estimate is blind."""
    overall = document["overall"]
    exact = overall[f"{end}_edge_hz"]
    by_sum = overall["octc_upper_hz" if end == "upper" else "sctc_lower_hz"]
    added = f"sum of {count}: {show.eng(total, 's')}" if end == "upper" else f"sum of {count} corner{'s' * (count > 1)}"
    beside = f"exact {show.eng(exact, 'Hz')}" if exact is not None else f"there is no exact {end} edge"
    lines = paragraph(unparted(f"{added}, which puts the {end} edge at {show.eng(by_sum, 'Hz')}; {beside}"), look)
    told = [("the sum of time constants", by_sum, _WHY[end])]
    if end == "upper":
        nodes = overall["node_upper_hz"]
        lines += paragraph(unparted(f"the node poles put it at {show.eng(nodes, 'Hz')}"), look)
        told.append(("the node estimate", nodes, "it takes the nodes for buffered from one another"))
    for what, estimate, why in told:
        if exact is not None and estimate is not None and abs(estimate / exact - 1) > BLIND:
            text = f"blind here: {what} is {estimate / exact:.2g} times the exact edge; {why}"
            lines += paragraph(text, look, "warn")
    return lines
