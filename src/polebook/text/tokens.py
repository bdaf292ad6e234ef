"""The tokens of TOML 1.0 as regular expressions, none of which can take more than linear time.

No possessive repeats: Python 3.11.2 matches them wrongly inside repeated groups. The loops are unrolled instead,
each turn beginning with a character that the run before it cannot take, so that there is nothing to go back to.
"""

from __future__ import annotations

import re

BLANK = re.compile(r"[ \t]*")
SPACE = re.compile(r"[ \t\r\n]*(?:#[^\n]*[ \t\r\n]*)*")  # blanks, line ends and comments
BARE = re.compile(r"[A-Za-z0-9_-]+")
# a multi-line string may hold one or two quotes in a row, and end in as many before its three
_LONG_BODY = r'"""[^"\\]*(?:(?:\\.|"{1,2}(?!"))[^"\\]*)*'
_LONG_PLAIN = r"'''[^']*(?:'{1,2}(?!')[^']*)*"
_SHORT_BODY = r'"[^"\\\n]*(?:\\.[^"\\\n]*)*'
_SHORT_PLAIN = r"'[^'\n]*"
_LONG = _LONG_BODY + r'"{3,5}|' + _LONG_PLAIN + r"'{3,5}"
_SHORT = _SHORT_BODY + r'"|' + _SHORT_PLAIN + "'"
STRING = re.compile(f"{_LONG}|{_SHORT}", re.DOTALL)
# a date and a time may be joined by one blank
SCALAR = re.compile(r"\d{4}-\d\d-\d\d \d\d:[^\s,\]}#]*|[^\s,\]}#=]+")
# for a text that need not be valid: strings (an open one runs to the end of its line, or of the text) and
# comments, brackets, key parts and dots, and runs of anything else
_OPEN_LONG = _LONG_BODY + r'(?:"{3,5}|\\?\Z)|' + _LONG_PLAIN + r"(?:'{3,5}|\Z)"
_OPEN_SHORT = _SHORT_BODY + r'(?:"|(?=\n)|\\?\Z)|' + _SHORT_PLAIN + r"(?:'|(?=\n)|\Z)"
ROUGH = re.compile(
    f"(?P<part>{_OPEN_LONG}|{_OPEN_SHORT}|[A-Za-z0-9_-]+)"
    r"|(?P<open>[\[{])|(?P<close>[\]}])|(?P<dot>[ \t]*\.[ \t]*)"
    r"|#[^\n]*|[^\[\]{}.#\"'A-Za-z0-9_-]+|.",
    re.DOTALL,
)
