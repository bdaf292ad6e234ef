"""The text of `polebook working`: how one figure came about, and the names of all figures."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from math import isfinite
from textwrap import wrap

from polebook.quantity import engineering
from polebook.report.document import Entry, finite
from polebook.report.figures import NONE
from polebook.report.look import Look, cells
from polebook.report.sections import heading, paragraph
from polebook.report.table import GAP

DIGITS = 6
INDENT = 3
LEAST = 24  # columns that the words beside a number get, else their origin stands below
_SYMBOL = re.compile(r"[^\W\d][\w.]*")
_WHOLE = frozenset({"", "dB", "dBΩ", "°C", "%", "rad"})  # units without a prefix
_WORDS = frozenset({"sqrt", "ln", "log10", "exp", "cos", "max", "min", "pi"})


def working(document: Entry, title: str, file: str, look: Look) -> str:
    """The page of one working, a dict as `Working.document` makes it."""
    first, *rest = [heading({"chain": {"title": title}}, file, look), *blocks(document, look)]
    return "\n".join(first) + "\n" + "\n".join("\n".join(block) + "\n" for block in rest)


def blocks(document: Entry, look: Look) -> list[list[str]]:
    """What the page says, in blocks of lines."""
    document = finite(document)
    found = [_head(document, look)]
    if document["why"]:
        found.append(paragraph(f"It is null: {document['why']}.", look))
    if document["formula"] and not _told(document):
        found.append(_statement(document["formula"], look))
    values = {number["symbol"]: number for number in document["numbers"]}
    for step in document["steps"]:
        found.append(_step(step, values, look))
        values[step["symbol"]] = step
    if document["numbers"]:
        found.append(_numbers(document["numbers"], look))
    if document["note"]:
        found.append(paragraph(document["note"], look))
    if document["source"]:
        found.append(paragraph(f"source: {document['source']}", look, hang=3))
    return found


def names(known: Iterable[str], look: Look) -> str:
    """Every name, an owner a paragraph: `Q1  gain gain_db ...`."""
    owners: dict[str, list[str]] = {}
    for name in known:
        owner, key = _owner(name)
        owners.setdefault(owner, []).append(key)
    lines = []
    for owner, keys in owners.items():
        lead = look.text(owner)
        first, *more = wrap(" ".join(keys), look.width - 3 - cells(lead)) if keys else [""]
        lines.append(f" {look.paint(lead, 'head')}  {first}")
        lines += [" " * (3 + cells(lead)) + line for line in more]
    return "\n".join(lines) + "\n"


def _owner(name: str) -> tuple[str, str]:
    head, mark, tail = name.partition(".leverage.")
    if mark:
        return head, f"leverage.{tail}"
    owner, _, key = name.rpartition(".")
    return owner, key


def figure(value: float | bool | None, unit: str) -> str:
    """A number with six significant digits, no zeros behind them: "4.7 pF", "-34.4399"; yes, no, a dash."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if value is None or not isfinite(value):
        return NONE
    value += 0.0  # no negative zero
    if unit in _WHOLE or not unit.isalpha():
        return f"{_plain(value)} {unit}".rstrip()
    number, _, rest = engineering(value, unit, DIGITS).partition(" ")
    mantissa, mark, exponent = number.partition("e")
    if "." in mantissa:
        mantissa = mantissa.rstrip("0").rstrip(".")
    return f"{mantissa}{mark}{exponent} {rest}"


def _plain(value: float) -> str:
    text = f"{value:.{DIGITS}g}"
    mantissa, mark, exponent = text.partition("e")
    return f"{mantissa}e{int(exponent)}" if mark else text


def _told(document: Entry) -> bool:
    """Whether the formula is the last step's own text already."""
    return any(document["formula"] == f"{step['symbol']} = {step['text']}" for step in document["steps"])


def _statement(text: str, look: Look) -> list[str]:
    """What is computed, in words and symbols."""
    blank = " " * INDENT
    return wrap(_symbols(text, look), look.width, initial_indent=blank, subsequent_indent=blank)


def _symbols(text: str, look: Look) -> str:
    """Text as the terminal can have it, a multiplication still one."""
    return look.text(text if look.has("·") else text.replace("·", "*"))


