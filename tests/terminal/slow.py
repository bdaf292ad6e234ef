"""A slow line between the user and the program: so many bytes a second each way, each of them late."""

from __future__ import annotations

import os
import select
import time
from collections import deque
from dataclasses import dataclass

from tests.terminal.probe import BYTES, Terminal

_TICK_S = 0.002
_BURST = 32  # bytes that are taken at once
_FRAME = b"\x1b[?2026h"  # begins each painting


@dataclass(frozen=True, slots=True)
class Told:
    """What a run of keys came to: bytes and paintings sent, seconds from the last key to the last byte."""

    keys: int
    sent: int
    paints: int
    late_s: float


class SlowTerminal(Terminal):
    """A terminal at a line of `baud` (ten bits a byte) that takes `delay_s` each way; as fast as it is until `slow`."""

    baud, delay_s = 9600, 0.3
    _is_slow = False

    def slow(self) -> None:
        self._is_slow, self._room, self._looked = True, 0.0, time.monotonic()
        self._going: deque[tuple[float, bytes]] = deque()
        self._coming: deque[tuple[float, bytes]] = deque()
        self._last = 0.0  # when the last byte of the keys is through

    def write(self, data: bytes) -> None:
        if not self._is_slow:
            super().write(data)
            return
        for byte in data:
            self._last = max(self._last, time.monotonic()) + 10 / self.baud
            self._going.append((self._last + self.delay_s, bytes([byte])))

    def read(self, wait: float, most: int = 65536) -> bytes:
        if not self._is_slow:
            return super().read(wait, most)
        end = time.monotonic() + wait
        while not (got := self._passed()) and time.monotonic() < end:
            time.sleep(_TICK_S)
        return got

    def _passed(self) -> bytes:
        """Keys on to the program, its output into the line; what has come out of it at this end."""
        now = time.monotonic()
        while self._going and self._going[0][0] <= now:
            super().write(self._going.popleft()[1])
        self._room = min(self._room + (now - self._looked) * self.baud / 10, _BURST)
        self._looked = now
        if self._room >= 1 and select.select([self.fd], [], [], 0)[0]:
            data = os.read(self.fd, int(self._room))
            self._room -= len(data)
            self._coming.append((now + self.delay_s, data))
        got = b""
        while self._coming and self._coming[0][0] <= now:
            got += self._coming.popleft()[1]
        if got:
            self.took(got)
        return got

    def held(self, names: list[str], a_second: float, drawn: str) -> Told:
        """Keys pressed one after the other, so many a second (0: at once), until the screen is as `drawn`."""
        before = len(self.log)
        for name in names:
            self.write(BYTES.get(name, name).encode())
            end = time.monotonic() + (1 / a_second if a_second else 0.0)
            while (left := end - time.monotonic()) > 0:
                self.read(left)
        begun = time.monotonic()
        self.shows(drawn, 60.0)
        late = time.monotonic() - begun
        self.quiet(3 * self.delay_s)
        self.shows(drawn)
        log = bytes(self.log[before:])
        return Told(len(names), len(log), log.count(_FRAME), late)
