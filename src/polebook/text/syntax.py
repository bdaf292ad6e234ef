"""A fault of TOML's syntax in plain words: what the parser stumbled over, why, and how to mend it."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from polebook.problem import Place, Problem
from polebook.text.tokens import ROUGH, STRING

_AT = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
_KEY = r"""[A-Za-z0-9_-]+|"[^"\n]*"|'[^'\n]*'"""
_LINE = re.compile(rf"\s*((?:{_KEY})(?:\s*\.\s*(?:{_KEY}))*)\s*=\s*(.*)")
_WORDS = re.compile(r"\s*(\S+(?:[ \t]+[^\s=]+)+)\s*=")
_DATE = re.compile(r"\d{4}-\d\d?-\d\d?")
_DIGITS = re.compile(r"[0-9_]+")
_REAL_DATE = "a date is year-month-day of a day that exists"
_QUOTED = "a text, and a number with a prefix or a unit, stands in quotes"


@dataclass(frozen=True, slots=True)
class _Fault:
    """Where the parser stopped: its line (number, text) and column, and the key and value that stand on that line."""

    message: str
    text: str
    lines: list[str]
    line: int
    column: int

    @property
    def source(self) -> str:
        return self.lines[self.line - 1]

    @property
    def token(self) -> str:
        """What stands at the fault, to the next blank or separator."""
        match = re.match(r"[^\s,\]}#]+", self.source[self.column - 1 :])
        return match[0] if match else ""

    @property
    def key(self) -> str:
        match = _LINE.match(self.source)
        return match[1] if match else ""

    @property
    def value(self) -> tuple[int, str]:
        """Column and text of what follows the "=", without a comment; (0, "") without a "="."""
        match = _LINE.match(self.source)
        if not match:
            return 0, ""
        text = match[2] if match[2][:1] in ("'", '"') else match[2].partition("#")[0]
        return match.start(2) + 1, text.rstrip()


@dataclass(frozen=True, slots=True)
class _Told:
    """What is said of a fault; `column` and `width`, or the character `at`, where it is not the token at the fault."""

    what: str
    why: str
    fix: str
    column: int = 0
    width: int = 0
    at: int = -1


def syntax_problem(text: str, file: str, error: str) -> Problem:
    """The problem that `error`, the message of a TOML parser on `text`, is about."""
    lines = [line.removesuffix("\r") for line in text.split("\n")]
    match = _AT.search(error)
    message = error[: match.start()] if match else error
    if match and match[1]:
        line, column = int(match[1]), int(match[2])
    else:  # the end of the text: the last line that holds anything
        line = max((number for number, part in enumerate(lines, 1) if part.strip()), default=1)
        column = len(lines[line - 1].rstrip()) + 1
    fault = _Fault(message, text, lines, min(line, len(lines)), column)
    told = next((told for tell in _TELLERS if (told := tell(fault))), None) or _unknown(fault)
    if told.at >= 0:
        place = Place.of(text, told.at, file, told.width)
    else:
        width = told.width or (1 if told.column else len(fault.token))
        place = Place(file, fault.line, told.column or fault.column, max(width, 1))
    return Problem(place, _cut(told.what), _cut(told.why), _cut(told.fix))


def _cut(sentence: str) -> str:
    """`sentence`, without the middle of a piece of the file that is too long to repeat."""
    return sentence if len(sentence) <= 160 else f"{sentence[:100]}…{sentence[-50:]}"


def _unknown(fault: _Fault) -> _Told:
    return _Told(
        "the line is not TOML", fault.message[:1].lower() + fault.message[1:],
        'write every line as a header ([target], [[stage]]) or as key = value, texts in quotes',
    )


