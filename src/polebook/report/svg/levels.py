"""The level diagram: noise floor, smallest and largest signal and clip level, from the source to the load."""

from __future__ import annotations

from math import ceil, floor, log10, sqrt

from polebook.report import figures as show
from polebook.report.document import Document, Entry, entries
from polebook.report.svg.frame import Frame, Scale
from polebook.report.svg.head import EDGE, TOP, called, headed
from polebook.report.svg.labels import Labels
from polebook.report.svg.sheet import Point, Sheet, wide

WHAT = "levels from source to load"
_ROOM = "; the dB are headroom up to the clip level"
WIDTH, LEFT = 780.0, 74.0
_TALL, _FOOT = 330.0, 68.0
_COLUMN, _BESIDE = 52.0, 150.0  # px: least a column; for the names of the lines, right of the last one
_SIGNS = {"clip": "clip level", "largest": "largest signal", "smallest": "smallest signal", "noise": "noise floor"}
_LOOKS = {"clip": "thick", "largest": "curve", "smallest": "dashed", "noise": "dotted"}
_HATCH = 10.0
Column = tuple[str, str, dict[str, float | None]]  # place, what stands before it, level by sign in V peak


def levels(document: Document) -> str:
    """The drawing. Only where some level is known (`missing`)."""
    columns = _columns(document)
    width = max(WIDTH, LEFT + _COLUMN * len(columns) + _BESIDE + EDGE)
    told = any(row["headroom_db"] is not None for row in entries(document, "levels"))
    sheet = headed(document, WHAT + _ROOM * told, width, TOP + _TALL + _FOOT)
    known = [volts for _, _, row in columns for volts in row.values() if volts]
    low, high = floor(log10(min(known))), ceil(log10(max(known) * 1.2))
    x = Scale(0.0, float(len(columns)), LEFT, width - EDGE - _BESIDE)
    frame = Frame(sheet, x, Scale(10.0**low, 10.0**max(high, low + 1), TOP + _TALL, TOP, True))
    up = tuple((value, label) for value, label in frame.y.decades(True))
    frame.grid((), up)
    labels = Labels(sheet, x.begin, frame.y.end, x.end, frame.y.begin)
    _noise_floor(frame, columns)
    lines = {sign: _line(frame, columns, sign) for sign in _SIGNS}
    _clips(frame, columns)
    frame.border((), up, "", "V peak")
    _below(sheet, frame, columns)
    _headroom(frame, document, columns, labels, lines)
    _names(frame, lines)
    return sheet.render(f"{called(document)}: {WHAT}", _said(document))


def missing(document: Document) -> str:
    """Why there is nothing to draw, "" where there is."""
    if document["levels"] is None:
        return "no levels: the chain is not stable"
    known = any(volts for _, _, row in _columns(document) for volts in row.values())
    return "" if known else "no levels: the file states no signal, and neither noise nor clip levels are known"


def _columns(document: Document) -> list[Column]:
    """The source itself where its signal is a voltage, then every node in signal order."""
    after = {node["name"]: node["stage"] or "" for node in entries(document, "nodes")}
    columns: list[Column] = []
    if document["signal"]["unit"] == "V":
        overall = document["overall"]
        columns.append(("EMF", "", {
            "clip": overall["largest_source"], "largest": document["signal"]["largest"],
            "smallest": document["signal"]["smallest"], "noise": _peak(overall["noise_total_input"])}))
    for row in entries(document, "levels"):
        before = after.get(row["node"], "")
        columns.append((row["node"], before if before != row["node"] else "", {
            "clip": row["clip_v"], "largest": row["largest_v"], "smallest": row["smallest_v"],
            "noise": _peak(row["noise_v"])}))
    return columns


def _peak(rms: float | None) -> float | None:
    """The peak of a sine of that power."""
    return None if rms is None else sqrt(2.0) * rms


