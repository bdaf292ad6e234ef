"""Gain and phase over frequency: the edges, the corners that the targets set, poles and zeros below."""

from __future__ import annotations

from math import sqrt
from typing import Any

from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.svg.frame import Frame, Scale, crossing
from polebook.report.svg.head import EDGE, TOP, called, headed
from polebook.report.svg.labels import Labels
from polebook.report.svg.roots import STRIP, strip
from polebook.report.svg.sheet import Point, Sheet, wide
from polebook.report.ticks import Ticks, evenly, short, step_of

WHAT = "gain and phase over frequency"
WIDTH, LEFT = 780.0, 68.0
_GAIN, _PHASE, _FOOT = 290.0, 120.0, 48.0  # heights of the parts
_GAP = 10.0
_BELOW_DB, _LEAST_DB = 46.0, 10.0  # below the midband that are shown; that the axis spans
_DEGREES = (15.0, 30.0, 45.0, 90.0, 180.0, 360.0, 720.0, 1800.0, 3600.0)
_WALL = 9.0  # px of hatching on the wrong side of a limit
_RISES = 0.05  # dB of peaking that are marked
_MOST_SIGNS = 60  # of a measured sweep, about
_CORNER = "3 dB below midband"


def response(document: Document) -> str:
    """The drawing; with a word over it where no signal will follow the curves."""
    told = document["response"]
    height = TOP + _GAIN + STRIP + _PHASE + 2 * _GAP + _FOOT
    sheet = headed(document, WHAT, WIDTH, height)
    x = Scale(told["from_hz"], told["to_hz"], LEFT, WIDTH - EDGE - 8, True)
    up, ticks = _decibels(document, told)
    frame = Frame(sheet, x, up)
    across = x.decades()
    frame.grid(across, ticks)
    labels = Labels(sheet, x.begin, up.end, x.end, up.begin)
    _limits(frame, document, labels)
    pieces = frame.curve(told["hz"], told["gain_db"], "curve")
    for piece in pieces:
        labels.shun(piece)
    unit = "dB" if document["overall"]["gain_unit"] == "V/V" else "dBΩ"
    frame.border(across, ticks, "", f"gain, {unit}", labelled=False)
    measured = _measured(frame, document)
    for _, _, seen in measured:
        labels.shun(seen)
    _marks(frame, document, labels, pieces)
    for what, name, seen in measured:
        labels.put(f"{what}: {name}", *seen[-1], ("sw", "w", "s", "nw", "n"), fewer=what)
    if told["note"]:
        sheet.rect(x.begin + 8, up.end + 8, wide(told["note"], bold=True) + 12, 20, "open")
        sheet.text(x.begin + 14, up.end + 22, told["note"], bold=True)
    top = up.begin + _GAP
    strip(sheet, x, document, top)
    _phase(sheet, x, across, told, top + STRIP + _GAP)
    return sheet.render(f"{called(document)}: {WHAT}", _said(document))


def missing(document: Document) -> str:
    """Why there is nothing to draw, "" where there is."""
    told = any(value is not None for value in document["response"]["gain_db"])
    return "" if told else "no response: nothing passes at any frequency"


