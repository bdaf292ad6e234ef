"""What `set` and `unset` share: read, edit the text, save, and tell what changed."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from polebook.cli.command import MET
from polebook.cli.out import Out
from polebook.problem import Problem

if TYPE_CHECKING:
    from polebook.text.edit import Edit

Editing = Callable[[str], tuple["Edit", list[Problem]]]


def change(file: str, editing: Editing, out: Out, same: str = "it says so already") -> int:
    """Apply what `editing` makes of the file's text, save it, and list the faults that remain.

    Raises ProblemsFound where the file can't be read or saved, or the edit is refused; the file is then as it was.
    """
    from polebook.text import files

    before = files.read(file).text
    edit, left = editing(before)
    after = edit.apply(before)
    if after == before:
        out.write(f" {out.look.text(file)}: {same}, nothing is changed\n")
    else:
        files.save(file, after)
        out.write("\n".join(difference(file, before, after, out)) + "\n")
    if left:
        faults = "a fault remains" if len(left) == 1 else f"{len(left)} faults remain"
        out.tell(f"\n{faults} in the file:\n")
        out.problems(left, after)
    return MET


def difference(file: str, before: str, after: str, out: Out) -> list[str]:
    """The place of the change, the lines that went and the lines that came."""
    old, new = before.split("\n"), after.split("\n")
    head = 0
    while head < min(len(old), len(new)) and old[head] == new[head]:
        head += 1
    tail = 0
    while tail < min(len(old), len(new)) - head and old[-1 - tail] == new[-1 - tail]:
        tail += 1
    look = out.look
    lines = [f"{look.text(file)}:{head + 1}"]
    lines += [look.paint(look.text(f"  - {line.rstrip()}"), "bad") for line in old[head : len(old) - tail]]
    come = new[head : len(new) - tail]
    while len(come) > 1 and not come[-1].strip():  # the blank line that sets a block off from what follows
        come.pop()
    lines += [look.paint(look.text(f"  + {line.rstrip()}"), "good") for line in come]
    return lines
