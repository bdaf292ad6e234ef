"""The text and the CSV of `polebook sweep`, from its JSON answer."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from polebook.report import figures as show
from polebook.report.csvout import csv_text, titled
from polebook.report.document import Document, Entry
from polebook.report.look import Look, cells
from polebook.report.sections import paragraph
from polebook.report.table import GAP, Cell, Column, table

_NOW = "◂ now"
_SAME = 1e-9  # relative: a point and the file's value that a reader can't tell apart


def sweep(answer: Document, look: Look) -> str:
    """The points as a table (several where one line can't hold it), and what there is to say of them."""
    lines = [*_head(answer, look), ""]
    points = in_order(answer)
    if points:
        for block in _blocks(_columns(answer, points), look):
            lines += [*block, ""]
    lines += _remarks(answer, points, look)
    return "\n".join(lines).rstrip("\n") + "\n"


def in_order(answer: Document) -> list[Entry]:
    """The points, today's among them at its place where none of them is it."""
    points, now = list(answer["points"]), answer["now"]
    if now is None or any(_is_now(point, answer) for point in points):
        return points
    falling = len(points) > 1 and points[-1]["value"] < points[0]["value"]
    at = sum((point["value"] > now["value"]) == falling for point in points)
    return [*points[:at], now, *points[at:]]


def _is_now(point: Entry, answer: Document) -> bool:
    now = answer["now"]
    return now is not None and abs(point["value"] - now["value"]) <= _SAME * abs(now["value"])


def _head(answer: Document, look: Look) -> list[str]:
    path, unit, points = answer["path"], answer["unit"], answer["points"]
    file = answer["files"][0]["file"]
    ends = f" from {show.by_unit(points[0]['value'], unit, 4)} to {show.by_unit(points[-1]['value'], unit, 4)}"
    values = f"{len(points)} value{'s' * (len(points) != 1)}, {answer['spacing']}"
    now = answer["now"]
    today = f"now {show.by_unit(now['value'], unit, 4)}" if now else "the file does not give it"
    head = f"{path}{ends if points else ''}: {values}; {today}"
    return [" " + look.paint(look.text(file), "head"), *paragraph(head, look)]


def _columns(answer: Document, points: Sequence[Entry]) -> list[tuple[str, list[str]]]:
    """(heading, cells) of every column, the swept value first."""
    path, unit = answer["path"], answer["unit"]
    stem, _, key = path.rpartition(".")
    gain_unit = answer["gain_unit"]
    columns = [
        (f"{stem}\n{key}\n{_heading(unit)}", [show.bare(point["value"], unit, 4) for point in points]),
        (f"gain\n{'dB' if gain_unit == 'V/V' else 'dBΩ'}", [show.decibel(point["gain_db"]) for point in points]),
        ("lower\nHz", [show.eng(point["lower_edge_hz"]) for point in points]),
        ("upper\nHz", [show.eng(point["upper_edge_hz"]) for point in points]),
    ]
    for figure in answer["figures"]:
        name, unit = figure["name"], figure["unit"]
        stem, _, key = name.rpartition(".")
        columns.append((f"{stem}\n{key}\n{_heading(unit)}", [show.bare(point[name], unit) for point in points]))
    marks = [" ".join(_marks(answer, point)) for point in points]
    return [*columns, ("", marks)]


def _heading(unit: str) -> str:
    return "%" if unit == "share" else unit or "-"


def _marks(answer: Document, point: Entry) -> Iterable[str]:
    if _is_now(point, answer):
        yield _NOW
    if point["why"]:
        yield "*"


def _blocks(columns: list[tuple[str, list[str]]], look: Look) -> Iterable[list[str]]:
    """Tables of as many columns as a line holds, each with the swept value first and the marks last."""
    first, *middle, marks = columns
    ends = _width(first, look) + _width(marks, look) + GAP
    room = look.width - 1 - ends
    block: list[tuple[str, list[str]]] = []
    used = 0
    for column in middle:
        need = _width(column, look) + GAP
        if block and used + need > room:
            yield _table([first, *block, marks], look)
            block, used = [], 0
        block.append(column)
        used += need
    yield _table([first, *block, marks], look)


def _width(column: tuple[str, list[str]], look: Look) -> int:
    return max(cells(look.text(text)) for text in (*column[0].split("\n"), *column[1]))


def _table(columns: list[tuple[str, list[str]]], look: Look) -> list[str]:
    heads = [Column(heading, right=at < len(columns) - 1) for at, (heading, _) in enumerate(columns)]
    rows = []
    for at in range(len(columns[0][1])):
        texts = [column[1][at] for column in columns]
        now = texts[-1].startswith(_NOW)
        rows.append([Cell(text, "head" if now else "") for text in texts])
    return table(heads, rows, look)


def _remarks(answer: Document, points: Sequence[Entry], look: Look) -> list[str]:
    """Why figures are missing, by runs of points; that nothing moved; that it was stopped."""
    lines = []
    at = 0
    while at < len(points):
        end = at
        while end + 1 < len(points) and points[end + 1]["why"] == points[at]["why"]:
            end += 1
        if points[at]["why"]:
            first, last = (show.by_unit(points[k]["value"], answer["unit"], 4) for k in (at, end))
            where = f"at {first}" if at == end else f"from {first} to {last}"
            lines += paragraph(f"* {where}: {points[at]['why']}", look, hang=3)
        at = end + 1
    if len(points) > 1 and all(_figures(point) == _figures(points[0]) for point in points):
        lines += paragraph(f"nothing here moves with {answer['path']}", look)
    if answer["stopped"]:
        lines += paragraph(f"stopped after {len(answer['points'])} of {answer['total']} values", look, "warn")
    return lines


def _figures(point: Entry) -> dict[str, object]:
    return {key: value for key, value in point.items() if key not in ("value", "why")}


def sweep_csv(answer: Document) -> str:
    """One row a point, the file's own value among them and marked."""
    names = [figure["name"] for figure in answer["figures"]]
    units = {figure["name"]: "1" if figure["unit"] == "share" else figure["unit"] for figure in answer["figures"]}
    heading = [
        titled(answer["path"], answer["unit"]),
        titled("gain", answer["gain_unit"]),
        titled("gain", "dB"),
        titled("lower edge", "Hz"),
        titled("upper edge", "Hz"),
        *(titled(name, units[name]) for name in names),
        "now",
        "why",
    ]
    keys = ("value", "gain", "gain_db", "lower_edge_hz", "upper_edge_hz", *names)
    rows = ([*(point[key] for key in keys), _is_now(point, answer), point["why"]] for point in in_order(answer))
    return csv_text(heading, rows)