def _decibels(document: Document, told: Entry) -> tuple[Scale, Ticks]:
    """The axis of the gain: all that rises, and as much of the slopes as tells."""
    known = [value for value in told["gain_db"] if value is not None] or [0.0]
    limit = document["limits"]
    middle = max(known) if told["mid_db"] is None else min(told["mid_db"], max(known))
    most = [*known]
    if limit["gain_db"] is not None:
        most.append(limit["gain_db"] + limit["gain_tolerance_db"])
    least = [max(min(known), middle - _BELOW_DB)]
    if limit["gain_db"] is not None:
        least.append(limit["gain_db"] - limit["gain_tolerance_db"])
    low, high = min(least), max(*most, min(least) + _LEAST_DB)
    step = step_of(high - low, 8)
    low, high = step * (low // step), high + 0.18 * (high - low)
    return Scale(low, high, TOP + _GAIN, TOP), evenly(low, high, 10, step=step)


def _limits(frame: Frame, document: Document, labels: Labels) -> None:
    """What a curve that meets the targets keeps out of, hatched: 3 dB down between the wanted edges."""
    limit, corner = document["limits"], document["response"]["corner_db"]
    overall, x = document["overall"], frame.x
    if corner is None or not frame.y.holds(corner):
        return
    y, bottom = frame.y.at(corner), frame.y.begin
    ends = {}
    for end, beyond in (("lower", x.low), ("upper", x.high)):
        wanted, found = limit[f"{end}_hz"], overall[f"{end}_edge_hz"]
        ends[end] = x.inside(wanted if wanted is not None else found if found is not None else beyond)
    left, right = ends["lower"], ends["upper"]
    if left >= right:
        return
    if limit["lower_hz"] is None and limit["upper_hz"] is None:
        frame.sheet.line(left, y, right, y, "dotted")
        labels.put(_CORNER, left + _WALL, y, ("se",))
        return
    frame.sheet.rect(left, y, right - left, _WALL, "hatch")
    frame.sheet.line(left, y, right, y, "limit")
    for end, at, inward in (("lower", left, 1), ("upper", right, -1)):
        if limit[f"{end}_hz"] is not None:
            frame.sheet.rect(at if inward > 0 else at - _WALL, y, _WALL, bottom - y, "hatch")
            frame.sheet.line(at, y, at, bottom, "limit")
            labels.block(at - _WALL, y, at + _WALL, bottom)
    labels.block(left, y, right, y + _WALL)
    labels.put(_CORNER, left + _WALL, y + _WALL, ("se",))


def _marks(frame: Frame, document: Document, labels: Labels, pieces: list[list[Point]]) -> None:
    """Edges, wanted edges, the wanted gain and the peak, each named beside its sign."""
    limit, overall = document["limits"], document["overall"]
    x, y, corner = frame.x, frame.y, document["response"]["corner_db"]
    _peak(frame, document, labels)
    if corner is not None and y.holds(corner):
        for end, side in (("lower", ("w", "nw", "sw", "n")), ("upper", ("e", "ne", "se", "n"))):
            found = overall[f"{end}_edge_hz"]
            if x.holds(found):
                frame.sheet.circle(x.at(found), y.at(corner), 4.5, "solid")
                labels.block(x.at(found) - 5, y.at(corner) - 5, x.at(found) + 5, y.at(corner) + 5)
                told = show.eng(found, "Hz")
                labels.put(f"{end} edge {told}", x.at(found), y.at(corner), side, bold=True, fewer=told)
        for end, words, way, up in (("lower", "at most", 1, 16), ("upper", "at least", -1, 38)):
            wanted = limit[f"{end}_hz"]
            if wanted is not None:
                labels.put(f"wanted: {end} edge {words} {short(wanted, 'Hz')}", x.inside(wanted) + way * _WALL,
                           y.begin - up, ("e" if way > 0 else "w", "n"))
    _wanted_gain(frame, document, labels, pieces)


def _wanted_gain(frame: Frame, document: Document, labels: Labels, pieces: list[list[Point]]) -> None:
    """A bracket from the least to the most gain that is wanted, where it is quoted."""
    limit, overall = document["limits"], document["overall"]
    if limit["gain_db"] is None:
        return
    unit = "dB" if overall["gain_unit"] == "V/V" else "dBΩ"
    x, y, off = frame.x, frame.y, limit["gain_tolerance_db"]
    hz = limit["reference_hz"] or overall["reference_hz"] or sqrt(x.low * x.high)
    at, top, bottom = x.inside(hz), y.inside(limit["gain_db"] + off), y.inside(limit["gain_db"] - off)
    for height in (top, bottom):
        frame.sheet.line(at - 14, height, at + 14, height, "thick")
    frame.sheet.line(at, top, at, bottom, "thin")
    labels.block(at - 14, top, at + 14, bottom)
    words = f"wanted: {limit['gain_db']:.4g} {unit} ±{off:g} dB"
    drawn = [height for height in (crossing(piece, at) for piece in pieces) if height is not None]
    lowest = max([bottom, *drawn])
    labels.put(words, at, lowest + _WALL, ("s",))


def _peak(frame: Frame, document: Document, labels: Labels) -> None:
    """The top of a response that rises above its midband, and how far it may."""
    told, peaking = document["response"], document["overall"]["peaking_db"]
    known = [(value, hz) for hz, value in zip(told["hz"], told["gain_db"], strict=True) if value is not None]
    if peaking is None or peaking < _RISES or not known:
        return
    value, hz = max(known)
    if not (frame.y.holds(value) and frame.x.holds(hz)):
        return
    words = f"peak +{show.decibel(peaking, 'dB')} at {show.eng(hz, 'Hz')}"
    if document["limits"]["peaking_db"] is not None:
        words += f" (at most {document['limits']['peaking_db']:g} dB)"
    at, up = frame.x.at(hz), frame.y.at(value)
    frame.sheet.circle(at, up, 3.5, "open")
    labels.block(at - 4, up - 4, at + 4, up + 4)
    labels.put(words, at, up, ("n", "nw", "ne", "sw", "se"))


def _measured(frame: Frame, document: Document) -> list[tuple[str, str, list[Point]]]:
    """Sweeps from the bench as rows of signs: what they are, the name of the bench, and the points in sight, px."""
    found = []
    for number, sweep in enumerate(document["sweeps"]):
        seen = [(frame.x.at(hz), frame.y.at(db)) for hz, db in zip(sweep["hz"], sweep["gain_db"], strict=True)
                if frame.x.holds(hz) and frame.y.holds(db)]
        for at in range(0, len(seen), max(len(seen) // _MOST_SIGNS, 1)):
            x, y = seen[at]
            if number % 2:
                frame.sheet.rect(x - 2.5, y - 2.5, 5.0, 5.0, "open")
            else:
                frame.sheet.circle(x, y, 2.6, "open")
        if seen:
            sign = "measured (squares)" if number % 2 else "measured"
            found.append((sign, sweep["name"], seen))
    return found


def _phase(sheet: Sheet, x: Scale, across: Ticks, told: Entry, top: float) -> None:
    """The phase below, over the same frequencies."""
    known = [value for value in told["phase_deg"] if value is not None] or [0.0]
    low, high = min(known), max(known)
    step = next((step for step in _DEGREES if (high - low) / step <= 4), _DEGREES[-1])
    low, high = step * (low // step), step * -(-high // step)
    up = Scale(low, max(high, low + step), top + _PHASE, top)
    ticks = tuple((low + k * step, f"{low + k * step:.0f}") for k in range(round((up.high - low) / step) + 1))
    frame = Frame(sheet, x, up)
    frame.grid(across, ticks)
    frame.curve(told["hz"], told["phase_deg"], "dashed")
    frame.border(across, ticks, "frequency, Hz", "phase, °")


def _said(document: Document) -> str:
    """The drawing in a sentence or two, for who can't see it."""
    overall: Any = document["overall"]
    unit = "dB" if overall["gain_unit"] == "V/V" else "dBΩ"
    told = [f"Gain {show.decibel(overall['gain_db'], unit)} at midband"]
    told += [f"{end} edge {show.eng(overall[f'{end}_edge_hz'], 'Hz')}" for end in ("lower", "upper")
             if overall[f"{end}_edge_hz"] is not None]
    wanted = [f"{end} {show.eng(document['limits'][f'{end}_hz'], 'Hz')}" for end in ("lower", "upper")
              if document["limits"][f"{end}_hz"] is not None]
    text = ", ".join(told) + (f"; wanted edges: {', '.join(wanted)}" if wanted else "") + "."
    note = document["response"]["note"]
    return f"{note}. {text}" if note else text
