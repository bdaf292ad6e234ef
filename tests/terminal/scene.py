"""A chain file in a folder of its own that something happens to: the real program at it, small and read-only disks."""

from __future__ import annotations

import os
import random
import shutil
import subprocess
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path

from polebook.session import recovery
from tests.terminal.probe import Terminal, app
from tests.tui.desk import LISTENER, Desk

_WAIT_S = 20.0
KEYS = ("Q1.rc", "Q2.re", "Q2.c_comp", "load.resistance")
_SMALL = "size=128k"
_BOUND = ("setpriv", "--bounding-set=-dac_override,-dac_read_search")


class Untried(Exception):
    """A case that can't be tried here, and why."""


@dataclass
class Scene:
    """A chain file in a folder of its own, the state folder, and what is found in both.

    thorough  the work is taken back by the program itself, opened again; else it is read where it is kept
    """

    folder: Path
    rng: random.Random
    thorough: bool = True

    def __post_init__(self) -> None:
        self.place, self.state, self.temporary = (self.folder / name for name in ("chains", "state", "temporary"))
        for one in (self.place, self.state, self.temporary):
            one.mkdir()
        self.path = self.place / "chain.toml"
        self.put()

    def put(self) -> None:
        """The chain in its file, with a long comment behind it: more than one page of a disk."""
        self.before = LISTENER.read_text(encoding="utf-8") + "# as it was found on the bench, line by line\n" * 300
        self.path.write_text(self.before, encoding="utf-8")

    def terminal(self, *before: str, **env: str) -> Terminal:
        return Terminal([*before, *app(self.path)],
                        **{"XDG_STATE_HOME": str(self.state), "TMPDIR": str(self.temporary)} | env)

    def works(self, terminal: Terminal, at: tuple[str, ...] = KEYS) -> str:
        """A few edits of some of the keys `at`, seen on the screen; the text that they make."""
        path = self.folder / "desk.toml"
        path.write_text(self.before, encoding="utf-8")
        desk = Desk(path, seconds=0.01)
        terminal.until("? help")
        for _ in range(self.rng.randint(1, 3)):
            keys = ["f", *self.rng.choice(at), "enter", *["+"] * self.rng.randint(1, 3)]
            desk.press(*keys)
            terminal.press(*keys, quiet=self.rng.uniform(0.03, 0.15))
        terminal.when(lambda shown: " *" in shown.splitlines()[0], "the mark of unsaved work")
        return desk.text

    def kept(self) -> list[str]:
        """Work that is kept, wherever."""
        files = [*self.state.glob("polebook/*.kept"), *self.temporary.glob("*.kept")]
        return [recovery.read(str(file), os.path.realpath(self.path)).text for file in files]

    def keeps(self, wanted: str, *terminals: Terminal) -> None:
        """Waits until the work is in a recovery file."""
        end = time.monotonic() + _WAIT_S
        while wanted not in self.kept():
            assert time.monotonic() < end, "the work is not kept"
            for one in terminals:
                one.read(0.02)
            time.sleep(0.02)

    def holds(self, text: str) -> None:
        """That the file is whole, and nothing else lies beside it but a lock."""
        assert self.path.read_bytes() == text.encode("utf-8"), "the file is not as it must be"
        left = [one.name for one in self.place.iterdir() if one.name.endswith(".new")]
        assert not left, left

    def recovered(self, wanted: str) -> None:
        """That the work comes back, all of it, and goes into the file."""
        assert wanted in self.kept(), "the work is not kept"
        if not self.thorough:
            return
        with self.terminal() as terminal:
            terminal.until("unsaved work, kept ")
            terminal.press("enter")
            terminal.until("recovered")
            terminal.press("w")
            terminal.until("written")
            self.holds(wanted)
            terminal.press("q")
            assert terminal.ends() == 0
        assert not self.kept() and not list(self.place.glob(".*")), "something is left behind"


@contextmanager
def read_only_disk(at: Path) -> Iterator[None]:
    """The folder as one of a disk that can't be written. Raises Untried."""
    mount("--bind", str(at), str(at))
    try:
        mount("-o", "remount,bind,ro", str(at))
        yield
    finally:
        subprocess.run(["umount", "-l", str(at)], check=False)


@contextmanager
def small_disk(at: Path) -> Iterator[Callable[[int], None]]:
    """A disk of 128 KiB at `at`, and what fills it but for so many bytes. Raises Untried."""
    mount("-t", "tmpfs", "-o", _SMALL, "tmpfs", str(at))
    filler = at / "filler"

    def fill(room: int) -> None:
        with suppress(OSError), open(filler, "ab", buffering=0) as file:
            while file.write(bytes(4096)):
                pass
        os.truncate(filler, max(filler.stat().st_size - room, 0))

    try:
        yield fill
    finally:
        subprocess.run(["umount", "-l", str(at)], check=False, capture_output=True)


def mount(*words: str) -> None:
    done = subprocess.run(["mount", *words], check=False, capture_output=True) if shutil.which("mount") else None
    if done is None or done.returncode:
        raise Untried("needs the right to mount a disk")


def bound() -> tuple[str, ...]:
    """Words ahead of a program that permissions are to count for."""
    if os.geteuid():
        return ()
    if not shutil.which("setpriv"):
        raise Untried("root passes over permissions, and there is no setpriv")
    return _BOUND
