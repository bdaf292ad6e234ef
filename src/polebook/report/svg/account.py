"""The account: dB lost at every node against what it was allotted, and below who owns how much of the edge."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries, part_name
from polebook.report.svg.frame import Scale
from polebook.report.svg.head import EDGE, TOP, called, headed
from polebook.report.svg.sheet import SIZE, Sheet, cut, wide

WHAT = "dB lost at each node against the allotment, and who owns the edges"
WIDTH = 860.0
_ROW, _BAR, _HEAD = 20.0, 12.0, 26.0  # px
_NAME, _FIGURE = 132.0, 62.0  # px for names before the bars, for figures behind them
_MOST, _LEAST = 12, 0.005  # parts that are drawn; share that rounds to a per cent
_BETWEEN = 24.0
_KEY = 42.0
Row = tuple[str, float, float | None]  # name, value, allotment


def account(document: Document) -> str:
    """Both ends of the band side by side."""
    ends = {end: _end(document, end) for end in ("upper", "lower")}
    tall = {part: max(len(rows[part]) for rows in ends.values()) * _ROW for part in (0, 1)}
    height = TOP + 3 * _HEAD + tall[0] + tall[1] + _KEY
    sheet = headed(document, WHAT, WIDTH, height)
    half = (WIDTH - 2 * EDGE - _BETWEEN) / 2
    for at, (end, (lost, owned)) in enumerate(ends.items()):
        left = EDGE + at * (half + _BETWEEN)
        sheet.text(left, TOP + 18, cut(_edge(document, end), half, bold=True), bold=True)
        top = TOP + _HEAD
        _bars(sheet, left, half, top, "lost, dB", lost, "light")
        _bars(sheet, left, half, top + _HEAD + tall[0], f"owns of the {end} edge, %", owned, "dark")
    _key(sheet, height - 18)
    return sheet.render(f"{called(document)}: {WHAT}", _said(ends))


def _end(document: Document, end: str) -> tuple[list[Row], list[Row]]:
    """(nodes with what they lose, parts with what they own in %) of one end of the band."""
    lost: list[Row] = [(node["name"] if node["name"] == node["stage"] else f"{node['name']} ({node['stage']})",
                        node[f"lost_{end}_db"], node[f"allotted_{end}_db"])
                       for node in entries(document, "nodes") if node[f"lost_{end}_db"] is not None]
    parts = [(part_name(part), float(part[f"owns_{end}"])) for part in entries(document, "parts")
             if part[f"owns_{end}"] is not None]
    parts.sort(key=lambda one: -abs(one[1]))
    shown = [one for one in parts if abs(one[1]) >= _LEAST][:_MOST]
    rest = parts[len(shown):]
    owned: list[Row] = [(name, 100.0 * share, None) for name, share in shown]
    if rest:
        owned.append((f"{len(rest)} more", 100.0 * sum(share for _, share in rest), None))
    return lost, owned


def _edge(document: Document, end: str) -> str:
    """Where the edge is, and where its account is drawn up."""
    edge = document["overall"][f"{end}_edge_hz"]
    side = (document["account"] or {}).get(end) or {}
    if edge is None and not side.get("edge_hz"):
        return f"no {end} edge"
    told = f"{end} edge {show.eng(edge, 'Hz')}" if edge is not None else f"no {end} edge"
    if side.get("edge_hz") and side.get("lost_db") is not None:
        told += f"; lost at {show.eng(side['edge_hz'], 'Hz')}: {show.decibel(side['lost_db'])} of " \
                f"{show.decibel(side['budget_db'], 'dB')}"
    return told


def _bars(sheet: Sheet, left: float, width: float, top: float, title: str, rows: list[Row], look: str) -> None:
    """A bar a row, to the left of 0 for a credit. The allotment is a mark, and what is lost beyond it hatched."""
    if not rows:
        return
    sheet.text(left, top + 16, title)
    ends = [0.0, *(value for _, value, _ in rows), *(limit for _, _, limit in rows if limit is not None)]
    scale = Scale(min(ends), max(*ends, min(ends) + 1e-9), left + _NAME, left + width - _FIGURE)
    zero, top = scale.at(0.0), top + _HEAD
    for at, (name, value, limit) in enumerate(rows):
        y = top + at * _ROW
        sheet.text(left + _NAME - 6, y + 13, cut(name, _NAME - 6), "end")
        within = value if limit is None or value < 0 else min(value, limit)
        _bar(sheet, zero, scale.at(within), y, "open" if value < 0 else look)
        end = max(scale.at(value), zero)
        if limit is not None:
            if value > limit:
                _bar(sheet, scale.at(limit), scale.at(value), y, "hatched")
            sheet.line(scale.at(limit), y + 1, scale.at(limit), y + _BAR + 7, "thick")
            end = max(end, scale.at(limit))
        figure = show.decibel(value) if title.endswith("dB") else f"{round(value, 1) + 0.0:.1f}"
        sheet.text(end + 6, y + 13, figure, bold=limit is not None and value > limit)
    sheet.line(zero, top, zero, top + len(rows) * _ROW, "axis")


def _bar(sheet: Sheet, begin: float, end: float, y: float, look: str) -> None:
    if abs(end - begin) >= 0.05:
        sheet.rect(min(begin, end), y + 4, abs(end - begin), _BAR, look)


def _key(sheet: Sheet, y: float) -> None:
    """What the looks of the bars mean."""
    x = EDGE
    for look, words in (("light", "lost within the allotment"), ("hatched", "lost beyond it"),
                        ("open", "a credit"), ("dark", "owned")):
        sheet.rect(x, y - 11, 18, _BAR, look)
        sheet.text(x + 24, y, words)
        x += 24 + wide(words) + SIZE
    sheet.line(x + 4, y - 14, x + 4, y + 4, "thick")
    sheet.text(x + 12, y, "allotted")


def _said(ends: dict[str, tuple[list[Row], list[Row]]]) -> str:
    told = []
    for end, (lost, owned) in ends.items():
        if lost:
            name, value, _ = max(lost, key=lambda row: row[1])
            told.append(f"At the {end} end {name} loses most, {show.decibel(value, 'dB')}")
            if owned:
                told[-1] += f"; {owned[0][0]} owns most of the edge, {owned[0][1]:.0f} %"
    return f"{'. '.join(told)}." if told else "The chain has no edges."


def missing(document: Document) -> str:
    """Why there is no account to draw, "" where there is one."""
    rows: list[Entry] = [node for node in entries(document, "nodes")
                         if node["lost_upper_db"] is not None or node["lost_lower_db"] is not None]
    return "" if rows else "the chain has no edges, so nothing is lost or owned at one"
