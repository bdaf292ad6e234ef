"""The folder for what must outlive the program: the user's own, shut to others, its files whole or not there at all."""

from __future__ import annotations

import errno
import os
import stat
import sys
from collections.abc import Mapping
from contextlib import suppress

NEW = ".new"  # ends the name of a file that is still being written
_OPEN = getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_CLOEXEC", 0) | getattr(os, "O_NONBLOCK", 0)
_WORDS = {
    errno.ENOSPC: "disk full",
    errno.EDQUOT: "disk quota used up",
    errno.EROFS: "read-only disk",
    errno.EACCES: "not allowed",
    errno.EPERM: "not allowed",
    errno.EFBIG: "file size limit",
    errno.ENOTDIR: "a file is in its folder's place",
    errno.EEXIST: "a file is in its folder's place",
    errno.EIO: "disk error",
}


class Unfit(Exception):
    """Nothing can be kept, for a reason of a few words: "disk full"."""


def folder(environ: Mapping[str, str] = os.environ, platform: str = sys.platform) -> str:
    """Path of the folder, which may not be there yet. Raises Unfit where the user has no home."""
    if platform == "win32":
        base = environ.get("LOCALAPPDATA", "") or _home(environ, "USERPROFILE", "AppData", "Local")
    elif platform == "darwin":
        base = _home(environ, "HOME", "Library", "Application Support")
    else:
        base = environ.get("XDG_STATE_HOME", "")
        if not os.path.isabs(base):  # the base directory specification has a relative one ignored
            base = _home(environ, "HOME", ".local", "state")
    return os.path.join(base, "polebook")


def _home(environ: Mapping[str, str], key: str, *parts: str) -> str:
    home = environ.get(key, "") or os.path.expanduser("~")
    if not os.path.isabs(home):
        raise Unfit("no home folder")
    return os.path.join(home, *parts)


def ready(path: str) -> None:
    """Makes the folder where it is not there, mode 700. Raises Unfit for one that is a link or belongs to another."""
    try:
        try:
            status = os.lstat(path)
        except FileNotFoundError:
            os.makedirs(os.path.dirname(path), mode=0o700, exist_ok=True)
            with suppress(FileExistsError):
                os.mkdir(path, 0o700)
            status = os.lstat(path)
        if not stat.S_ISDIR(status.st_mode):
            raise Unfit("its folder is a link or a file")
        if os.name == "posix":
            if status.st_uid != os.geteuid():
                raise Unfit("its folder is another user's")
            if stat.S_IMODE(status.st_mode) != 0o700:
                os.chmod(path, 0o700)
    except OSError as error:
        raise Unfit(words(error)) from None


def put(path: str, data: bytes) -> None:
    """A file at `path`, mode 600, all of `data` or as it was before. Follows no link. Raises Unfit."""
    temporary = os.path.join(os.path.dirname(path), f".{os.path.basename(path)}.{os.urandom(6).hex()}{NEW}")
    try:
        handle = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL | _OPEN, 0o600)
        try:
            rest = memoryview(data)
            while rest:
                rest = rest[os.write(handle, rest):]
            os.fsync(handle)
        finally:
            os.close(handle)
        os.replace(temporary, path)
    except OSError as error:
        remove(temporary)
        raise Unfit(words(error)) from None
    with suppress(OSError):  # so that the rename survives a power cut; the file is in its place already
        handle = os.open(os.path.dirname(path), os.O_RDONLY | _OPEN)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def get(path: str, most: int) -> tuple[bytes, os.stat_result]:
    """At most `most` + 1 bytes of the file at `path`, and what it is. Raises OSError, also for a link or no file."""
    handle = os.open(path, os.O_RDONLY | _OPEN)
    try:
        status = os.fstat(handle)
        if not stat.S_ISREG(status.st_mode):
            raise OSError(errno.EINVAL, "not a file")
        parts: list[bytes] = []
        room = most + 1
        while room > 0 and (part := os.read(handle, room)):
            parts.append(part)
            room -= len(part)
        return b"".join(parts), status
    finally:
        os.close(handle)


def remove(path: str) -> None:
    """The file at `path` away, where it is there and can be removed."""
    with suppress(OSError):
        os.unlink(path)


def words(error: OSError) -> str:
    """The reason in a few words."""
    return _WORDS.get(error.errno or 0, (error.strerror or "the system refused").lower())
