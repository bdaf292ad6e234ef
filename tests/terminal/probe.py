"""The real program in a pseudo-terminal: keys as bytes, the screen as an emulator shows it, bytes and times counted."""

from __future__ import annotations

import errno
import fcntl
import os
import pty
import re
import select
import signal
import struct
import subprocess
import sys
import tempfile
import termios
import time
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

import pyte

ROOT = Path(__file__).resolve().parents[2]
BYTES = {
    "up": "\x1b[A", "down": "\x1b[B", "right": "\x1b[C", "left": "\x1b[D", "enter": "\r", "tab": "\t",
    "escape": "\x1b", "backspace": "\x7f", "delete": "\x1b[3~", "home": "\x1b[H", "end": "\x1b[F",
    "pageup": "\x1b[5~", "pagedown": "\x1b[6~", "shift+tab": "\x1b[Z", "space": " ", "ctrl+c": "\x03",
    "ctrl+q": "\x11", "ctrl+z": "\x1a", "ctrl+l": "\x0c", "ctrl+u": "\x15", "ctrl+j": "\n",
    "ctrl+f": "\x06", "ctrl+g": "\x07", "ctrl+n": "\x0e", "ctrl+p": "\x10", "ctrl+s": "\x13", "ctrl+x": "\x18",
    "ctrl+y": "\x19", "ctrl+home": "\x1b[1;5H", "ctrl+end": "\x1b[1;5F", "ctrl+left": "\x1b[1;5D",
}
"""Name of a key -> what a terminal sends for it."""
_ANSWERS = ((b"\x1b[?2026$p", b"\x1b[?2026;2$y"), (b"\x1b[?2048$p", b"\x1b[?2048;0$y"))
_FROM_OUTSIDE = ("COLORTERM", "NO_COLOR", "FORCE_COLOR", "TERM_PROGRAM", "TMUX", "LC_ALL", "LC_CTYPE", "COLUMNS",
                 "LINES", "PYTHONIOENCODING", "PYTHONUTF8")
_AT_THE_END = {"7": "h", "25": "h", "1049": "l", "2004": "l", "2026": "l"}
"""Every mode that is ever set, and what it must be then: line wrap, cursor, second screen, paste, a frame at once."""
_KEYBOARD = re.compile(rb"\x1b\[[<>][0-9]*u")  # the emulator would print a part of it
# takes the pseudo-terminal for its own before the program begins, so that it is hung up with it
_START = "import fcntl, os, sys, termios; fcntl.ioctl(1, termios.TIOCSCTTY, 0); {}os.execvp(sys.argv[1], sys.argv[1:])"
_UNCOERCED = 'os.environ.pop("LC_CTYPE", None); '  # this Python has set it where the locale is C


@dataclass(frozen=True, slots=True)
class Reply:
    """What came back: the bytes, and milliseconds from the write to the last of them (None without any)."""

    data: bytes
    last_ms: float | None

    @property
    def count(self) -> int:
        return len(self.data)


def app(*words: object) -> list[str]:
    """The words that start the program."""
    return [sys.executable, "-m", "polebook", *map(str, words)]


class _Screen(pyte.Screen):
    """The emulator's screen with a second one, as terminals have it for whole programs."""

    _SECOND = 1049
    _kept = None

    def set_mode(self, *modes, **private):
        super().set_mode(*modes, **private)
        if self._SECOND in modes and self._kept is None:
            self._kept = [self.buffer[row].copy() for row in range(self.lines)], self.cursor.y, self.cursor.x
            self.erase_in_display(2)

    def reset_mode(self, *modes, **private):
        super().reset_mode(*modes, **private)
        if self._SECOND in modes and self._kept is not None:
            rows, y, x = self._kept
            self._kept = None
            self.erase_in_display(2)
            for number, row in enumerate(rows[:self.lines]):
                self.buffer[number].update(row)
            self.cursor.y, self.cursor.x = min(y, self.lines - 1), min(x, self.columns - 1)