def _head(document: Entry, look: Look) -> list[str]:
    value = figure(document["value"], document["unit"])
    line = f" {look.paint(look.text(document['figure']), 'head')} = {look.text(value)}"
    return [line, *(paragraph(document["about"], look) if document["about"] else [])]


def _step(step: Entry, values: Mapping[str, Entry], look: Look) -> list[str]:
    lines = paragraph(step["about"], look) if step["about"] else []
    text = step["text"]
    if step["must"]:
        lines += _expression("", f"{text} = {step['must']}", look)
        lines += _expression("", _put_in(text, values), look)
        result = figure(step["value"], step["unit"])
        must = "" if step["must"] == result else f"; {step['must']} = {figure(step['must_value'], step['unit'])}"
        return lines + _expression("= ", result + (must if not _number(step["must"]) else ""), look)
    lead = f"{step['symbol']} = "
    put_in, result = _put_in(text, values), figure(step["value"], step["unit"])
    said = put_in.strip("()") in (result, text)
    chain = [text, *([] if said else [put_in]), *([result] if result != text else [])]
    if not step["result"] and cells(lead) + cells(" = ".join(chain)) <= look.width - INDENT:
        return lines + _expression(lead, " = ".join(chain), look)
    lines += _expression(lead, text, look)
    blank = " " * (cells(lead) - 2)
    if not said:
        lines += _expression(f"{blank}= ", put_in, look)
    if result != text:
        lines += _expression(f"{blank}= ", result, look, "head" if step["result"] else "")
    return lines


def _number(text: str) -> bool:
    return text.replace(".", "").isdigit()


def _put_in(text: str, values: Mapping[str, Entry]) -> str:
    """The expression with a number in the place of each symbol."""
    def number(match: re.Match[str]) -> str:
        symbol = match[0]
        if symbol in _WORDS or symbol not in values:
            return symbol
        unit = values[symbol]["unit"]
        shown = figure(values[symbol]["value"], unit if unit.isalpha() else "")
        powered = text[match.end():match.end() + 1] == "^" and " " in shown
        return f"({shown})" if shown.startswith("-") or powered else shown

    return _SYMBOL.sub(number, text)


def _expression(lead: str, text: str, look: Look, style: str = "") -> list[str]:
    """An expression behind its lead, broken after a space or a multiplication sign, and set off."""
    lead, shown = " " * INDENT + look.text(lead), _symbols(text, look)
    room = look.width - cells(lead)
    lines, line = [], ""
    for piece in _pieces(shown, room):
        if line and cells(line) + cells(piece.rstrip()) > room:
            lines.append(line.rstrip())
            line = ""
        line += piece
    lines.append(line.rstrip())
    blank = " " * cells(lead)
    return [(lead if at == 0 else blank) + look.paint(line, style) for at, line in enumerate(lines)]


def _pieces(text: str, room: int) -> Iterator[str]:
    """Where a line may be broken: before a sign, and within a product where it is wider than the room."""
    for piece in re.split(r"(?<= )(?=[-+=] )", text):
        if cells(piece) <= room:
            yield piece
        else:
            yield from re.findall(r"[^ ·*]*(?:[ ·*]+|$)", piece)


def _numbers(numbers: list[Entry], look: Look) -> list[str]:
    """Symbol, value, what it is, and where it comes from: beside it where there is room, else below."""
    rows = [[look.text(text) for text in (n["symbol"], figure(n["value"], n["unit"]), n["about"], _origin(n))]
            for n in numbers]
    widths = [max(cells(row[at]) for row in rows) for at in range(4)]
    room = look.width - 1 - widths[0] - widths[1] - 2 * GAP
    wide = min(widths[2], room - GAP - widths[3])
    beside = wide >= min(widths[2], LEAST)
    lines = []
    for symbol, value, about, origin in rows:
        start = f" {symbol}{' ' * (widths[0] - cells(symbol) + widths[1] - cells(value) + GAP)}{value}  "
        told = wrap(about, wide if beside else room) or [""]
        if beside:
            told[0] += " " * (wide - cells(told[0]) + GAP) + look.paint(origin, "dim")
        else:
            told += [look.paint(line, "dim") for line in wrap(origin, room)]
        lines += [(start if at == 0 else " " * cells(start)) + line for at, line in enumerate(told)]
    return lines


def _origin(number: Entry) -> str:
    if number["kind"] == "default":
        return f"default of {number['from']}"
    return str(number["from"])

