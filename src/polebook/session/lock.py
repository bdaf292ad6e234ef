"""The lock beside an open file: one polebook writes it, a second one says who has it and only reads.

The lock of `chain.toml` is `.chain.toml.polebook` in the same folder: made only where nothing is (O_EXCL), no link
followed. While its holder runs it also has the system's lock on it (flock), which the kernel drops with the process;
so a lock that was left behind is told from one that is held, and of two who take one over only one can.
"""

from __future__ import annotations

import errno
import json
import os
import stat
import threading
import time
from contextlib import suppress
from dataclasses import dataclass, replace

from polebook.problem import printable
from polebook.session import instance
from polebook.session.instance import Instance

if os.name == "posix":
    import fcntl

_OPEN = getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_CLOEXEC", 0) | getattr(os, "O_NONBLOCK", 0)
_MOST = 4096  # bytes of a lock
_TRIES, _PAUSE_S = 10, 0.02
_YOUNG_S = 10.0  # a lock without content that is younger than this is being made
_LOST = 255  # bytes of the longest name that a folder can have
_PATIENCE_S = 1.0  # how long leaving waits for a look that hangs on the disk


@dataclass(frozen=True, slots=True)
class Holder:
    """Who has the file: `who` is None where the lock does not tell."""

    file: str  # of the lock
    who: Instance | None
    here: bool = True  # on this host

    def words(self) -> str:
        """For the message line: who has it, since when, and what to do where that can't be checked from here."""
        name = printable(os.path.basename(self.file))
        if self.who is None:
            return f"{name} lies beside it and does not say who holds it; delete that where nobody has the file open"
        told = f"held by pid {self.who.pid} on {_short(self.who.host)} since {instance.clock(self.who.since)}"
        return told if self.here else f"{told}; if that one has gone, delete {name} beside it"


class _NoLock(Exception):
    """None can be had here: a folder that may not be written to, a full disk."""


class Lock:
    """The lock of the file at `path`, from `hold` to `release`."""

    def __init__(self, path: str) -> None:
        folder, base = os.path.split(os.path.realpath(path))
        self.file = os.path.join(folder, f".{base}.polebook")
        self._self = instance.this()
        self._handle = -1
        self._turn = threading.Lock()
        self._over = False
        self._fits = len(os.fsencode(base)) + 10 <= _LOST

    @property
    def ours(self) -> bool:
        return self._handle >= 0

    def hold(self) -> Holder | None:
        """Takes the lock, or sees that it is still ours. None where it is, or where none can be had; else who has it.

        To be called again from time to time: a lock that another has left is taken then.
        """
        with self._turn:
            if self._over or not self._fits:
                return None
            if self.ours and self._in_place(self._handle):
                return None
            self._drop()
            try:
                return self._taken()
            except _NoLock:
                return None

    def release(self) -> None:
        """The lock away, where it is still ours; nothing is taken after that."""
        with_turn = self._turn.acquire(timeout=_PATIENCE_S)
        self._over = True
        if self.ours and self._in_place(self._handle):
            if os.name != "posix":  # there an open file can't be removed
                self._drop()
            with suppress(OSError):
                os.unlink(self.file)
        self._drop()
        if with_turn:
            self._turn.release()

    def _taken(self) -> Holder | None:
        for _ in range(_TRIES):
            if self._make():
                return None
            holder = self._look()
            if holder is not None:
                return holder
            time.sleep(_PAUSE_S)
        return Holder(self.file, None)

    def _make(self) -> bool:
        """A new lock, where nothing is in its place."""
        try:
            # readable by whom the folder is shared with: they are told who has it
            handle = os.open(self.file, os.O_RDWR | os.O_CREAT | os.O_EXCL | _OPEN, 0o666)
        except FileExistsError:
            return False
        except (OSError, ValueError):  # ValueError: a NUL in the name
            raise _NoLock from None
        try:
            content = self._self.content() | {"flock": _flock(handle) is True}
            os.write(handle, json.dumps(content).encode("ascii") + b"\n")
        except OSError:
            os.close(handle)
            with suppress(OSError):
                os.unlink(self.file)
            raise _NoLock from None
        self._handle = handle
        return True

    def _look(self) -> Holder | None:
        """Who has the lock that is there; None where nobody has, and it is out of the way."""
        try:
            handle = os.open(self.file, os.O_RDONLY | _OPEN)
        except FileNotFoundError:
            return None
        except OSError:  # a link, or another user's that may not be read
            return Holder(self.file, None)
        try:
            status = os.fstat(handle)
            if not stat.S_ISREG(status.st_mode):
                return Holder(self.file, None)
            who, flocked = _read(handle)
            if who is None and time.time() - status.st_mtime < _YOUNG_S:
                return None  # another is just making it: look again
            alone = _flock(handle)
            if alone is False or (who is not None and not _left(who, flocked and alone is True)):
                return Holder(self.file, who, who is None or who.host == self._self.host)
            if self._in_place(handle):  # else another has taken it over in the meantime
                if os.name != "posix":
                    os.close(handle)
                    handle = -1
                os.unlink(self.file)
            return None
        except PermissionError:
            if os.name != "posix":  # there nobody can remove a file that its holder has open
                return Holder(self.file, who)
            raise _NoLock from None  # left behind by another user in a folder that is not ours
        except OSError:
            raise _NoLock from None
        finally:
            if handle >= 0:
                os.close(handle)

    def _in_place(self, handle: int) -> bool:
        """Whether the file of that handle is the one in the lock's place."""
        with suppress(OSError):
            return os.path.samestat(os.fstat(handle), os.lstat(self.file))
        return False

    def _drop(self) -> None:
        if self.ours:
            os.close(self._handle)
        self._handle = -1


def _left(who: Instance, let_go: bool) -> bool:
    """Whether its holder has gone. `let_go`: it had the system's lock on it and has not any more.

    That says all on one machine; between machines a lock of the system may not reach, so there it says nothing.
    """
    if who.boot and who.boot == instance.boot() and let_go:
        return True
    return instance.gone(who)


def _read(handle: int) -> tuple[Instance | None, bool]:
    """Who made the lock, and whether with the system's lock on it."""
    try:
        content = json.loads(os.read(handle, _MOST))
        who = instance.read(content)
        return replace(who, host=who.host[:200]), content.get("flock") is True
    except (ValueError, AttributeError, RecursionError):
        return None, False


def _flock(handle: int) -> bool | None:
    """Whether the system's lock is had now; None where there is no such thing on this system or disk."""
    if os.name != "posix":
        return None
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError as error:
        return False if error.errno in (errno.EWOULDBLOCK, errno.EACCES) else None
    return True


def _short(host: str) -> str:
    return printable(host if len(host) <= 40 else f"{host[:39]}…")
