"""What the environment says of the terminal: its characters, its colours, how much of a terminal it is."""

from __future__ import annotations

import os
import re
import sys
from collections.abc import Mapping, MutableMapping

_GLYPHS = "─●◂█▏Ωµ–…"
_UTF8 = re.compile(r"utf-?8", re.IGNORECASE)
_COERCED = ("C.UTF-8", "C.utf8", "UTF-8")  # what Python itself puts into LC_CTYPE where the locale is C
_CONSOLE = re.compile(r"(?:linux|vt\d|ansi|cons\d|pcansi|sun|wsvt)")
_COLOURLESS = re.compile(r"vt\d|.*-(?:m|mono)$")


def ascii_only(environ: Mapping[str, str] = os.environ) -> bool:
    """Whether the terminal has no glyphs but those of ASCII: a console, a locale that says so, another encoding.

    The locale is taken by its name: where it is not installed, Python goes on in UTF-8 whatever it says.
    """
    if environ.get("TERM", "").startswith("linux") or not _utf8(_locale(environ)):
        return True
    encoding = getattr(sys.__stdout__, "encoding", None) or "ascii"
    try:
        _GLYPHS.encode(encoding)
    except UnicodeEncodeError:
        return True
    return False


def colours(environ: Mapping[str, str] = os.environ) -> bool:
    """Whether colours are welcome: not with a NO_COLOR that says anything, nor on a terminal that has none."""
    return not environ.get("NO_COLOR") and not _COLOURLESS.match(environ.get("TERM", ""))


def console(environ: Mapping[str, str] = os.environ) -> bool:
    """Whether the terminal knows a VT100's sequences and may print later ones: no second screen to go to and leave."""
    return _CONSOLE.match(environ.get("TERM", "")) is not None


def settle(environ: MutableMapping[str, str] = os.environ) -> None:
    """Takes out what would have Textual do otherwise than the terminal says; to be called before it is imported.

    Its switches (one of them ends in a traceback), and a size that a shell has exported: the terminal has its own.
    """
    for name in [name for name in environ if name == "TEXTUAL" or name.startswith("TEXTUAL_")]:
        del environ[name]
    environ["TEXTUAL_COLOR_SYSTEM"] = "standard"
    if _has_size():
        environ.pop("COLUMNS", None)
        environ.pop("LINES", None)


def _locale(environ: Mapping[str, str]) -> str:
    """The name of the locale for characters; "" where none is set."""
    own = environ.get("LC_CTYPE", "")
    if own in _COERCED and sys.flags.utf8_mode:
        own = ""
    return environ.get("LC_ALL") or own or environ.get("LANG") or ""


def _utf8(locale: str) -> bool:
    """Whether a locale has UTF-8. Where none is set, nobody said otherwise; one without a charset is an old one."""
    if not locale or _UTF8.search(locale):
        return True
    return "." not in locale and locale not in ("C", "POSIX") and not sys.flags.utf8_mode  # then Python has taken it


def _has_size() -> bool:
    out = sys.__stdout__
    try:
        return out is not None and all(os.get_terminal_size(out.fileno()))
    except (OSError, ValueError):
        return False
