"""The text of `polebook compare FILE --post`: figures of today against those that were posted."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.report import compare_words as words
from polebook.report import figures as show
from polebook.report.compare import figure_table, moved_row, verdict
from polebook.report.document import Document, Entry
from polebook.report.look import Look
from polebook.report.sections import paragraph
from polebook.report.table import Column, Row, table

_SHORT = 8  # digits of a digest and of a hash


def compare_post(answer: Document, look: Look) -> str:
    """The whole answer."""
    was, now = answer["files"]
    post = was["post"]
    said = f": {post['message']}" if post["message"] else ""
    lines = [" " + look.paint(look.text(now["file"]), "head"),
             *paragraph(f"before  posted {post['date']}, digest {was['digest'][:_SHORT]}{said}", look, hang=9),
             *paragraph("after   the file as it is", look), ""]
    if rows := list(_targets(answer)):
        heads = ("targets", "want", "before", "after", "")
        lines += [*table([Column(name, right=bool(name) and at > 0) for at, name in enumerate(heads)], rows, look), ""]
    moved = [row for figure in answer["figures"] if not figure["name"].startswith("targets.")
             and (row := moved_row(figure, _gain_unit(answer)))]
    if moved:
        lines += [*figure_table(moved, look), ""]
    for one in answer["words"]:
        if not one["name"].startswith("targets."):
            lines += paragraph(f"{words.called(one['name'])}: {one['before']} before, {one['after']} after", look)
    lines += paragraph(_ending(answer, bool(moved)), look, "dim")
    return "\n".join(lines) + "\n"


def _gain_unit(answer: Document) -> str:
    return str(answer["gain_unit"])


def _targets(answer: Document) -> Iterator[Row]:
    before, after = answer["targets"]["before"], answer["targets"]["after"]
    for name in dict.fromkeys((*after, *before)):
        old, new = before.get(name), after.get(name)
        got = [_figure(name, "got_", side, answer) for side in (old, new)]
        want = _figure(name, "want_", new or old, answer)
        yield [name, want, *got, verdict(old, new)]


def _figure(name: str, begin: str, row: Entry | None, answer: Document) -> str:
    """The figure of a target whose key begins so; the key ends in its unit."""
    key = next((key for key in row or {} if key.startswith(begin)), "")
    return words.figure(row[key], f"targets.{name}.{key}", _gain_unit(answer)) if row and key else show.NONE


def _ending(answer: Document, moved: bool) -> str:
    was, now = answer["files"]
    same = was["digest"] == now["digest"]
    told = [] if moved else ["no figure moves"]
    told.append("the file says what was posted" if same else "a post holds figures alone, not what changed")
    if (there := was["post"]["held_by"]) and not same:
        told.append(f"--rev {there[:_SHORT]} in place of --post tells that")
    return "; ".join(told)