class Terminal:
    """A program in a pseudo-terminal of `columns` by `rows`. Use it in a `with` block: it ends the program."""

    def __init__(self, words: list[str], columns: int = 80, rows: int = 24, stdin: int | None = None,
                 **env: str) -> None:
        self.log = bytearray()
        self._screen = _Screen(columns, rows)
        self._stream = pyte.ByteStream(self._screen)
        self.fd, end = pty.openpty()
        self._size(end, columns, rows)
        outside = {key: value for key, value in os.environ.items() if key not in _FROM_OUTSIDE}
        self._state = tempfile.TemporaryDirectory()  # where unsaved work is kept, unless the test has a place for it
        outside |= {"TERM": "xterm-256color", "LANG": "C.UTF-8", "PYTHONPATH": str(ROOT / "src"),
                    "XDG_STATE_HOME": self._state.name} | env
        self.begun = time.perf_counter()
        self.process = subprocess.Popen(
            [sys.executable, "-S", "-c", _START.format("" if "LC_CTYPE" in env else _UNCOERCED), *words],
            stdin=end if stdin is None else stdin, stdout=end, stderr=end, env=outside, start_new_session=True)
        os.close(end)

    def __enter__(self) -> Terminal:
        return self

    def __exit__(self, *_: object) -> None:
        if self.process.poll() is None:
            self.process.kill()
        self.process.wait(10)
        self.hang_up()
        self._state.cleanup()

    @staticmethod
    def _size(fd: int, columns: int, rows: int) -> None:
        fcntl.ioctl(fd, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))

    def resize(self, columns: int, rows: int) -> None:
        self._screen.resize(rows, columns)
        self._size(self.fd, columns, rows)

    def forget(self) -> None:
        """The emulator's screen is blank, as one is that another program has used."""
        self._screen.reset()

    def hang_up(self) -> None:
        """The line drops."""
        if self.fd >= 0:
            os.close(self.fd)
            self.fd = -1

    def read(self, wait: float, most: int = 65536) -> bytes:
        """What comes within `wait` seconds, at most so many bytes; b"" for nothing, or at the end."""
        if self.fd < 0 or not select.select([self.fd], [], [], wait)[0]:
            return b""
        try:
            data = os.read(self.fd, most)
        except OSError as error:
            if error.errno != errno.EIO:
                raise
            return b""
        self.took(data)
        return data

    def took(self, data: bytes) -> None:
        """What has come goes on the emulator's screen, and what it asks is answered."""
        self.log += data
        self._stream.feed(_KEYBOARD.sub(b"", data))
        for asked, answer in _ANSWERS:
            for _ in range(data.count(asked)):
                self.write(answer)

    def write(self, data: bytes) -> None:
        os.write(self.fd, data)

    def quiet(self, seconds: float = 0.15, limit: float = 10.0, since: float | None = None,
              first: float | None = None) -> Reply:
        """Reads until nothing has come for `seconds`; for the first of it as long as `first`, where that is given."""
        begun = time.perf_counter() if since is None else since
        last, got = None, b""
        while (now := time.perf_counter()) - begun < limit and \
                now - (last or begun) < (seconds if last or first is None else first):
            if data := self.read(seconds):
                last, got = time.perf_counter(), got + data
        return Reply(got, None if last is None else (last - begun) * 1e3)

    def told(self, *names: str, quiet: float = 0.15) -> Reply:
        """As `press`, of keys that something comes of."""
        return self.press(*names, quiet=quiet, first=10.0)

    def press(self, *names: str, quiet: float = 0.15, first: float | None = None) -> Reply:
        """Keys written at once, then read until it is quiet."""
        begun = time.perf_counter()
        self.write("".join(BYTES.get(name, name) for name in names).encode())
        return self.quiet(quiet, since=begun, first=first)

    def until(self, wanted: str, limit: float = 20.0) -> str:
        """Reads until the screen has `wanted`; the screen."""
        return self.when(lambda text: wanted in text, wanted, limit)

    def when(self, holds, told: str, limit: float = 20.0) -> str:
        """Reads until the screen is as `holds` says."""
        end = time.perf_counter() + limit
        while not holds(text := self.screen()):
            data = self.read(0.05)
            if time.perf_counter() > end or (not data and self.process.poll() is not None and not self.read(0.05)):
                raise AssertionError(f"the screen never had {told}:\n{self.screen()}\n{bytes(self.log[-400:])!r}")
        return text

    def shows(self, drawn: str, limit: float = 10.0) -> None:
        """Reads until the screen is exactly `drawn`."""
        self.when(lambda text: text == drawn, f"\n{drawn}", limit)

    def screen(self) -> str:
        """The screen as text, blanks at the ends of its rows cut off."""
        return "\n".join(row.rstrip() for row in self._screen.display) + "\n"

    def cells(self):
        """The emulator's cells, row by row, for looking at their styles."""
        return [[self._screen.buffer[y][x] for x in range(self._screen.columns)] for y in range(self._screen.lines)]

    def ends(self, limit: float = 10.0) -> int:
        """Reads to the end of the program; its exit code, negative for a signal."""
        end = time.perf_counter() + limit
        while self.process.poll() is None and time.perf_counter() < end:
            if not self.read(0.02):
                time.sleep(0.005)
        while self.read(0.05):
            pass
        with suppress(subprocess.TimeoutExpired):
            return self.process.wait(0.1)
        raise AssertionError(f"it goes on:\n{self.screen()}")

    def signal(self, number: signal.Signals) -> None:
        self.process.send_signal(number)

    @property
    def raw(self) -> bool:
        """Whether keys reach the program one by one."""
        return not termios.tcgetattr(self.fd)[3] & termios.ICANON

    @property
    def left(self) -> str:
        """What is not as it was, of all that the app sets: "" after an end as it must be."""
        log = bytes(self.log)
        modes = {mode.decode(): to.decode() for mode, to in re.findall(rb"\x1b\[\?(\d+)([hl])", log)}
        wrong = [f"mode {mode} is {to}" for mode, to in modes.items() if _AT_THE_END.get(mode) != to]
        if log.count(b"\x1b[>1u") > log.count(b"\x1b[<u") or log.count(b"\x1b[>") > log.count(b"\x1b[>1u"):
            wrong.append("the keyboard")
        return ", ".join([*wrong, *(["keys one by one"] if self.raw else [])])

    @property
    def stopped(self) -> bool:
        """Whether the program stands still, as after ctrl+z."""
        return self._stat()[0] == "T"

    @property
    def cpu_seconds(self) -> float:
        ticks = self._stat()
        return (int(ticks[11]) + int(ticks[12])) / os.sysconf("SC_CLK_TCK")

    def _stat(self) -> list[str]:
        return Path(f"/proc/{self.process.pid}/stat").read_text(encoding="ascii").rpartition(")")[2].split()

    def colours(self) -> set[str]:
        """Numbers of the colours that were asked for."""
        found = re.findall(rb"\x1b\[([0-9;]*)m", bytes(self.log))
        return {number.decode() for codes in found for number in codes.split(b";")
                if number and (30 <= int(number) <= 49 or 90 <= int(number) <= 107)}
