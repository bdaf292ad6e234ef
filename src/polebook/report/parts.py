"""The text and the CSV of `polebook parts`, from its JSON answer."""

from __future__ import annotations

from textwrap import wrap

from polebook.report.csvout import csv_text, titled
from polebook.report.document import Document, Entry
from polebook.report.look import Look, cells
from polebook.report.sections import paragraph
from polebook.report.table import GAP, Cell, Column, Row, table

_LEAST = 20  # columns for where a part is used
_TITLES = ("value", "tol.", "count")


def parts_text(answer: Document, look: Look) -> str:
    """A table a group, and what is not fitted."""
    lines = [" " + look.paint(look.text(answer["files"][0]["file"]), "head")]
    groups = dict.fromkeys(row["group"] for row in answer["parts"])
    room = look.width - 1 - GAP * len(_TITLES) - sum(_widths(answer, look))
    for group in groups:
        rows = [row for row in answer["parts"] if row["group"] == group]
        lines += ["", *_group(group, rows, answer, max(room, _LEAST), look)]
    total = sum(row["count"] for row in answer["parts"])
    lines += ["", *paragraph(f"{total} part{'s' * (total != 1)} to fit", look, "head")]
    odd = [row for row in answer["parts"] if row["preferred"] is False]
    if odd:
        lines += paragraph("* not of the file's preferred series", look)
    for entry in answer["not_fitted"]:
        values = f" ({', '.join(entry['values'])})" if entry["values"] else ""
        lines += paragraph(f"not fitted: {entry['what']}{values}, which {entry['why']}", look, hang=3)
    return "\n".join(lines) + "\n"


def _group(group: str, rows: list[Entry], answer: Document, room: int, look: Look) -> list[str]:
    """One line a value; the places where it is used wrapped beside it."""
    shown: list[Row] = []
    widths = _widths(answer, look)
    for row in rows:
        first, *more = wrap(look.text(", ".join(row["used"])), room, break_on_hyphens=False) or [""]
        value, tolerance, count = _cells(row)
        shown.append([Cell(value, "warn" if row["preferred"] is False else ""), tolerance, count, first])
        shown += [["", "", "", text] for text in more]
    titles = (f"{group}s".ljust(widths[0]), _TITLES[1].rjust(widths[1]), _TITLES[2].rjust(widths[2]), "used in")
    return table([Column(title, right=at in (1, 2)) for at, title in enumerate(titles)], shown, look)


def _cells(row: Entry) -> tuple[str, str, str]:
    """Value as on a drawing, with the mark of one that is not preferred; tolerance; count."""
    value = f"{row['code']} {row['unit']}" if row["group"] in ("device", "inductor") else row["code"]
    if row["group"] == "block":
        value = row["code"]
    tolerance = "" if row["tolerance"] is None else f"{100 * row['tolerance']:.3g} %"
    return value + (" *" if row["preferred"] is False else ""), tolerance, str(row["count"])


def _widths(answer: Document, look: Look) -> list[int]:
    """The same columns for every group: the list reads as one."""
    filled = [_cells(row) for row in answer["parts"]]
    titles = (max((f"{row['group']}s" for row in answer["parts"]), key=len, default=""), *_TITLES[1:])
    return [max(cells(look.text(text)) for text in (title, *(row[at] for row in filled)))
            for at, title in enumerate(titles)]


def parts_csv(answer: Document) -> str:
    """One row a value or card."""
    heading = ("group", "part", titled("value", "SI"), "unit or family", titled("tolerance", "1"), "count", "used in",
               "series", "of the series")
    keys = ("group", "code", "value", "unit", "tolerance", "count")
    rows = ([*(row[key] for key in keys), " ".join(row["used"]), row["series"], row["preferred"]]
            for row in answer["parts"])
    return csv_text(heading, rows)
