"""A value stepped: resistors, capacitors and inductors along their preferred series, the rest by 5 %, or a decade."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from decimal import Decimal
from math import log10
from typing import Any

from polebook import series
from polebook.chain.edits import content, judged
from polebook.chain.located import PathRefused
from polebook.chain.paths import locate
from polebook.chain.read import known_reading
from polebook.chain.said import change, raw_text, said
from polebook.chain.tables import PREFERRED
from polebook.param import Param
from polebook.problem import printable
from polebook.quantity import DIMENSIONS, Refused, letter, parse
from polebook.text import literal
from polebook.text.data import find
from polebook.text.edit import Edit
from polebook.text.rearrange import replace_all
from polebook.text.spans import Path, scan
from polebook.text.splice import set_value

FACTOR = 1.05
_PART = {"resistance": "resistor", "capacitance": "capacitor", "inductance": "inductor"}
_DECADE = 10


def step(text: str, file: str, path: str, direction: int, choices: Sequence[str] = ()) -> Edit:
    """The edit that steps the key at `path`: +1 or -1 to the next value, +10 or -10 by a decade.

    choices are the words of a key that is one of several. Raises ProblemsFound where there is nothing to step.
    """
    before = known_reading(text, file)
    data = content(before, text)
    found = locate(path, data)
    spans = scan(text)
    here = raw_text(data, spans, found.path)
    param = found.param or Param(path, "text", "")
    if param.dimension == "quantities":
        row = Param(param.key, param.of, "")
        listed = find(data, found.path)
        items: list[Path] = [(*found.path, at) for at in range(len(listed) if isinstance(listed, list) else 0)]
        texts = [_stepped(path, raw_text(data, spans, item), row, direction, data) for item in items]
        if not items:
            raise _nothing(path)
        written = [(item, _like(find(data, item), new)) for item, new in zip(items, texts, strict=True)]
        edit = replace_all(text, written, change(path, here, ", ".join(texts)), file)
    else:
        new = chosen(here or param.default, choices or param.choices, direction) \
            if choices or param.choices or param.dimension == "flag" \
            else _stepped(path, here or param.default, param, direction, data)
        value = new if param.dimension == "flag" else literal.string(new) if choices or param.choices \
            else _like(find(data, found.path), new)
        edit = replace(set_value(text, found.path, value, file), label=change(path, here, new))
    judged(before, edit.apply(text), file)
    return edit


def _like(present: object, new: str) -> str:
    """`new` as a literal, in quotes where what stands there is."""
    return literal.string(new) if isinstance(present, str) else literal.literal(new)


def chosen(here: str, choices: Sequence[str], direction: int) -> str:
    """The word after or before `here`, the first again after the last; of none, a switch is turned over.

    Raises PathRefused where `here` is the only one.
    """
    words = list(choices) or ["false", "true"]
    if words == [here]:
        raise PathRefused(f"there is no other choice than {printable(here)}", "it is the only one that fits",
                          "add another first")
    if here in words:
        return words[(words.index(here) + (1 if direction > 0 else -1)) % len(words)]
    return words[0 if direction > 0 else -1] if choices else "true"


def _stepped(path: str, here: str, param: Param, direction: int, data: Mapping[str, Any]) -> str:
    """The text of the next value after that of the text `here`."""
    if param.dimension not in DIMENSIONS:
        raise PathRefused(f"{said(path)} can't be stepped", "it is no number and no choice", "type it")
    if not here:
        raise _nothing(path)
    try:
        value = parse(here, param.dimension)
    except Refused as refused:
        raise PathRefused(refused.what, refused.why, refused.fix) from None
    if in_db := next((unit for unit in DIMENSIONS[param.dimension].decibels if here.strip().endswith(unit)), ""):
        ratio = float(direction // 10 or direction)
        moved = 20 * log10(abs(value)) + (20 * ratio if abs(direction) == _DECADE else ratio * 20 * log10(FACTOR))
        return f"{round(moved, 1) + 0.0:g} {in_db}"
    if value == 0:
        raise PathRefused(f"{said(path)} is zero", "there is no next value to zero", "type one")
    new = _moved(path, value, param, direction, data)
    if param.dimension == "share":
        return f"{new * 100:.6g} %"
    return letter(new, param.dimension) + (" dB" if here.strip().endswith("dB") else "")


def _moved(path: str, value: float, param: Param, direction: int, data: Mapping[str, Any]) -> float:
    if abs(direction) == _DECADE:
        return float(Decimal(repr(value)).scaleb(1 if direction > 0 else -1))
    if param.dimension in _PART and not path.startswith("device."):
        try:
            return (series.up if direction > 0 else series.down)(value, series_of(data, _PART[param.dimension]))
        except ValueError as error:
            raise PathRefused(f"{said(path)} can't be stepped", str(error), "type a value") from None
    return float(f"{value * FACTOR if direction > 0 else value / FACTOR:.2e}")


def series_of(data: Mapping[str, Any], part: str) -> str:
    """The preferred series of a "resistor", "capacitor" or "inductor": the file's, else the default."""
    table = data.get("preferred")
    name = table.get(part) if isinstance(table, dict) else None
    return name if name in series.NAMES else next(param.default for param in PREFERRED if param.key == part)


def _nothing(path: str) -> PathRefused:
    return PathRefused(f"{said(path)} is absent", "there is no value to step from", "type one")
