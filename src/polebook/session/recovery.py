"""Work that was not written to its file, kept for the next opening: a recovery file a chain file, in the state folder.

Its first two lines are comments, what follows them is the text as it stood; so it is a chain file itself, and can be
opened or copied as one. The name is the SHA-256 of the chain file's real path: the plain name for whoever holds the
file's lock, one with something added for everybody else.
"""

from __future__ import annotations

import errno
import hashlib
import os
import stat
import time
from contextlib import suppress
from dataclasses import dataclass
from typing import Any

from polebook.problem import printable
from polebook.session import instance, places
from polebook.session.instance import Instance
from polebook.session.places import Unfit
from polebook.text.toml import LARGEST

KEPT, DAMAGED = ".kept", ".damaged"
_MOST = 4 * LARGEST  # what is being written on the text page may be past what a chain file can have
_HEADER = 65536  # bytes of the two lines, the longest path in them, every character spelt out
_STALE_S = 3600.0  # a file that began to be written so long ago never will be


class Damaged(Exception):
    """A recovery file that can't be read, and why."""


@dataclass(frozen=True, slots=True)
class Kept:
    """A recovery file that was found.

    file     its path;  version  what tells whether it has been written again since
    text     the work
    when     seconds of the epoch
    base     digest of the chain file's text that the work began with, "" where there was no file
    who      the polebook that kept it
    """

    file: str
    version: tuple[int, int, int]
    text: str
    when: float
    base: str
    who: Instance


def digest(text: str) -> str:
    """64 hexadecimal digits of a path or of a text."""
    return hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def found(path: str, text: str | None, but: str = "") -> tuple[tuple[Kept, ...], tuple[str, ...]]:
    """Work on the file at `path` that nobody has any more, the newest first; what is to be told of damaged files.

    `text` is that of the file (None: there is none): work that says the same needs no keeping, and is removed. `but`
    is left alone.
    """
    try:
        folder = places.folder()
        if not os.path.lexists(folder):
            return (), ()
        places.ready(folder)
        names = os.listdir(folder)
    except (OSError, Unfit):  # what can't be kept now is told when there is something to keep
        return (), ()
    name = digest(os.path.realpath(path))
    kept: list[Kept] = []
    told: list[str] = []
    for one in sorted(names):
        file = os.path.join(folder, one)
        if one.startswith(f".{name}") and one.endswith(places.NEW):
            _tidy(file)
        elif one.startswith(name) and one.endswith(KEPT) and file != but:
            try:
                work = read(file, os.path.realpath(path))
            except FileNotFoundError:  # its owner has just written the file
                continue
            except Damaged as reason:
                told.append(_set_aside(file, str(reason)))
                continue
            except OSError as error:
                told.append(f"work kept for this file can't be read ({places.words(error)}): {printable(file)}")
                continue
            if not instance.runs(work.who):
                if work.text == text:
                    drop(work)
                else:
                    kept.append(work)
    return tuple(sorted(kept, key=lambda work: -work.when)), tuple(told)


def content(path: str, text: str, base: str | None, who: Instance) -> bytes:
    """A recovery file: `text` is the work, `base` the chain file's own text, None where there is no file."""
    import json  # deferred: saves 3 ms at the opening

    data = text.encode("utf-8", "surrogatepass")
    now = time.time()
    head = {"path": path, "when": round(now, 3), "base": "" if base is None else digest(base), "bytes": len(data),
            "sha256": hashlib.sha256(data).hexdigest(), **who.content()}
    when = time.strftime("%Y-%m-%d %H:%M:%S", time.localtime(now))
    lines = (f"# polebook: work on {printable(path)} that was not written, kept {when}; opening that file offers it\n"
             f"# {json.dumps(head)}\n")
    return lines.encode("utf-8", "backslashreplace") + data


def read(file: str, path: str) -> Kept:
    """A recovery file of the chain file at the real path `path`. Raises Damaged, OSError."""
    try:
        data, status = places.get(file, _MOST + _HEADER)
    except OSError as error:
        if error.errno in (errno.ELOOP, errno.EINVAL):
            raise Damaged("a link or no file") from None
        raise
    if os.name == "posix" and status.st_uid != os.geteuid():
        raise PermissionError(errno.EPERM, "another user's")
    head, text = _parts(data)
    try:
        if head["path"] != path:
            raise Damaged("of another chain file")
        if head["bytes"] != len(text) or head["sha256"] != hashlib.sha256(text).hexdigest():
            raise Damaged("not as it was written")
        base, when = head["base"], head["when"]
        if not isinstance(base, str) or not isinstance(when, (int, float)) or not 0 <= when < 1e11:
            raise ValueError
        work = text.decode("utf-8", "surrogatepass")
        return Kept(file, _version(status), work, float(when), base, instance.read(head))
    except (KeyError, ValueError):
        raise Damaged("its second line does not say what it is") from None


def drop(kept: Kept) -> None:
    """The recovery file away, unless it has been written again since it was found."""
    if same(kept):
        places.remove(kept.file)


def same(kept: Kept) -> bool:
    """Whether the file is the one that was found."""
    with suppress(OSError):
        return _version(os.lstat(kept.file)) == kept.version
    return False


def _parts(data: bytes) -> tuple[dict[str, Any], bytes]:
    """What the second line says, and the text behind it."""
    import json  # deferred: there is hardly ever a recovery file

    first = data.find(b"\n", 0, _HEADER)
    second = data.find(b"\n", first + 1, _HEADER)
    if first < 0 or second < 0:
        raise Damaged("its first two lines are missing")
    if len(data) - second - 1 > _MOST:
        raise Damaged("too long")
    try:
        head = json.loads(data[first + 1:second].removeprefix(b"# "))
    except (ValueError, RecursionError):
        head = None
    if not isinstance(head, dict):
        raise Damaged("its second line does not say what it is")
    return head, data[second + 1:]


def _version(status: os.stat_result) -> tuple[int, int, int]:
    return status.st_ino, status.st_size, status.st_mtime_ns


def _tidy(file: str) -> None:
    with suppress(OSError):
        status = os.lstat(file)
        if stat.S_ISREG(status.st_mode) and time.time() - status.st_mtime > _STALE_S:
            os.unlink(file)


def _set_aside(file: str, reason: str) -> str:
    """A damaged file under another name, so that it is told of once, and nothing is lost that a person could read."""
    aside = f"{file.removesuffix(KEPT)}-{os.urandom(3).hex()}{DAMAGED}"
    try:
        os.rename(file, aside)
    except OSError:
        aside = file
    return f"work kept for this file is damaged ({reason}); it is left in {printable(aside)}"
