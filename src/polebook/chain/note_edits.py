"""Notes: free text of the file, a stage, a card, the targets or a bench, over several lines where it has them."""

from __future__ import annotations

from dataclasses import replace

from polebook.chain.edits import content, judged
from polebook.chain.located import PathRefused
from polebook.chain.paths import locate
from polebook.chain.read import known_reading
from polebook.chain.said import raw_text
from polebook.problem import Problem, printable
from polebook.text import literal
from polebook.text.blocks import newline
from polebook.text.edit import Edit
from polebook.text.spans import scan
from polebook.text.splice import set_value, unset


def set_note(text: str, file: str, sheet: str, note: str) -> tuple[Edit, list[Problem]]:
    """The edit that gives a sheet ("Q1", "target", "device.D", "file") the note, and the faults that are then left.

    An empty note takes the key out. Line ends are those of the file. Raises ProblemsFound.
    """
    before = known_reading(text, file)
    data = content(before, text)
    found = locate("note" if sheet == "file" else f"{sheet}.note", data)
    if found.param is None:
        raise PathRefused(f"{printable(sheet)} takes no note", "its table has no such key", "write it as a comment")
    spans = scan(text)
    lines = [line.rstrip() for line in note.replace("\r\n", "\n").replace("\r", "\n").strip("\n").split("\n")]
    whose = "of the file" if sheet == "file" else f"of {printable(sheet)}"
    here = raw_text(data, spans, found.path)
    if not any(lines):
        edit = unset(text, found.path, file) if here else Edit(())
        edit = replace(edit, label=f"note {whose} taken out")
    elif "\n".join(lines) == here.strip("\n").replace("\r\n", "\n"):
        edit = Edit(())
    else:
        span = spans.value(found.path) or spans.header(found.path[:-1])
        feed = newline(text, span.start if span else 0)
        value = literal.string(lines[0]) if len(lines) == 1 else literal.paragraph(lines, feed)
        edit = replace(set_value(text, found.path, value, file), label=f"note {whose} {'changed' if here else 'set'}")
    return edit, judged(before, edit.apply(text), file)
