"""Values as TOML writes them."""

from __future__ import annotations

import re
from collections.abc import Sequence

# a decimal number of TOML 1.0 without underscores: no zero in front, a digit on either side of the point
_NUMBER = re.compile(r"[+-]?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?")
_NAMED = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\r": "\\r", "\t": "\\t"}
_THREE, _ESCAPED_THREE = '"' * 3, '\\"' * 3
_BARE = re.compile(r"[A-Za-z0-9_-]+")


def literal(text: str) -> str:
    """A quantity as typed, written for a file: bare where it is a plain TOML number, else as a text in quotes."""
    text = text.strip()
    return text if _NUMBER.fullmatch(text) else string(text)


def string(text: str) -> str:
    """`text` as a TOML text in double quotes. A lone surrogate, which no file can hold, becomes U+FFFD."""
    return f'"{"".join(_escaped(char) for char in text)}"'


def paragraph(lines: Sequence[str], newline: str) -> str:
    """Lines as a TOML text over several lines, each ended by `newline`, which a reader takes as "\\n"."""
    body = newline.join("".join(char if char in '"\t' else _escaped(char) for char in line) for line in lines)
    return f'"""{newline}{body.replace(_THREE, _ESCAPED_THREE)}{newline}"""'


def key(name: str) -> str:
    """`name` as a key: bare where it can be."""
    return name if _BARE.fullmatch(name) else string(name)


def _escaped(char: str) -> str:
    if char in _NAMED:
        return _NAMED[char]
    if char < " " or "\x7f" <= char < "\xa0":
        return f"\\u{ord(char):04x}"
    return "\ufffd" if "\ud800" <= char <= "\udfff" else char
