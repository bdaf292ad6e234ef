"""Edits of a TOML text: set a value wherever it stands or belongs, take a key out; nothing else moves.

Every edit is checked: the changed text is parsed again and must say exactly what was meant, else the edit is refused.
"""

from __future__ import annotations

import copy
from collections.abc import Callable
from typing import Any

from polebook.problem import Place, Problem, ProblemsFound
from polebook.text import blocks, literal
from polebook.text.data import drop, find, put, same, shown
from polebook.text.edit import Edit, Splice
from polebook.text.spans import Entry, Path, Span, Spans, Unscannable, scan
from polebook.text.toml import read

Change = Callable[[Any], None]


class EditRefused(ProblemsFound):
    """An edit that can't be made, with the reason as its one problem."""

    def __init__(self, what: str, why: str, fix: str, place: Place | None = None, text: str = "") -> None:
        super().__init__((Problem(place, what, why, fix),), text)


def set_value(text: str, path: Path, value: str, file: str = "") -> Edit:
    """The edit that gives `path` the value written as the TOML literal `value`.

    An existing value is replaced. A missing key goes after the last key of its table; a missing table is made, in the
    format's order of tables, or inline where it belongs to a stage. Raises ProblemsFound for a text that is not
    TOML and EditRefused where the edit would not say what is meant.
    """
    data, spans = load(text, path, file)
    meant, _ = read(f"value = {value}", "")
    if meant is None:
        why = "only a number, a text in quotes, a list or an inline table is"
        raise EditRefused(f"{value[:40]} is not a TOML value", why, "put a text in quotes")
    if len(meant) != 1 or scan(f"value = {value}").values[("value",)].end != len("value = ") + len(value):
        raise EditRefused(f"{value[:40]} is more than one value", "one edit sets one key", "give one value")
    splice = _setting(data, spans, path, value, file)
    edit = Edit.of([splice], f"set {shown(path)} to {value}")
    return checked(text, data, edit, path, lambda whole: put(whole, path, meant["value"]), file)


def unset(text: str, path: Path, file: str = "") -> Edit:
    """The edit that takes the key at `path` out: its line, or in an inline table or list the item with its comma.

    Raises ProblemsFound for a text that is not TOML and EditRefused where nothing stands there or a table does.
    """
    data, spans = load(text, path, file)
    entry = spans.entries.get(path)
    if entry and not entry.inline:
        splice = _line(text, entry)
    elif path in spans.values:
        splice = _item(spans, path)
    elif spans.header(path) or any(known[: len(path)] == path for known in spans.entries):
        raise EditRefused(f"{shown(path)} is a table", "only a key with its value is taken out",
                          "take its keys out one by one", spans.place(path, file), text)
    else:
        raise EditRefused(f"there is no {shown(path)}", "the file does not give it", "name a key that it gives")
    stays = {known[:length] for known in spans.headers for length in range(len(known) + 1)} | set(spans.values)
    edit = Edit.of([splice], f"take out {shown(path)}")
    return checked(text, data, edit, path, lambda whole: drop(whole, path, stays), file)


def insert_block(text: str, path: Path, block: str, file: str = "") -> Edit:
    """The edit that adds a whole table at `path`, such as ("device", "D") or ("stage", 2), as the lines of `block`.

    `block` has its own header, and may have comments and sub-tables. A table of a list takes the number it is given,
    those from there on move up; any other goes after the last one of its kind, or to the format's place.
    Raises ProblemsFound for a text that is not TOML and EditRefused where the block is not that one table, or where
    there is one already.
    """
    data, spans = load(text, path, file)
    meant, problems = read(block, file)
    if meant is None:
        raise ProblemsFound(problems, block)
    content = find(meant, (*path[:-1], 0 if isinstance(path[-1], int) else path[-1]))
    if content is None or not isinstance(content, dict):
        raise EditRefused(f"the block is not {shown(path)}", "one edit adds one table",
                          "give it the header of that one")
    if not isinstance(path[-1], int) and find(data, path) is not None:
        raise EditRefused(f"there is a {shown(path)} already", "a table stands once", "choose another name",
                          spans.place(path, file), text)
    lines = block.replace("\r\n", "\n").strip("\n").split("\n")
    edit = Edit.of([_block_splice(spans, path, lines)], f"add {shown(path)}")
    return checked(text, data, edit, path, lambda whole: _added(whole, path, content), file)


def _block_splice(spans: Spans, path: Path, lines: list[str]) -> Splice:
    if isinstance(path[-1], int):
        here = blocks.block_of(spans, path)
        if here:
            return blocks.before_block(spans, here, lines)
        if path[-1] and not blocks.block_of(spans, (*path[:-1], path[-1] - 1)):
            raise EditRefused(f"{shown(path)} leaves a gap", "the list has no such place", "name a place of the list")
    return blocks.new_block(spans, str(path[0]), lines)


def _added(whole: Any, path: Path, content: Any) -> None:
    if isinstance(path[-1], int):
        listed = find(whole, path[:-1])
        if listed is None:
            put(whole, path[:-1], [content])
        else:
            listed.insert(path[-1], content)
    else:
        put(whole, path, content)


def load(text: str, path: Path, file: str) -> tuple[dict[str, Any], Spans]:
    """What the text says and where: raises ProblemsFound for a text that is not TOML, EditRefused for no path."""
    if not path:
        raise EditRefused("no key is named", "an edit is made at a key", "name one")
    data, problems = read(text, file)
    if data is None:
        raise ProblemsFound(problems, text)
    try:
        return data, scan(text)
    except Unscannable as error:
        raise EditRefused("the place to edit can't be found", str(error), "edit the file by hand") from None


