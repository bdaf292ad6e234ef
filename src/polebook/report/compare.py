"""The text of `polebook compare`: what changed, what it did to targets and figures, and which change did how much."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from polebook.report import compare_words as words
from polebook.report import figures as show
from polebook.report.compare_causes import causes
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph, unparted
from polebook.report.table import Cell, Column, Row, table

_MET = {True: Cell("met", "good"), False: Cell("missed", "bad"), None: Cell("not judged", "warn")}
_SHORT = 8  # digits of a hash


def compare(answer: Document, look: Look) -> str:
    """The whole answer."""
    blocks = [head(answer["files"], look), _changes(answer, look), _stability(answer, look)]
    if answer["changes"]:
        blocks += [_judged(answer, look), _figures(answer, look), *causes(answer, look), _cautions(answer, look)]
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def head(files: Sequence[Entry], look: Look) -> list[str]:
    """What is compared with what."""
    names = [file["file"] for file in files]
    if names[0] == names[1]:
        lines = [" " + look.paint(look.text(names[0]), "head")]
        return lines + [line for word, file in zip(("before", "after"), files, strict=True)
                        for line in paragraph(f"{word:7} {_state(file)}", look, hang=9)]
    return [f" {word:7} {look.paint(look.text(name), 'head')}"
            for word, name in zip(("before", "after"), names, strict=True)]


def _state(file: Entry) -> str:
    there = file["revision"]
    if there is None:
        return "the file as it is"
    moved = f", as {there['name']}" if there["name"].rpartition("/")[2] != file["file"].rpartition("/")[2] else ""
    return f"{there['hash'][:_SHORT]} of {there['date'][:10]}{moved}: {there['subject'] or 'without a subject'}"


def _changes(answer: Document, look: Look) -> list[str]:
    """Every change; those that act are numbered, for the tables name them so."""
    listed = answer["changes"]
    lines: list[str] = []
    number = 0
    for change in listed:
        if change["acts"]:
            number += 1
            lines += paragraph(unparted(f"{number:2}  {change['text']}"), look, hang=5)
    quiet = [change for change in listed if not change["acts"]]
    lines += [line for change in quiet for line in paragraph(unparted(f" -  {change['text']}"), look, hang=5)]
    if rest := _rest(answer, bool(quiet)):
        lines += paragraph(rest, look, "dim")
    return lines


def _rest(answer: Document, quiet: bool) -> str:
    """What is only counted."""
    told = ["what is marked - moves no figure" + (", tolerances none but the yield" if _loose(answer) else "")] * quiet
    if count := answer["comments"]:
        told.append(f"{count} comment{'s differ' if count > 1 else ' differs'}")
    if count := answer["spelled"]:
        told.append(f"{count} values are spelled otherwise and mean the same" if count > 1
                    else "1 value is spelled otherwise and means the same")
    if answer["changes"] or told:
        return "; ".join(told)
    return "they say the same, laid out otherwise" if answer["laid_out"] else "no difference"


def _loose(answer: Document) -> bool:
    """Whether tolerances changed that a yield is judged with."""
    return any(change["sort"] == "tolerance" for change in answer["changes"]) and any(
        target["name"] == "yield" for target in answer["targets"])


def _stability(answer: Document, look: Look) -> list[str]:
    """That a chain oscillates, before any figure; and a gain that is turned over."""
    old, new = answer["overall"]["before"], answer["overall"]["after"]
    lines = []
    for word, side in (("before", old), ("after", new)):
        if side["unstable"]:
            lines += paragraph(f"{word}, the chain oscillates and has no edges", look, "bad")
        elif side["unstable"] is None:
            lines += paragraph(f"{word}, whether the chain is stable could not be told", look, "bad")
    if old["gain_unit"] != new["gain_unit"]:
        lines += paragraph("one has a source of voltage, one of current: gains and input noise are not compared", look)
    elif old["gain"] * new["gain"] < 0:
        lines += paragraph("the sign of the gain is turned over", look, "warn")
    names = {one["before"]: one["after"] for one in answer["changes"] if one["sort"] == "stage renamed"}
    firsts = [names.get(old["clips_first"], old["clips_first"]), new["clips_first"]]
    if firsts[0] != firsts[1]:
        firsts = [name or "nothing known" for name in firsts]
        lines += paragraph(f"clips first: {firsts[0]} before, {firsts[1]} after", look)
    return lines


def _judged(answer: Document, look: Look) -> list[str]:
    """The targets, where one of them is not as it was."""
    if all(target["before"] == target["after"] for target in answer["targets"]):
        return []
    names = ("targets", "want", "before", "after", "margin", "")
    columns = [Column(name, right=bool(name) and at > 0) for at, name in enumerate(names)]
    return table(columns, list(_targets(answer)), look)


def _targets(answer: Document) -> Iterator[Row]:
    """Each target judged by its own file's wants, those first whose figure moved most."""
    units = [answer["overall"][side]["gain_unit"] for side in ("before", "after")]
    for target in answer["targets"]:
        name, before, after = target["name"], target["before"], target["after"]
        got = [show.target(name, side["got"], unit) if side else show.NONE
               for side, unit in zip((before, after), units, strict=True)]
        want = show.target(name, (after or before)["want"], units[after is not None])
        yield [name, want, *got, show.share(after["margin"] if after else None), verdict(before, after)]


def verdict(before: Entry | None, after: Entry | None) -> Cell:
    """Met or missed, and what it was before where that is otherwise."""
    if after is None:
        return Cell("no target now", "warn")
    now = _MET[after.get("met")]
    old = None if before is None else _MET[before.get("met")]
    return Cell(now.text + (", new" if old is None else f", was {old.text}" if old != now else ""), now.style)


def _figures(answer: Document, look: Look) -> list[str]:
    """Every figure that moved, the largest move first, and how many did not."""
    unit = answer["overall"]["after"]["gain_unit"]
    rows, still = [], 0
    for figure in answer["figures"]:
        if row := moved_row(figure, unit):
            rows.append(row)
        else:
            still += figure["before"] is not None or figure["after"] is not None
    if not rows:
        return paragraph("no figure moves", look)
    lines = figure_table(rows, look)
    if still:
        lines += paragraph(f"{still} more {'stands' if still == 1 else 'stand'} still", look, "dim")
    return lines


def moved_row(figure: Entry, gain_unit: str) -> Row | None:
    """A figure before and after; None where a reader would see no move."""
    name = figure["name"]
    texts = [words.figure(figure[side], name, gain_unit) for side in ("before", "after")]
    move = words.move(figure["before"], figure["after"], figure["way"], words.unit_of(name, gain_unit))
    if not figure["moved"] or not move:
        return None
    return [words.called(name), *texts, Cell(move, "head")]


def figure_table(rows: Sequence[Row], look: Look) -> list[str]:
    """Rows of `moved_row`."""
    names = ("figures", "before", "after", "move")
    return table([Column(name, right=at > 0) for at, name in enumerate(names)], rows, look)


def _cautions(answer: Document, look: Look) -> list[str]:
    return [line for style, word, told in (("warn", "caution", answer["cautions"]), ("", "mended", answer["mended"]))
            for one in told for line in paragraph(unparted(f"{word}: {one}"), look, style, hang=3)]