def _twice(fault: _Fault) -> _Told | None:
    """A key or table given twice."""
    if match := re.match(r"Cannot declare \((.*?),?\) twice", fault.message):
        name = ".".join(part.strip(" '\"") for part in match[1].split(","))
        if name == "stage":
            fix = "write the header of each stage in double brackets: [[stage]]"
        else:
            fix = "put all its keys under one header, and take the other out"
        column = len(fault.source) - len(fault.source.lstrip()) + 1
        return _Told(f"the table {name} is given twice", "a table has one header in the whole file", fix,
                     column, len(fault.source.partition("#")[0].strip()))
    if fault.message.startswith("Duplicate inline table key"):
        name = fault.message.partition("key ")[2].strip("'")
        return _Told(f"{name} is given twice in one inline table", "a key has one value", "take one of the two out")
    if fault.message == "Cannot overwrite a value" and fault.source.lstrip().startswith("["):
        return _Told("this header names what is there already",
                     "a name is a table, a list of tables or a value, and only one of them",
                     "use another name, or [[double brackets]] for every table of a list", 1, len(fault.source))
    if fault.message == "Cannot overwrite a value" and fault.key:
        first = _earlier(fault)
        column = fault.source.index(fault.key) + 1
        why = f"a key has one value in its table, and line {first} gives it one" if first else "a key has one value"
        return _Told(f"{fault.key} is given twice", why, "take one of the two lines out", column, len(fault.key))
    if fault.message.startswith(("Cannot mutate immutable", "Cannot redefine")):
        return _Told("this adds to a table that is complete",
                     "a table given inline or by dotted keys takes no more keys elsewhere",
                     "put all of its keys in one place", 1, len(fault.source))
    return None


def _earlier(fault: _Fault) -> int:
    """The line of the same table that gives the same key; 0 for none."""
    for number in range(fault.line - 1, 0, -1):
        line = fault.lines[number - 1]
        if line.lstrip().startswith("["):
            return 0
        match = _LINE.match(line)
        if match and match[1] == fault.key:
            return number
    return 0


def _string(fault: _Fault) -> _Told | None:
    """A text that is not closed, or holds what a text can't."""
    ends = ("Unterminated string", "Expected \"'", "Illegal character '\\n'", "Found invalid character '\\n'")
    if fault.message.startswith(ends) and (match := _open_string(fault.text)):
        if match[0].startswith(('"""', "'''")):
            return _Told("this text is never closed", f"it ends at the next {match[0][:3]}, and there is none",
                         f"write {match[0][:3]} where it ends", width=3, at=match.start())
        width = len(match[0].rstrip())
        return _Told("this text is not closed", f"it must end with {match[0][0]} on the line where it begins",
                     f"close it with {match[0][0]}, or use three quotes at both ends for several lines",
                     width=width, at=match.start())
    if fault.message.startswith(("Illegal character", "Found invalid character")):
        name = fault.message.rpartition("character ")[2].strip("'")
        return _Told(f"a control character, {name}, stands here",
                     "a chain file is plain text with tabs and line ends only", "take the character out",
                     fault.column)
    if fault.message.startswith("Unescaped '\\'"):
        return _Told("a backslash in double quotes begins an escape, and this is none",
                     'known are \\n \\t \\" \\\\ \\uXXXX',
                     "write the backslash twice, or put the text in single quotes")
    if fault.message.startswith(("Invalid hex", "Escaped character")):
        return _Told("the escape names no character", "\\u takes four hexadecimal digits, \\U eight",
                     "write the character itself")
    return None


def _open_string(text: str) -> re.Match[str] | None:
    """The first text that is opened and not closed."""
    for match in ROUGH.finditer(text):
        if match.lastgroup == "part" and match[0][0] in "\"'" and not STRING.fullmatch(match[0]):
            return match
    return None


def _brackets(fault: _Fault) -> _Told | None:
    """A list, an inline table or a header that is not closed."""
    if fault.message.startswith("Unclosed") and (told := _unquoted_item(fault)):
        return told
    if fault.message == "Unclosed array":
        return _Told("a list is not closed, or a comma is missing in it", "its items stand in [ ] with commas between",
                     'write it like [ "1k", "2k" ]')
    in_table = "{" in fault.source and fault.message.startswith("Invalid initial")
    if fault.message == "Unclosed inline table" or in_table:
        return _Told("an inline table is not closed, or a comma is missing or too many in it",
                     "it stands on one line, in { }, with commas between its keys and none after the last",
                     'write it like { rc = "1 %", re = "1 %" }')
    if fault.message.startswith("Expected ']"):
        closing = "]]" if "]]" in fault.message else "]"
        kind = "[[stage]]" if closing == "]]" else "[target]"
        column = len(fault.source) - len(fault.source.lstrip()) + 1
        return _Told("the header is not closed", f"it ends in {closing}, with nothing but a name before",
                     f"write it like {kind}", column, len(fault.source.partition("#")[0].strip()))
    return None


def _unquoted_item(fault: _Fault) -> _Told | None:
    """An item such as 50R, of which the parser took the 50."""
    column = fault.column
    while column > 1 and fault.source[column - 2 : column - 1].strip(" \t,[]{}=\"'"):
        column -= 1
    if column == fault.column or not fault.token:
        return None
    word = fault.source[column - 1 : fault.column - 1] + fault.token
    return _Told(f"{word} stands without quotes", _QUOTED, f'write "{word}"', column, len(word))


