"""One running polebook among others: which process on which host, since when, and whether it still runs."""

from __future__ import annotations

import os
import time
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

_PROC = "/proc"


@dataclass(frozen=True, slots=True)
class Instance:
    """`since` in seconds of the epoch. `boot` and `start` ("" where the system has none) tell this run of the machine
    and this process from a later one with the same number."""

    pid: int
    host: str
    since: float
    boot: str = ""
    start: str = ""

    def content(self) -> dict[str, Any]:
        """As a lock or a recovery file has it."""
        return {"pid": self.pid, "host": self.host, "since": self.since, "boot": self.boot, "start": self.start}


def this() -> Instance:
    """The running process."""
    pid = os.getpid()
    return Instance(pid, host(), round(time.time(), 3), boot(), started(pid))


def read(content: Mapping[str, Any]) -> Instance:
    """What `content` says. Raises ValueError for what is no instance."""
    pid, since = content.get("pid"), content.get("since")
    texts = [content.get(name, "") for name in ("host", "boot", "start")]
    if not isinstance(pid, int) or isinstance(pid, bool) or pid < 1 or not all(isinstance(text, str) for text in texts):
        raise ValueError("it names no process")
    if not isinstance(since, (int, float)) or not 0 <= since < 1e11:
        raise ValueError("it has no time")
    return Instance(pid, texts[0], float(since), texts[1], texts[2])


def gone(one: Instance) -> bool:
    """Whether it runs no more, for certain: of one on another host nothing is."""
    if one.host != host():
        return False
    if one.boot and boot() and one.boot != boot():
        return True
    if os.name != "posix":
        return False
    try:
        os.kill(one.pid, 0)
    except (ProcessLookupError, OverflowError):
        return True
    except OSError:  # another user's
        pass
    start = started(one.pid)
    return bool(one.start and start and one.start != start)


def runs(one: Instance) -> bool:
    """Whether it runs, for certain: on this machine, and the very process rather than a later one of its number."""
    return one.host == host() and bool(one.start) and one.boot == boot() and one.start == started(one.pid)


def clock(seconds: float, now: float | None = None) -> str:
    """A time of the epoch for a reader: "12:01" today, else with its date."""
    then, today = time.localtime(seconds), time.localtime(now)
    same = (then.tm_year, then.tm_yday) == (today.tm_year, today.tm_yday)
    return time.strftime("%H:%M" if same else "%Y-%m-%d %H:%M", then)


def host() -> str:
    """This machine's name."""
    if hasattr(os, "uname"):
        return os.uname().nodename
    return os.environ.get("COMPUTERNAME", "")


def boot() -> str:
    """What tells this run of the machine from the one before."""
    return _text(f"{_PROC}/sys/kernel/random/boot_id").strip()


def started(pid: int) -> str:
    """When a process began, in ticks since the machine did."""
    fields = _text(f"{_PROC}/{pid}/stat").rpartition(")")[2].split()  # its name, in brackets, may hold anything
    return fields[19] if len(fields) > 19 else ""


def _text(path: str) -> str:
    try:
        with open(path, encoding="ascii", errors="replace") as file:
            return file.read(4096)
    except OSError:
        return ""
