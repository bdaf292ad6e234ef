"""A strip of poles and zeros below the response, each named after its stage."""

from __future__ import annotations

from polebook.report.document import Document, entries
from polebook.report.roots import pairs
from polebook.report.svg.frame import Scale
from polebook.report.svg.sheet import Sheet, wide

STRIP = 46.0  # px that it is tall
_SIGN = 4.0  # px from the middle of a sign to its end


def strip(sheet: Sheet, x: Scale, document: Document, top: float) -> None:
    """A strip of poles (crosses, a pair as a double one) and zeros (rings), named after their stages."""
    sheet.rect(x.begin, top, x.end - x.begin, STRIP, "frame")
    rows = {"poles": top + STRIP - 30, "zeros": top + STRIP - 10}
    for what, y in rows.items():
        listed = document[what]
        sheet.text(x.begin - 7, y + 4, what, "end")
        if listed is None:
            sheet.text(x.begin + 8, y + 4, "not resolved")
            continue
        seen = [(x.at(root["hz"]), root, pair) for root, pair in pairs(entries(document, what)) if x.holds(root["hz"])]
        for at, root, pair in seen:
            _sign(sheet, at, y, what, pair, root["re"] > 0)
        end = x.begin
        for begin, last, names in _together([(at, root["stage"] or "") for at, root, _ in seen], x.end):
            if last + 3 * _SIGN + wide(names) <= x.end:
                sheet.text(last + 2 * _SIGN, y + 4, names)
                end = last + 2 * _SIGN + wide(names)
            elif begin - 3 * _SIGN - wide(names) >= end:
                sheet.text(begin - 3 * _SIGN, y + 4, names, "end")


def _together(places: list[tuple[float, str]], end: float) -> list[tuple[float, float, str]]:
    """(first px, last px, names) of signs that have no room for their names between them, nor before the end."""
    groups: list[tuple[float, float, list[str]]] = []
    for at, name in places:
        if groups and at - groups[-1][1] < _width(groups[-1][2]):
            begin, _, names = groups[-1]
            groups[-1] = (begin, at, names if name in names else [*names, name])
        else:
            groups.append((at, at, [name]))
    while len(groups) > 1 and groups[-1][1] + _width(groups[-1][2]) > end \
            and groups[-2][1] + _width(groups[-2][2]) > groups[-1][0] - _width(groups[-1][2]):
        begin, _, names = groups[-2]
        groups[-2:] = [(begin, groups[-1][1], list(dict.fromkeys([*names, *groups[-1][2]])))]
    return [(begin, last, ", ".join(filter(None, names))) for begin, last, names in groups]


def _width(names: list[str]) -> float:
    """What the names of a group take behind its last sign."""
    return 4 * _SIGN + wide(", ".join(names))


def _sign(sheet: Sheet, at: float, y: float, what: str, pair: bool, right: bool) -> None:
    """A cross or a ring; two of a pair; in a box where it lies in the right half-plane."""
    for off in ((-3.0, 3.0) if pair else (0.0,)):
        if what == "zeros":
            sheet.circle(at + off, y, _SIGN, "thin")
        else:
            for way in (-1, 1):
                sheet.line(at + off - _SIGN, y - way * _SIGN, at + off + _SIGN, y + way * _SIGN, "axis")
    if right:
        reach = _SIGN + (6.0 if pair else 3.0)
        sheet.rect(at - reach, y - _SIGN - 3, 2 * reach, 2 * _SIGN + 6, "thin")