def _setting(data: dict[str, Any], spans: Spans, path: Path, value: str, file: str) -> Splice:
    """The splice that sets `path`, on a text where `spans` and `data` were found."""
    text = spans.text
    if span := spans.value(path):
        return Splice(span.start, text[span.start : span.end], value)
    parent, name = path[:-1], path[-1]
    if not isinstance(name, str) or find(data, path) is not None:
        what = "has no such item" if isinstance(name, int) else "is a table"
        raise EditRefused(f"{shown(path)} {what}", "only the value of a key can be set", "name a key",
                          spans.place(path, file), text)
    key = literal.key(name)
    if span := spans.value(parent):
        if text[span.start] != "{":
            raise EditRefused(f"{shown(parent)} is a value, not a table", f"it can't hold the key {name}",
                              "name another key", spans.at(span, file), text)
        return _into_inline(spans, parent, span, key, value)
    if parent in spans.headers or not parent:
        return _into_table(spans, parent, key, value)
    if dotted := _last_below(spans, parent):
        return _beside_dotted(spans, dotted, parent, key, value)
    top = len(parent) == 1 or (len(parent) == 2 and parent[0] == "device")
    if all(isinstance(part, str) for part in parent) and top:
        header = f"[{'.'.join(literal.key(str(part)) for part in parent)}]"
        return blocks.new_table(spans, str(parent[0]), header, f"{key} = {value}")
    if isinstance(parent[-1], int):
        raise EditRefused(f"there is no {shown(parent)}", "the list has no such item", "name one that the file gives")
    return _setting(data, spans, parent, f"{{ {key} = {value} }}", file)


def _into_inline(spans: Spans, parent: Path, span: Span, key: str, value: str) -> Splice:
    last = _last_below(spans, parent)
    if last:
        return Splice(last.value.end, "", f", {key} = {value}")
    return Splice(span.start, spans.text[span.start : span.end], f"{{ {key} = {value} }}")


def _into_table(spans: Spans, table: Path, key: str, value: str) -> Splice:
    last = None
    for entry in spans.entries.values():
        if entry.table == table:
            last = entry
    if last:
        return _after_line(spans, last, f"{_padded(spans.text, last, key)}= {value}")
    if not table:
        return blocks.first_line(spans, f"{key} = {value}")
    return _after(spans.text, spans.headers[table].span.end, f"{key} = {value}")


def _beside_dotted(spans: Spans, last: Entry, parent: Path, key: str, value: str) -> Splice:
    """A table that only dotted keys make: one more of them, after the last."""
    text = spans.text
    stem = text[last.key.start : last.parts[len(parent) - len(last.table) - 1].end]
    if last.inline:
        return Splice(last.value.end, "", f", {stem}.{key} = {value}")
    return _after_line(spans, last, f"{stem}.{key} = {value}")


def _last_below(spans: Spans, path: Path) -> Entry | None:
    """The last key with its value that stands right in `path`, an inline table or one made by dotted keys."""
    last = None
    for entry in spans.entries.values():
        if len(entry.path) > len(path) >= len(entry.table) and entry.path[: len(path)] == path:
            last = entry
    return last


def _padded(text: str, entry: Entry, key: str) -> str:
    """`key` with blanks before its "=", lined up with the key above where that one's "=" is set off."""
    width = text.index("=", entry.key.end) - entry.key.start
    return key.ljust(width) if width > entry.key.end - entry.key.start + 1 and len(key) < width else f"{key} "


def _after_line(spans: Spans, entry: Entry, line: str) -> Splice:
    begin = spans.text.rfind("\n", 0, entry.key.start) + 1
    return _after(spans.text, entry.value.end, spans.text[begin : entry.key.start] + line)


def _after(text: str, at: int, line: str) -> Splice:
    """`line` as a new line after the one that character `at` stands on."""
    end = text.find("\n", at)
    newline = blocks.newline(text, at)
    return Splice(len(text), "", newline + line) if end < 0 else Splice(end + 1, "", line + newline)


def _line(text: str, entry: Entry) -> Splice:
    """Takes out the lines of a key with its value; a missing last newline stays missing."""
    start = text.rfind("\n", 0, entry.key.start) + 1
    end = text.find("\n", entry.value.end) + 1
    if not end:
        end = len(text)
        start -= 2 if text[max(start - 2, 0) : start] == "\r\n" else min(start, 1)
    return Splice(start, text[start:end], "")


def _item(spans: Spans, path: Path) -> Splice:
    """Takes out an item of a list or a key of an inline table, with its comma."""
    text = spans.text
    entry = spans.entries.get(path)
    if entry:
        holder, items = entry.table, [Span(one.key.start, one.value.end) for one in spans.entries.values()
                                      if one.table == entry.table]
        own = Span(entry.key.start, entry.value.end)
    else:
        holder, own, items = path[:-1], spans.values[path], []
        while span := spans.value((*holder, len(items))):
            items.append(span)
    number = items.index(own)
    if number:
        start, end = items[number - 1].end, own.end
    elif len(items) > 1:
        start, end = own.start, items[1].start
    else:
        start, end = spans.values[holder].start + 1, spans.values[holder].end - 1
    return Splice(start, text[start:end], "")


def checked(text: str, data: dict[str, Any], edit: Edit, path: Path, change: Change, file: str) -> Edit:
    """`edit`, where the text that it leaves says what `change` makes of the data; else EditRefused."""
    after, problems = read(edit.apply(text), file)
    if after is None:
        raise EditRefused(f"{shown(path)} can't be edited: {problems[0].what}", problems[0].why, problems[0].fix)
    meant = copy.deepcopy(data)
    change(meant)
    if not same(after, meant):
        raise EditRefused(f"{shown(path)} can't be edited in place", "the changed text would not say what is meant",
                          "edit the file by hand")
    return edit
