"""A chain file on the disk: read as text, saved whole or not at all."""

from __future__ import annotations

import errno
import os
import stat
from collections.abc import Iterable
from contextlib import suppress
from dataclasses import dataclass

from polebook.problem import Place, Problem, ProblemsFound
from polebook.text.toml import LARGEST, too_large

_NO_BLOCK = getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_CLOEXEC", 0) | getattr(os, "O_NOCTTY", 0)
_CHAIN = "a chain file"
_REASONS = {
    errno.ENOENT: ("there is no such file", "name an existing file"),
    errno.ENOTDIR: ("a part of its path is a file, not a folder", "name an existing file"),
    errno.EACCES: ("its permissions, or those of its folder, do not allow it", "change them, or use your own copy"),
    errno.EPERM: ("the system does not allow it", "use a copy of your own"),
    errno.EROFS: ("it is on a read-only file system", "save it elsewhere"),
    errno.ENOSPC: ("the disk is full", "free some space, then save again"),
    errno.EDQUOT: ("the disk quota is used up", "free some space, then save again"),
    errno.ELOOP: ("its symbolic links lead in a circle", "name the file itself"),
    errno.ENAMETOOLONG: ("the name is too long", "use a shorter name"),
    errno.ENXIO: ("it is a pipe or a device, not a file", "name a file"),
    errno.EFBIG: ("the file would be larger than is allowed", "raise the limit for the size of files"),
    errno.EMFILE: ("too many files are open", "close some, then try again"),
    errno.EIO: ("the disk reports an error", "check the disk"),
}


@dataclass(frozen=True, slots=True)
class Identity:
    """What tells whether a file on the disk is still the one that was read."""

    device: int
    inode: int
    size: int
    modified_ns: int


@dataclass(frozen=True, slots=True)
class FileText:
    """A file as it was read. `newline` is that of its first line ("\\n" for a text without one)."""

    path: str
    text: str
    mode: int
    identity: Identity
    newline: str
    read_only: bool


def read(path: str | os.PathLike[str]) -> FileText:
    """The text of the file at `path`, UTF-8, at most 512 KiB. Raises ProblemsFound; never waits on a pipe or device."""
    name = os.fspath(path)
    data, status = contents(name, LARGEST)
    if len(data) > LARGEST:
        raise ProblemsFound([too_large(name, max(status.st_size, len(data)))])
    text = decoded(name, data)
    mode = stat.S_IMODE(status.st_mode)
    return FileText(name, text, mode, _identity(status), newline(text), not os.access(name, os.W_OK))


def contents(name: str, most: int, what: str = _CHAIN) -> tuple[bytes, os.stat_result]:
    """What the file `name` holds, one byte past `most` at most, and its state; `what` says what is asked for.

    Raises ProblemsFound; never waits on a pipe or device.
    """
    try:
        _check_kind(name, os.stat(name), what)  # first, for to open a device may be to set it going
        handle = os.open(name, os.O_RDONLY | _NO_BLOCK)
        try:
            status = os.fstat(handle)
            _check_kind(name, status, what)
            return _contents(handle, most), status
        finally:
            os.close(handle)
    except (OSError, ValueError) as error:  # ValueError: a NUL in the name
        raise _failed(name, error, "read") from None


def newline(text: str) -> str:
    """The end of a text's first line, "\\n" for a text of one line."""
    feed = text.find("\n")
    return "\r\n" if feed > 0 and text[feed - 1] == "\r" else "\n"


def identity(path: str | os.PathLike[str]) -> Identity | None:
    """What the file at `path` is now, to be compared with what it was when it was read; None where there is none."""
    with suppress(OSError, ValueError):  # ValueError: a NUL in the name
        return _identity(os.stat(path))
    return None


def _identity(status: os.stat_result) -> Identity:
    return Identity(status.st_dev, status.st_ino, status.st_size, status.st_mtime_ns)


def save(path: str | os.PathLike[str], text: str | Iterable[str]) -> None:
    """Puts `text` in the place of the file at `path`, all of it or nothing. Raises ProblemsFound, the file untouched.

    A long text may come in pieces, each made when the one before is written.
    A new file is written beside the old one, flushed to the disk and renamed over it, so no reader and no power cut
    meets half a file. Mode and, where allowed, owner stay; of a symbolic link the target is replaced.
    """
    name = os.fspath(path)
    temporary = ""
    try:
        target = os.path.realpath(name)
        status = _existing(name, target)
        folder, base = os.path.split(target)
        temporary = os.path.join(folder, f".{base[:100]}.{os.urandom(6).hex()}.new")
        _write(temporary, (text,) if isinstance(text, str) else text, status)
        os.replace(temporary, target)
        temporary = ""
    except FileNotFoundError:
        raise ProblemsFound([Problem(Place(name), "the file can't be saved", "its folder is not there",
                                     "make the folder again, then save again")]) from None
    except (OSError, ValueError) as error:  # ValueError: a NUL in the name, a lone surrogate in the text
        raise _failed(name, error, "saved") from None
    finally:
        if temporary:
            _remove(temporary)
    _flush_folder(folder)


