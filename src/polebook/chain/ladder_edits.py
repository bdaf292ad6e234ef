"""Arms of a ladder that come and go with their parts."""

from __future__ import annotations

from dataclasses import replace

from polebook.chain.edits import content, judged
from polebook.chain.located import PathRefused, stages
from polebook.chain.read import known_reading
from polebook.chain.said import change, raw_text
from polebook.chain.stage_edits import position
from polebook.problem import printable
from polebook.stages.ladder import ARM
from polebook.text import literal
from polebook.text.edit import Edit
from polebook.text.spans import Path, scan
from polebook.text.splice import set_value, unset


def arm(text: str, file: str, path: str, typed: str) -> Edit | None:
    """The edit for the key at `path` ("L1.arms.3.series_r") where an arm comes or goes with it, else None.

    A key of the arm after the last one begins a new arm; to take the last part out of an arm takes the arm out. To
    take out what is not there is an edit that changes nothing.
    """
    name, _, rest = path.partition(".")
    words = rest.split(".")
    if len(words) != 3 or not words[1].isdecimal() or words[2] not in {param.key for param in ARM}:
        return None
    before = known_reading(text, file)
    data = content(before, text)
    at = position(name, data)
    arms = stages(data)[at].get("arms")
    number, key = int(words[1]), words[2]
    if not isinstance(arms, list) or not 1 <= number <= len(arms) + 1:
        return None
    whole: Path = ("stage", at, "arms")
    if number == len(arms) + 1:
        if not typed:
            return Edit(())
        edit = set_value(text, whole, _longer(text, whole, len(arms), f"{{ {key} = {literal.literal(typed)} }}"), file)
        edit = replace(edit, label=f"{printable(name)}: arm {number} added, {key} {printable(typed)}")
    elif not typed and isinstance(arms[number - 1], dict) and set(arms[number - 1]) - {"role"} == {key}:
        was = raw_text(data, scan(text), (*whole, number - 1, key))
        edit = replace(_gone(text, whole, number - 1, file), label=f"{change(path, was, '')}, its arm with it")
    else:
        return None
    judged(before, edit.apply(text), file)
    return edit


def _gone(text: str, whole: Path, at: int, file: str) -> Edit:
    """Takes item number `at` out of the list: with its line where it has that alone: no other loses a comment."""
    spans = scan(text)
    held, item = spans.value(whole), spans.value((*whole, at))
    if held and item and held.start < item.start:
        start = text.rfind("\n", 0, item.start) + 1
        end = text.find("\n", item.end) + 1
        rest = text[item.end : end].lstrip().removeprefix(",").strip()
        if held.start < start < end <= held.end and not text[start : item.start].strip() and rest[:1] in ("", "#"):
            return set_value(text, whole, text[held.start : start] + text[end : held.end], file)
    return unset(text, (*whole, at), file)


def _longer(text: str, path: Path, count: int, item: str) -> str:
    """The list at `path` as it is written, with one item more, on a line of its own where the last one is."""
    spans = scan(text)
    span = spans.value(path)
    if span is None:
        raise PathRefused("the arms are no list in brackets", "a new one is written into such a list",
                          "write the arm by hand")
    last = spans.value((*path, count - 1)) if count else None
    if last is None:
        return f"[{item}]"
    lead = text[text.rfind("\n", 0, last.start) + 1 : last.start]
    alone = not lead.strip() and text.rfind("\n", 0, last.start) > span.start
    feed = "\r\n" if text.endswith("\r\n", 0, text.rfind("\n", 0, last.start) + 1) else "\n"
    return f"{text[span.start : last.end]},{feed + lead if alone else ' '}{item}{text[last.end : span.end]}"
