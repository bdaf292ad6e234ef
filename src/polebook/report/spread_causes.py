"""Which tolerances cost a spread its yield, make its variance, and make up its worst corners."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph
from polebook.report.spread_words import called, listed, part_text
from polebook.report.table import Cell, Column, table

MOST = 6  # tolerances that a ranking shows
_MET = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("")}
LEAST = 0.005  # share of a variance that is worth a row


def costs(answer: Document, look: Look) -> list[str]:
    """The tolerances that cost the most yield, with what a tighter one would bring."""
    if answer["costs"] is None or not answer["yield"]:
        return []
    short = [target["name"] for target in answer["targets"] if target["nominal_met"] is False]
    lines = paragraph(f"the chain as filed misses {listed(short)} itself: its values come before its tolerances",
                      look) if short else []
    dear = [cost for cost in answer["costs"] if cost["yield_gain"] > 0.0][:MOST]
    if not dear:
        none = answer["yield"]["all"]["share"] == 1.0
        told = "every build meets its targets" if none else "no single tolerance, halved, would bring yield"
        return lines + paragraph(told, look)
    rows: list[list[Cell | str]] = [
        [part_text(cost["part"]), cost["sort"], _reach(cost["tolerance"], cost["sort"]),
         _points(cost["yield_gain"]) + ("  " if cost["solved"] else " ~"), _points(cost["at_none"]) + " ~"]
        for cost in dear]
    names = ("costs most yield", "tolerance", "now", "halved\nbrings", "none\nbrings")
    lines += table([Column(name, right=at > 1) for at, name in enumerate(names)], rows, look)
    return lines + paragraph("% of the builds, all else as it was; ~ by slopes, else solved again", look)


def corners(answer: Document, look: Look) -> list[str]:
    """The worst that the tolerances allow, and who is at which end of it."""
    rows: list[list[Cell | str]] = []
    notes: list[str] = []
    turned = False
    for name, sides in answer["corner"].items():
        unit = answer["figures"][name]["unit"]
        for side, corner in sides.items():
            title = f"{called(name)} {'least' if side == 'low' else 'greatest'}"
            met = _MET[corner["met"]]
            value = show.by_unit(corner["value"], unit, 4) if corner["value"] is not None else corner["state"]
            rows.append([title, show.by_unit(answer["figures"][name]["nominal"], unit, 4),
                         show.by_unit(corner["linear"], unit, 4), value + (" *" if corner["turned"] else ""),
                         str(corner["beyond"]), met])
            turned = turned or bool(corner["turned"])
            notes += paragraph(f"{title}: {_signs(answer, name, corner)}", look, hang=3)
    if not rows:
        return []
    names = ("worst corner", "as filed", "by leverage", "solved", "builds\nbeyond", "")
    lines = table([Column(name, right=0 < at < 5) for at, name in enumerate(names)], rows, look)
    lines += paragraph("every tolerance at that end of its reach to which the leverage points; solved there", look)
    if turned:
        lines += paragraph("* some turn round on the way there, and stand at their other end", look)
    return lines + notes


def makers(answer: Document, look: Look) -> list[str]:
    """Gain and edges side by side, each with the tolerances that make most of its variance."""
    names = [name for name in ("gain_db", "upper_edge_hz", "lower_edge_hz") if name in answer["figures"]]
    columns = []
    for name in names:
        found = [(part_text(draw["part"]), draw["variance"].get(name) or 0.0) for draw in answer["draws"]]
        columns.append([one for one in sorted(found, key=lambda one: -one[1]) if one[1] >= LEAST][:MOST])
    if not any(columns):
        return []
    rows: list[list[Cell | str]] = []
    for at in range(max(map(len, columns))):
        row: list[Cell | str] = []
        for column in columns:
            part, share = column[at] if at < len(column) else ("", None)
            row += [part, "" if share is None else f"{100 * share:.0f}"]
        rows.append(row)
    heads = [Column(title, right=bool(right)) for name in names for title, right in ((called(name), 0), ("%", 1))]
    return paragraph("who makes how much of the variance, by leverage", look, "dim") + table(heads, rows, look)


def _signs(answer: Document, name: str, corner: Entry) -> str:
    """The tolerances that matter most there, each with the end of its reach."""
    share = {draw["part"]: draw["variance"].get(name) or 0.0 for draw in answer["draws"]}
    first = sorted(corner["signs"], key=lambda part: -share[part])[:MOST]
    ends = [f"{part_text(part)} {'high' if corner['signs'][part] > 0 else 'low'}" for part in first]
    rest = len(corner["signs"]) - len(first)
    return ", ".join(ends) + (f", and {rest} more" if rest else "")


def _points(value: float) -> str:
    return f"{100.0 * value:+.2f} %"


def _reach(value: float, sort: str) -> str:
    return f"±{value:g} °C" if sort == "temperature" else show.share(value)
