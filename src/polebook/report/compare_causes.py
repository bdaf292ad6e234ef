"""Which change did how much to a figure, of the text of `polebook compare`."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from polebook.report import compare_words as words
from polebook.report import figures as show
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

_ALWAYS = ("overall.gain_db", "overall.lower_edge_hz", "overall.upper_edge_hz")
_STILL = "0"
_SEEN, _REST = 0.005, 0.015  # shares of the move that a reader is told of: of what adds up otherwise, of what is left


def causes(answer: Document, look: Look) -> Iterator[list[str]]:
    """A block for each figure that is told, and what there is to say of all."""
    told = answer["causes"]
    if answer["stopped"]:
        yield paragraph("stopped: which change did how much is not told", look, "warn")
    if told is None:
        return
    joined = [line for item in told["items"] if item["why"] for line in _joined(item, answer, look)]
    if len(told["items"]) < 2:
        if joined:
            yield joined
        return
    blocks = [block for figure in _told(answer) if (block := _block(figure, answer, look))]
    yield from blocks
    if blocks:
        yield [*paragraph("alone: made by itself; last: made after all others; share: the mean of the two, of the "
                          "whole move, in dB or as a ratio", look, "dim"), *joined]


def _joined(item: Entry, answer: Document, look: Look) -> list[str]:
    numbers = ", ".join(str(number) for number, _ in _numbered(item, answer))
    text = f"{numbers} go together: one of them alone would be no chain ({item['why']})"
    return paragraph(unparted(text), look, hang=3)


def _told(answer: Document) -> Iterator[Entry]:
    """Gain and edges, and what a target judges."""
    names = {target["name"] for target in answer["targets"]}
    figures = {figure["name"]: figure for figure in answer["causes"]["figures"]}
    yield from (figures[name] for name in _ALWAYS if name in figures)
    for name, figure in figures.items():
        if name not in _ALWAYS and words.target_of(name) in names:
            yield figure


def _block(figure: Entry, answer: Document, look: Look) -> list[str]:
    """The move of one figure, change by change; nothing where a reader would see no move."""
    unit = answer["overall"]["after"]["gain_unit"]
    name, before, after = figure["name"], figure["before"], figure["after"]
    way = next(one["way"] for one in answer["figures"] if one["name"] == name)
    rows: list[tuple[float, Row]] = []
    still = 0
    for item, part in zip(answer["causes"]["items"], figure["causes"], strict=True):
        texts = [_move(before, part["alone"], way), _move(part["without"], after, way)]
        if texts == [_STILL, _STILL]:
            still += 1
            continue
        rows.append((abs(part["share"] or 0.0), [_name(item, answer), *texts, Cell(_share(part["share"]), "head")]))
    whole = words.move(before, after, way)
    if not whole and all({*row[1:3]} <= {_STILL, show.NONE} for _, row in rows):
        return []
    title = f"{words.called(name)}: {words.figure(before, name, unit)} to {words.figure(after, name, unit)}"
    title += f", {whole}" if whole else ""
    columns = [Column(head, right=at > 0) for at, head in enumerate((title, "alone", "last", "share"))]
    listed = [row for _, row in sorted(rows, key=lambda row: row[0], reverse=True)]
    lines = table(columns, listed, look)
    return [*lines, *_sums(figure, still, look)]


def _move(before: float | None, after: float | None, way: str) -> str:
    """A move of one change; a dash where one end has no such figure, or is no chain."""
    return show.NONE if before is None or after is None else words.move(before, after, way) or _STILL


def _sums(figure: Entry, still: int, look: Look) -> list[str]:
    """What does not add up, and how many changes have no part in it."""
    said = [f"{still} more {'has' if still == 1 else 'have'} no part in it"] if still else []
    added, rest = figure["added"], figure["rest"]
    if added is not None and abs(1.0 - added) >= _SEEN:
        said.append(f"one at a time they add up to {show.about(added)} of the move, the other "
                    f"{show.about(1.0 - added)} they do to each other")
    if rest is not None and abs(rest) >= _REST:
        said.append(f"{show.about(rest)} is left of the shares, for three or more of them act together")
    return paragraph("; ".join(said), look, "dim") if said else []


def _name(item: Entry, answer: Document) -> str:
    listed = list(_numbered(item, answer))
    more = f" and {len(listed) - 1} more" if len(listed) > 1 else ""
    return f"{listed[0][0]:2}  {words.short(listed[0][1])}{more}"


def _numbered(item: Entry, answer: Document) -> Iterator[tuple[int, Entry]]:
    """The changes of an item with their numbers among those that act."""
    changes: Sequence[Entry] = answer["changes"]
    for at in item["changes"]:
        yield sum(change["acts"] for change in changes[:at]) + 1, changes[at]


def _share(share: float | None) -> str:
    return show.NONE if share is None else f"{round(100.0 * share) + 0:d} %"