def _line(frame: Frame, columns: list[Column], sign: str) -> list[Point]:
    """One level from place to place."""
    points = [(frame.x.at(at + 0.5), frame.y.at(volts)) for at, (_, _, row) in enumerate(columns)
              if (volts := row[sign])]
    if sign != "clip":
        frame.sheet.path(points, _LOOKS[sign])
        for point in points:
            frame.sheet.circle(*point, 3.0, "solid" if sign == "largest" else "open")
    return points


def _noise_floor(frame: Frame, columns: list[Column]) -> None:
    """What lies under the noise."""
    points = [(frame.x.at(at + 0.5), frame.y.at(volts)) for at, (_, _, row) in enumerate(columns)
              if (volts := row["noise"])]
    if len(points) > 1:
        bottom = frame.y.begin
        frame.sheet.path([*points, (points[-1][0], bottom), (points[0][0], bottom)], "dots", closed=True)


def _clips(frame: Frame, columns: list[Column]) -> None:
    """A bar at each clip level, hatched above it."""
    for at, (_, _, row) in enumerate(columns):
        if row["clip"]:
            left, right, y = frame.x.at(at + 0.14), frame.x.at(at + 0.86), frame.y.at(row["clip"])
            frame.sheet.rect(left, y - _HATCH, right - left, _HATCH, "hatch")
            frame.sheet.line(left, y, right, y, "thick")


def _below(sheet: Sheet, frame: Frame, columns: list[Column]) -> None:
    """Names of the places, and what stands between them."""
    y = frame.y.begin
    for at, (place, before, _) in enumerate(columns):
        x = frame.x.at(at + 0.5)
        sheet.line(x, y, x, y + 4, "axis")
        sheet.text(x, y + 17, place, "middle")
        if before and at and wide(before) < frame.x.at(1.0) - frame.x.at(0.0) - 8:
            sheet.text(frame.x.at(at), y + 36, before, "middle")
            sheet.line(frame.x.at(at), y, frame.x.at(at), y + 24, "thin")
    sheet.text((frame.x.begin + frame.x.end) / 2, y + 56, "nodes, and the stages between them", "middle")


def _headroom(
    frame: Frame, document: Document, columns: list[Column], labels: Labels, lines: dict[str, list[Point]]
) -> None:
    """The headroom at every node, between the largest signal and the clip level."""
    for sign, points in lines.items():
        if sign != "clip":
            labels.shun(points)
    listed = {row["node"]: row for row in entries(document, "levels")}
    for at, (_, _, row) in enumerate(columns):
        if row["clip"]:
            y = frame.y.at(row["clip"])
            labels.block(frame.x.at(at + 0.14), y - _HATCH, frame.x.at(at + 0.86), y)
    for at, (place, _, row) in enumerate(columns):
        room = listed.get(place, {}).get("headroom_db")
        if room is None or not row["clip"]:
            continue
        labels.put(f"{show.decibel(room)} dB", frame.x.at(at + 0.5), frame.y.at(row["clip"]), ("s", "n"), room < 0)


def _names(frame: Frame, lines: dict[str, list[Point]]) -> None:
    """What each line is, right of the last place; names that would meet are moved apart."""
    last = sorted(((points[-1][1], sign) for sign, points in lines.items() if points))
    heights: list[float] = []
    for y, _ in last:
        heights.append(max(y, heights[-1] + 17) if heights else y)
    over = max(heights[-1] - frame.y.begin + 4, 0.0) if heights else 0.0
    x = frame.x.end
    for (y, sign), height in zip(last, heights, strict=True):
        frame.sheet.path([(lines[sign][-1][0], y), (x + 6, height - over)], "thin")
        frame.sheet.text(x + 10, height - over + 4, _SIGNS[sign])


def _said(document: Document) -> str:
    overall: Entry = document["overall"]
    told = []
    if overall["clips_first"] is not None:
        told.append(f"{overall['clips_first']} clips first, at "
                    f"{show.eng(overall['largest_source'], document['signal']['unit'])} peak of source")
    for key, words in (("dynamic_range_db", "dynamic range"), ("noise_margin_db", "smallest signal over the noise")):
        if overall[key] is not None:
            told.append(f"{words} {show.decibel(overall[key], 'dB')}")
    return f"{'; '.join(told)}." if told else "Levels at every node."
