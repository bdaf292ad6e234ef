"""The page of the leverage: what 1 % more of each part, card figure and stated current moves."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.document import Document, entries, part_name
from polebook.report.look import Look
from polebook.report.sections import paragraph
from polebook.report.table import Cell, Column, table

FIGURES = (("gain", "gain"), ("upper_edge", "upper edge"), ("lower_edge", "lower edge"))
MOST = 20  # rows that the page shows
LEAST = 0.005  # per cent that round to something


def ranked(document: Document, figure: str) -> list[tuple[str, float]]:
    """(name, per cent that 1 % more of it moves the figure by) of all that moves it, the greatest first.

    A part goes by "Q1.rc", a card's figure by "VF beta": its path, device.VF.beta, would not fit three times.
    """
    found = [(part_name(part), part["leverage"][figure]) for part in entries(document, "parts")]
    found += [(f"{card['device']} {card['figure']}", card["leverage"][figure]) for card in entries(document, "cards")]
    known = [(name, float(value)) for name, value in found if value]
    return sorted(known, key=lambda one: abs(one[1]), reverse=True)


def leverage(document: Document, look: Look) -> list[str]:
    """Gain and both edges side by side, each with what moves it most; then the first of each in words."""
    columns = [[one for one in ranked(document, figure) if abs(one[1]) >= LEAST] for figure, _ in FIGURES]
    if not any(columns):
        return paragraph("No leverage is known: the chain has neither edges nor a gain that anything moves.", look)
    rows: list[list[Cell | str]] = []
    for at in range(min(max(map(len, columns)), MOST)):
        row: list[Cell | str] = []
        for column in columns:
            name, value = column[at] if at < len(column) else ("", None)
            row += [name, "" if value is None else signed(value)]
        rows.append(row)
    heads = [Column(title, right=bool(right)) for _, name in FIGURES for title, right in ((name, 0), ("%", 1))]
    lines = table(heads, rows, look)
    if entries(document, "cards"):
        lines += paragraph("a name without a dot is a card's: its figure moves every stage that uses the card", look)
    for (_, name), column in zip(FIGURES, columns, strict=True):
        if column:
            lines += paragraph(f"+1 % of {column[0][0]} moves the {name} by {signed(column[0][1])} %", look)
        else:
            lines += paragraph(f"nothing moves the {name}, or there is none", look)
    rest = max(map(len, columns)) - MOST
    if rest > 0:
        lines += paragraph(f"{rest} more move less: --csv lists them all", look)
    return lines


def signed(value: float) -> str:
    """Per cent with its sign and two decimals."""
    return f"{round(value, 2) + 0.0:+.2f}" if abs(value) < 999.995 else show.eng(value)