def create(path: str | os.PathLike[str], text: str) -> None:
    """Writes `text` to a new file at `path`. Raises ProblemsFound; what stands there already is left as it is."""
    name = os.fspath(path)
    made = ""
    try:
        data = text.encode("utf-8")
        handle = os.open(name, os.O_WRONLY | os.O_CREAT | os.O_EXCL | _NO_BLOCK, 0o666)
        made = name
        try:
            _write_all(handle, data)
            os.fsync(handle)
        finally:
            os.close(handle)
        made = ""
    except FileExistsError:
        raise ProblemsFound([Problem(Place(name), "there is such a file already",
                                     "a new chain is never written over one that is there",
                                     "choose another name, or move that file away")]) from None
    except FileNotFoundError:
        raise ProblemsFound([Problem(Place(name), "the file can't be written", "its folder is not there",
                                     "make the folder first, or choose another")]) from None
    except (OSError, ValueError) as error:
        raise _failed(name, error, "written") from None
    finally:
        if made:
            _remove(made)
    _flush_folder(os.path.dirname(os.path.realpath(name)))


def _existing(name: str, target: str) -> os.stat_result | None:
    """The state of the file to replace; None for a new one."""
    try:
        status = os.stat(target)
    except FileNotFoundError:
        return None
    _check_kind(name, status)
    if not os.access(target, os.W_OK):
        raise OSError(errno.EROFS if _read_only_disk(target) else errno.EACCES, "read-only file")
    return status


def _read_only_disk(path: str) -> bool:
    return os.name == "posix" and bool(os.statvfs(path).f_flag & os.ST_RDONLY)


def _check_kind(name: str, status: os.stat_result, what: str = _CHAIN) -> None:
    if stat.S_ISREG(status.st_mode):
        return
    if stat.S_ISDIR(status.st_mode):
        problem = Problem(Place(name), "this is a folder", f"{what} is asked for", "name a file in it")
    else:
        problem = Problem(Place(name), "this is a pipe or a device", f"{what} is asked for", "name a file")
    raise ProblemsFound([problem])


def _contents(handle: int, most: int) -> bytes:
    """What the file holds, one byte past `most` at most."""
    parts: list[bytes] = []
    room = most + 1
    while room > 0 and (part := os.read(handle, room)):
        parts.append(part)
        room -= len(part)
    return b"".join(parts)


def decoded(name: str, data: bytes) -> str:
    """The text of UTF-8 `data`; `name` is the name that a problem carries. Raises ProblemsFound."""
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError as error:
        before = data[: error.start]
        line = before.count(b"\n") + 1
        column = len(before[before.rfind(b"\n") + 1 :].decode("utf-8")) + 1
        utf16 = data.startswith((b"\xff\xfe", b"\xfe\xff"))
        why = f"byte {error.start + 1} of the file, {data[error.start]:#04x}, is not part of a UTF-8 text"
        problem = Problem(
            Place(name, line, column), "the file is not UTF-8 text",
            f"it begins like a text in UTF-16, and {why}" if utf16 else why, "save it as UTF-8 in your editor",
        )
        raise ProblemsFound([problem], data.decode("utf-8", "replace")) from None


def _write(temporary: str, pieces: Iterable[str], status: os.stat_result | None) -> None:
    handle = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL | _NO_BLOCK, 0o666 if status is None else 0o600)
    try:
        for piece in pieces:
            _write_all(handle, piece.encode("utf-8"))
        if status is not None:
            _take_over(handle, status)
        os.fsync(handle)
    finally:
        os.close(handle)


def _write_all(handle: int, data: bytes) -> None:
    while data:
        data = data[os.write(handle, data) :]


def _take_over(handle: int, status: os.stat_result) -> None:
    """Owner and mode of the old file; the owner stays another's where the system does not let it be given away."""
    if os.name != "posix":
        return
    if (status.st_uid, status.st_gid) != (os.getuid(), os.getgid()):
        with suppress(PermissionError):  # an ordinary user saves a colleague's file: it becomes the user's own
            os.fchown(handle, status.st_uid, status.st_gid)
    os.fchmod(handle, stat.S_IMODE(status.st_mode))


def _remove(temporary: str) -> None:
    with suppress(OSError, ValueError):  # it was never made; the fault that is told is the one before
        os.unlink(temporary)


def _flush_folder(folder: str) -> None:
    """So that the rename survives a power cut. The file is in place: a folder that can't be flushed is no failure."""
    with suppress(OSError):
        handle = os.open(folder, os.O_RDONLY | _NO_BLOCK)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _failed(name: str, error: OSError | ValueError, done: str) -> ProblemsFound:
    if isinstance(error, UnicodeEncodeError):
        why, fix = "the text holds half of a character pair, which UTF-8 can't write", "take that character out"
    elif isinstance(error, OSError):
        told = (error.strerror or "the system refused").lower()
        why, fix = _REASONS.get(error.errno or 0, (told, "mend that and try again"))
    else:
        why, fix = "its name holds a NUL character", "name an existing file"
    return ProblemsFound([Problem(Place(name), f"the file can't be {done}", why, fix)])
