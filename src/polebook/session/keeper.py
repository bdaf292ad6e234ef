"""The recovery file of the open chain file: written, written again, and removed when there is nothing left to keep."""

from __future__ import annotations

import os
import threading
from collections.abc import Callable
from dataclasses import dataclass

from polebook.session import instance, places, recovery
from polebook.session.places import Unfit
from polebook.session.recovery import KEPT, Kept, digest

CRASH = ".crash.txt"


@dataclass(frozen=True, slots=True)
class Work:
    """What there is to be kept: the text, None for nothing; the chain file's own text, None where there is no file;
    and recovery files of earlier runs whose work is part of it."""

    text: str | None
    base: str | None = None
    taken: tuple[Kept, ...] = ()


NOTHING = Work(None)


class Keeper:
    """The recovery file of one open chain file. `want` and `act` may be called from any thread."""

    def __init__(self, path: str, holds: Callable[[], bool]) -> None:
        """`holds` tells whether the lock of the chain file is ours."""
        self.path = os.path.realpath(path)
        self.file = ""  # "" before anything was kept
        self._who, self._holds = instance.this(), holds
        self._wanted = self._done = NOTHING
        self._turn = threading.Lock()

    @property
    def lost(self) -> bool:
        """Whether what was kept is there no more: another hand has removed it."""
        return bool(self.file) and not os.path.lexists(self.file)

    def want(self, work: Work) -> None:
        """From now on this is what is to be kept."""
        self._wanted = work

    def act(self) -> str:
        """Keeps what is wanted now, if it is not kept yet. Why it can't be, "" where it is."""
        with self._turn:
            work = self._wanted
            if work == self._done and (work.text is None or not self.lost):
                return ""
            try:
                if work.text is None:
                    self._remove(work)
                else:
                    self._put(work)
            except Unfit as reason:
                return str(reason)
            self._done = work
            return ""

    def elsewhere(self) -> str:
        """Keeps what is wanted in the folder for temporary files, for want of a better one. Path, "" where it can't."""
        from tempfile import gettempdir  # deferred: hardly ever needed

        try:
            file = os.path.join(gettempdir(), f"polebook-{os.urandom(6).hex()}{KEPT}")
            places.put(file, recovery.content(self.path, self._wanted.text or "", self._wanted.base, self._who))
        except (Unfit, OSError):  # OSError: no folder of the kind
            return ""
        return file

    def report(self, text: str) -> str:
        """Keeps what is known of a crash. Path of the file. Raises Unfit."""
        folder = places.folder()
        places.ready(folder)
        file = os.path.join(folder, digest(self.path) + CRASH)
        places.put(file, text.encode("utf-8", "backslashreplace"))
        return file

    def _put(self, work: Work) -> None:
        folder = places.folder()
        places.ready(folder)
        file = self.file or self._name(folder, work)
        places.put(file, recovery.content(self.path, work.text or "", work.base, self._who))
        self.file = file
        self._let_go(work)

    def _name(self, folder: str, work: Work) -> str:
        """The plain name, unless that is another's, or has work that nobody has decided on."""
        plain = os.path.join(folder, digest(self.path) + KEPT)
        ours = any(one.file == plain and recovery.same(one) for one in work.taken)
        if self._holds() and (ours or not os.path.lexists(plain)):
            return plain
        return os.path.join(folder, f"{digest(self.path)}-{os.urandom(6).hex()}{KEPT}")

    def _remove(self, work: Work) -> None:
        if self.file:
            places.remove(self.file)
        self._let_go(work)
        self.file = ""

    def _let_go(self, work: Work) -> None:
        for one in work.taken:
            if one.file != self.file:
                recovery.drop(one)