def _key(fault: _Fault) -> _Told | None:
    """A line that is no header and no key = value."""
    words = fault.source.partition("#")[0].strip()
    column = len(fault.source) - len(fault.source.lstrip()) + 1
    if fault.message.startswith("Expected '='"):
        if match := re.match(rf"\s*({_KEY})\s*:\s*(.*)", fault.source):
            return _Told("there is no \"=\" after the key", "a key and its value are joined by \"=\", not by a colon",
                         f"write {match[1]} = {match[2].strip()}", column, len(words))
        if match := _WORDS.match(fault.source):
            return _Told(f'"{match[1]}" is not a key', "a key is one word of letters, digits, _ and -",
                         f"write {'_'.join(match[1].split())}", column, len(match[1]))
        return _Told("there is no \"=\" after the key", "every line is a header or key = value",
                     "write key = value, or put # before a comment", column, len(words))
    if fault.message.startswith(("Invalid initial", "Invalid statement")):
        if fault.source.lstrip().startswith("="):
            return _Told("there is no key before the \"=\"", "every line is a header or key = value",
                         "write the key before it", column, len(words))
        return _Told("no key begins like this", "a key is one word of letters, digits, _ and -",
                     "write key = value, or put # before a comment")
    return None


def _value(fault: _Fault) -> _Told | None:
    """A value that TOML can't read: quotes missing, a comma in a number, nothing at all."""
    if fault.message.startswith("Exceeds the limit"):
        run = max(_DIGITS.finditer(fault.text), key=lambda match: len(match[0]))
        return _Told("a whole number has thousands of digits", "no quantity needs over 17 of them",
                     "write it with an exponent", width=len(run[0]), at=run.start())
    if fault.message == "Invalid date or datetime":
        return _Told(f"{fault.token} is not a date", _REAL_DATE, "write it like 2026-05-04")
    if fault.message not in ("Invalid value", "Expected newline or end of document after a statement"):
        return None
    column, value = fault.value
    if not column or fault.column < column:
        return _behind(fault)
    if not value:
        return _Told(f'there is no value after "{fault.key} ="', "every key needs a value",
                     f'write one, for example {fault.key} = "1k", or take the line out')
    if value[0] in "“”„‘’«»":
        return _Told("the text stands in typographic quotes", 'TOML knows the straight quotes " and \' only',
                     f'write {fault.key} = "{value.strip("“”„‘’«»")}"', column, len(value))
    if value[0] in "\"'[{":
        return _behind(fault)
    if "\r" in value:
        return _Told("a carriage return stands alone here", "a line ends with a line feed, or with both",
                     "save the file with the line ends of your system", column + value.index("\r"), 1)
    if _DATE.match(value):
        return _Told(f"{value} is not a date", _REAL_DATE, "write it like 2026-05-04",
                     column, len(value))
    if value in ("True", "False", "TRUE", "FALSE"):
        return _Told(f"{value} is not a value", "true and false are written small",
                     f"write {fault.key} = {value.lower()}", column, len(value))
    if "," in value and re.fullmatch(r"[+-]?\d+,\d+\S*", value):
        point = value.replace(",", ".")
        good = point if re.fullmatch(r"[+-]?\d+\.\d+", point) else f'"{point}"'
        return _Told(f"there is a comma in the number {value}", "a number has a decimal point",
                     f"write {fault.key} = {good}", column, len(value))
    quotable = value.replace("\\", "\\\\").replace('"', '\\"')
    return _Told(f"{value} stands without quotes", _QUOTED, f'write {fault.key} = "{quotable}"', column, len(value))


def _behind(fault: _Fault) -> _Told:
    """Something after the end of a statement."""
    if fault.message == "Invalid value":
        if not fault.token:
            return _Told("a value is missing here", 'between commas, and after a "=", a value stands', "write it")
        return _Told(f"{fault.token} stands without quotes", _QUOTED,
                     f'write "{fault.token.strip("“”‘’")}"')
    rest = fault.source[fault.column - 1 :].rstrip()
    return _Told(f'"{rest}" follows where the line should end', "a line holds one header or one key = value",
                 "put it on a line of its own, or # before a comment", fault.column, len(rest))


_TELLERS: tuple[Callable[[_Fault], _Told | None], ...] = (_twice, _string, _brackets, _key, _value)
