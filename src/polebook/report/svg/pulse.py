"""The step response over time, with what is read off it: rise, overshoot, settling."""

from __future__ import annotations

from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.svg.frame import Frame, Scale
from polebook.report.svg.head import EDGE, TOP, called, headed
from polebook.report.svg.labels import Labels
from polebook.report.svg.sheet import Point
from polebook.report.ticks import evenly, short, step_of

WHAT = "step response, couplings and bypasses shorted"
WIDTH, LEFT = 780.0, 68.0
_TALL, _FOOT = 330.0, 48.0
_SEEN = 0.05  # % of overshoot or undershoot that is marked
_BAND = 1.0  # % either side of the final value within which the response has settled
_HEAD = 4.0  # px of an arrow's head
_SETTLED = (("within 1 %", "settling_1_s", 60.0), ("within 0.1 %", "settling_01_s", 110.0))
"""Mark, its figure, and how many px below it that is told."""


def pulse(document: Document) -> str:
    """The drawing. Only where there is a response (`missing`)."""
    told = document["pulse"]
    sheet = headed(document, WHAT, WIDTH, TOP + _TALL + _FOOT)
    times = [t for t, _ in told["curve"]]
    heights = [100.0 * y for _, y in told["curve"]]
    low, high = min(0.0, *heights), max(100.0, *heights)
    step = step_of(high - low, 6)
    frame = Frame(sheet, Scale(0.0, times[-1], LEFT, WIDTH - EDGE - 8),
                  Scale(min(low - 0.04 * (high - low), 0.0), high + 0.14 * (high - low), TOP + _TALL, TOP))
    across = tuple((value, short(value)) if value else (0.0, "0") for value, _ in evenly(0.0, times[-1], 8))
    up = evenly(frame.y.low, frame.y.high, 10, step=step)
    frame.grid(across, up)
    labels = Labels(sheet, frame.x.begin, frame.y.end, frame.x.end, frame.y.begin)
    _final(frame)
    _wanted(frame, document, labels)
    for piece in frame.curve(times, list(heights), "curve"):
        labels.shun(piece)
    frame.border(across, up, "time after the step, s", "% of the final value")
    _marks(frame, document, labels)
    return sheet.render(f"{called(document)}: {WHAT}", _said(document))


def missing(document: Document) -> str:
    """Why there is no response to draw, "" where there is one."""
    told = document["pulse"]
    return "" if told["curve"] else f"no step response: {told['why']}"


def _final(frame: Frame) -> None:
    """The final value, and the band around it in which the response has settled."""
    top, bottom = frame.y.at(100.0 + _BAND), frame.y.at(100.0 - _BAND)
    frame.sheet.rect(frame.x.begin, top, frame.x.end - frame.x.begin, bottom - top, "dots")
    frame.sheet.line(frame.x.begin, frame.y.at(100.0), frame.x.end, frame.y.at(100.0), "axis")


def _wanted(frame: Frame, document: Document, labels: Labels) -> None:
    """How far the response may overshoot."""
    over = document["limits"]["overshoot_share"]
    if over is not None and frame.y.holds(100.0 + 100.0 * over):
        y = frame.y.at(100.0 + 100.0 * over)
        frame.sheet.rect(frame.x.begin, y - 9, frame.x.end - frame.x.begin, 9, "hatch")
        frame.sheet.line(frame.x.begin, y, frame.x.end, y, "limit")
        labels.put(f"wanted: overshoot at most {100.0 * over:g} %", frame.x.end - 4, y - 8, ("nw",))
        labels.block(frame.x.begin, y - 9, frame.x.end, y + 1)


def _marks(frame: Frame, document: Document, labels: Labels) -> None:
    """Every figure where it is read."""
    marks = {row["mark"]: (frame.x.at(row["time_s"]), frame.y.inside(100.0 * row["height"]))
             for row in document["pulse"]["marks"] or () if frame.x.holds(row["time_s"])}
    overall = document["overall"]
    settled = [(mark, key, down) for mark, key, down in _SETTLED if mark in marks]
    for mark, _, _ in settled:
        x, y = marks[mark]
        frame.sheet.line(x, y, x, frame.y.begin, "dotted")
        labels.shun([(x, y), (x, frame.y.begin)])
    if "90 %" in marks:
        labels.shun([marks["90 %"], (marks["90 %"][0], frame.y.begin)])
    for mark in ("10 %", "90 %", "top", "dip", "within 1 %", "within 0.1 %"):
        if mark in marks and _told(mark, document):
            frame.sheet.circle(*marks[mark], 3.5, "open")
    if "10 %" in marks and "90 %" in marks:
        _rise(frame, document, labels, marks["10 %"], marks["90 %"])
    if "top" in marks and _told("top", document):
        labels.put(f"overshoot {_percent(overall['overshoot_percent'])}", *marks["top"], ("ne", "n", "se", "s", "sw"))
    if "dip" in marks and _told("dip", document):
        labels.put(f"undershoot {_percent(document['pulse']['undershoot_percent'])}", *marks["dip"], ("e", "ne", "se"))
    for mark, key, down in settled:
        x, y = marks[mark]
        labels.put(f"{mark} after {show.eng(overall[key], 's')}", x, y + down, ("e", "w"))


def _told(mark: str, document: Document) -> bool:
    """Whether a mark's figure is worth a word."""
    keys = {"top": document["overall"]["overshoot_percent"], "dip": document["pulse"]["undershoot_percent"]}
    return mark not in keys or (keys[mark] or 0.0) >= _SEEN


def _rise(frame: Frame, document: Document, labels: Labels, low: Point, high: Point) -> None:
    """An arrow from 10 to 90 %, over the time that it takes."""
    y = frame.y.at(50.0)
    for x, top in (low, high):
        frame.sheet.line(x, min(top, y), x, frame.y.begin, "dotted")
    inside = high[0] - low[0] > 4 * _HEAD
    frame.sheet.line(low[0], y, high[0], y, "axis")
    for x, way in ((low[0], 1), (high[0], -1)):
        way = way if inside else -way
        frame.sheet.path([(x, y), (x + way * 2 * _HEAD, y - _HEAD), (x + way * 2 * _HEAD, y + _HEAD)], "solid", True)
    words = f"rise, 10-90 %: {show.eng(document['overall']['rise_time_s'], 's')}"
    wanted = document["limits"]["rise_s"]
    if wanted is not None:
        words += f" (wanted: at most {short(wanted, 's')})"
    labels.put(words, high[0] + (0 if inside else 2 * _HEAD), y, ("e", "se", "ne"))


def _percent(value: float) -> str:
    return f"{value:.2f} %"


def _said(document: Document) -> str:
    overall: Entry = document["overall"]
    told = [f"Rise from 10 to 90 % in {show.eng(overall['rise_time_s'], 's')}"]
    if overall["overshoot_percent"] is not None:
        told.append(f"overshoot {_percent(overall['overshoot_percent'])}")
    if overall["settling_1_s"] is not None:
        told.append(f"within 1 % after {show.eng(overall['settling_1_s'], 's')}")
    return f"{', '.join(told)}."
