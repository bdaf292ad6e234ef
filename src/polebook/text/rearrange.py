"""Edits of whole blocks of a TOML text, and of its keys' names. Checked like every edit of `text.splice`."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from typing import Any

from polebook.text import blocks, literal
from polebook.text.blocks import Block
from polebook.text.data import find, shown
from polebook.text.edit import Edit, Splice
from polebook.text.spans import Path, Span, Spans
from polebook.text.splice import EditRefused, checked, insert_block, load, set_value


def batch(text: str, steps: Iterable[Callable[[str], Edit]], label: str) -> Edit:
    """Several edits as one: each step makes its edit of the text that the ones before it leave."""
    whole = Edit(())
    for step in steps:
        edit = step(text)
        text = edit.apply(text)
        whole = whole.then(edit)
    return Edit(whole.splices, label)


def replace_all(text: str, values: Iterable[tuple[Path, str]], label: str, file: str = "") -> Edit:
    """The edit that gives each path its TOML literal, all of them or none; raises as `splice.set_value`."""
    def step(path: Path, value: str) -> Callable[[str], Edit]:
        return lambda now: set_value(now, path, value, file)

    return batch(text, [step(path, value) for path, value in values], label)


def copy_block(text: str, path: Path, file: str = "") -> Edit:
    """The edit that sets the block at `path`, one of a list such as ("stage", 1), a second time right after it."""
    _, spans = load(text, path, file)
    block = _block(spans, path, file)
    number = path[-1]
    if not isinstance(number, int):
        raise EditRefused(f"{shown(path)} stands once", "only a table of a list can be copied", "name one of a list")
    body = text[block.span.start : block.span.end]
    return Edit(insert_block(text, (*path[:-1], number + 1), body, file).splices, f"copy {shown(path)}")


def remove_block(text: str, path: Path, file: str = "") -> Edit:
    """The edit that takes the block at `path` out with its comments, and the blank lines after it."""
    data, spans = load(text, path, file)
    block = _block(spans, path, file)
    edit = Edit.of([_gone(text, block.span)], f"remove {shown(path)}")
    return checked(text, data, edit, path, lambda whole: _take_out(whole, path), file)


def move_block(text: str, path: Path, to: int, file: str = "") -> Edit:
    """The edit that changes the places of the block at `path`, one of a list, and number `to` of the same list."""
    data, spans = load(text, path, file)
    own, other = _block(spans, path, file), _block(spans, (*path[:-1], to), file)
    first, second = sorted((own, other), key=lambda block: block.span.start)
    ahead, behind = (text[block.span.start : block.span.end] for block in (first, second))
    if not behind.endswith("\n"):  # the text's last line has no end, and its last line is to have none again
        feed = blocks.newline(text, first.span.start)
        ahead, behind = ahead.removesuffix("\n").removesuffix("\r"), behind + feed
        splices = [Splice(first.span.start, text[first.span.start : first.span.end], behind),
                   Splice(second.span.start, text[second.span.start : second.span.end], ahead)]
    else:
        splices = [Splice(first.span.start, ahead, behind), Splice(second.span.start, behind, ahead)]
    edit = Edit.of(splices, f"move {shown(path)}")
    return checked(text, data, edit, path, lambda whole: _swap(whole, path, to), file)


def rename(text: str, path: Path, name: str, file: str = "") -> Edit:
    """The edit that gives the key at `path`, which has a value, the name `name`."""
    data, spans = load(text, path, file)
    entry = spans.entries.get(path)
    if entry is None:
        raise EditRefused(f"{shown(path)} is no key with a value", "only such a key is renamed", "name one",
                          spans.place(path, file), text)
    if find(data, (*path[:-1], name)) is not None:
        raise EditRefused(f"there is a {shown((*path[:-1], name))} already", "a key stands once",
                          "take one of them out", spans.place(path, file), text)
    part = entry.parts[-1]
    edit = Edit.of([Splice(part.start, text[part.start : part.end], literal.key(name))], f"rename {shown(path)}")

    def change(whole: Any) -> None:
        table = find(whole, path[:-1])
        table[name] = table.pop(path[-1])

    return checked(text, data, edit, path, change, file)


def _block(spans: Spans, path: Path, file: str) -> Block:
    if block := blocks.block_of(spans, path):
        return block
    raise EditRefused(f"{shown(path)} has no header of its own", "only a table that begins with its header is moved, "
                      "copied or removed as a whole", "write it with a header, or edit the file by hand",
                      spans.place(path, file), spans.text)


def _gone(text: str, span: Span) -> Splice:
    """Takes `span` out with the blank lines that follow it; at the end of the text with those before it."""
    start, end = span.start, _past_blank(text, span.end)
    if end == len(text):
        start = _before_blank(text, start)
        if start and not text.endswith("\n"):
            start -= 2 if text[max(start - 2, 0) : start] == "\r\n" else 1
    return Splice(start, text[start:end], "")


def _past_blank(text: str, at: int) -> int:
    while at < len(text):
        end = text.find("\n", at) + 1 or len(text)
        if text[at:end].strip():
            break
        at = end
    return at


def _before_blank(text: str, at: int) -> int:
    while at:
        begin = text.rfind("\n", 0, at - 1) + 1
        if text[begin:at].strip():
            break
        at = begin
    return at


def _take_out(whole: Any, path: Path) -> None:
    """Takes the table at `path` out, and the list or the table of tables that is then empty."""
    holder = find(whole, path[:-1])
    del holder[path[-1]]
    if len(path) == 2 and not holder:
        del whole[path[0]]


def _swap(whole: Any, path: Path, to: int) -> None:
    listed: Sequence[Any] = find(whole, path[:-1])
    number = int(path[-1])
    assert isinstance(listed, list)
    listed[number], listed[to] = listed[to], listed[number]
