"""What can go wrong with an open file, tried on the real program: `python -m tests.bench.losses [--times N]`.

Each case opens a copy of a chain in a pseudo-terminal, edits it, and has something happen to the program, the disk or
the file. Then the file must be whole - a text that it had or was given, to the byte - and the work, every edit of it,
must be offered when the file is opened again, taken, and written. A kill that nothing can foresee may take the edits
of the last `kills.MOST_S` seconds: how old the oldest that went was stands in the table.

A small disk is a tmpfs, which needs the right to mount one. Where the user is root, permissions are tried without the
right to pass over them (setpriv). What can't be tried here says so.
"""

from __future__ import annotations

import argparse
import os
import random
import shutil
import signal
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from tests.bench import kills
from tests.terminal.probe import Terminal
from tests.terminal.scene import KEYS, Scene, Untried, bound, read_only_disk, small_disk

_WAIT_S = 20.0
_CHANGED = "changed on the disk since"


def _kill(terminal: Terminal) -> None:
    terminal.signal(signal.SIGKILL)
    terminal.process.wait(10)


def _ended(number: signal.Signals) -> Callable[[Scene], str]:
    def case(scene: Scene) -> str:
        with scene.terminal() as terminal:
            wanted = scene.works(terminal)
            terminal.signal(number)
            assert terminal.ends() == 128 + number
            assert not terminal.left
        scene.holds(scene.before)
        scene.recovered(wanted)
        return ""

    return case


def _dropped(scene: Scene) -> str:
    ignoring = scene.rng.random() < 0.5
    with scene.terminal(*(("sh", "-c", 'trap "" HUP; exec "$@"', "sh") if ignoring else ())) as terminal:
        wanted = scene.works(terminal)
        terminal.hang_up()
        terminal.process.wait(10)
    scene.holds(scene.before)
    scene.recovered(wanted)
    return ""


def _asleep(scene: Scene) -> str:
    with scene.terminal("bash", "--norc", "--noprofile", "-ic", '"$@"; sleep 60', "bash") as terminal:
        wanted = scene.works(terminal)
        terminal.write(b"\x1a")
        scene.keeps(wanted, terminal)
        job = int(_children(terminal.process.pid)[0])
        os.kill(job, signal.SIGKILL)
        end = time.monotonic() + _WAIT_S
        while str(job) in _children(terminal.process.pid) and time.monotonic() < end:
            terminal.read(0.02)
    scene.holds(scene.before)
    scene.recovered(wanted)
    return ""


def _children(pid: int) -> list[str]:
    return Path(f"/proc/{pid}/task/{pid}/children").read_text(encoding="ascii").split()


def _full_file(scene: Scene) -> str:
    with small_disk(scene.place) as fill:
        scene.put()
        with scene.terminal() as terminal:
            wanted = scene.works(terminal)
            fill(scene.rng.choice((0, 4096, 8192)))  # it is noticed at the beginning, or in the midst
            for _ in range(2):
                terminal.press("w", quiet=0.1)
                terminal.until("the disk is full")
                scene.holds(scene.before)
            scene.keeps(wanted, terminal)
            _kill(terminal)
        scene.holds(scene.before)
        os.truncate(scene.place / "filler", 0)
        scene.recovered(wanted)
    return "told; written once there is room"


def _full_both(scene: Scene) -> str:
    """No room for the file nor for the work: told, and kept with the temporary files at the end."""
    with small_disk(scene.place) as fill:
        scene.put()
        with scene.terminal(XDG_STATE_HOME=str(scene.place / "state")) as terminal:
            terminal.until("? help")
            fill(0)
            wanted = scene.works(terminal)
            terminal.until("no recovery")
            terminal.press("w", quiet=0.1)
            terminal.until("the disk is full")
            terminal.signal(signal.SIGTERM)
            assert terminal.ends() == 143
            assert "can't be offered at the next opening" in " ".join(terminal.screen().split())
        scene.holds(scene.before)
        assert scene.kept() == [wanted]
    return "told; kept with the temporary files"


def _full_then_room(scene: Scene) -> str:
    with small_disk(scene.place) as fill:
        scene.put()
        scene.state = scene.place / "state"
        with scene.terminal() as terminal:
            terminal.until("? help")
            fill(0)
            wanted = scene.works(terminal)
            terminal.until("no recovery")
            os.truncate(scene.place / "filler", 0)
            scene.keeps(wanted, terminal)
            terminal.when(lambda shown: "no recovery" not in shown, "the end of that")
            _kill(terminal)
        scene.holds(scene.before)
        scene.recovered(wanted)
    return "kept by itself once there is room"


def _read_only_disk(scene: Scene) -> str:
    with read_only_disk(scene.place):
        with scene.terminal() as terminal:
            terminal.until("read-only")
            wanted = scene.works(terminal)
            terminal.press("w", quiet=0.1)
            terminal.until("it is on a read-only file system")
            scene.keeps(wanted, terminal)
            _kill(terminal)
        scene.holds(scene.before)
    scene.recovered(wanted)
    return "told at the opening"


def _read_only_folder(scene: Scene) -> str:
    scene.place.chmod(0o555)
    try:
        with scene.terminal(*bound()) as terminal:
            terminal.until("read-only")
            wanted = scene.works(terminal)
            terminal.press("w", quiet=0.1)
            terminal.until("do not allow")
            terminal.press("q", quiet=0.1)
            terminal.until("leave; opening the file again offers what was edited")
            terminal.press("enter", quiet=0.0)
            assert terminal.ends() == 0
        scene.holds(scene.before)
    finally:
        scene.place.chmod(0o755)
    scene.recovered(wanted)
    return "told at the opening; kept on leaving"


def _shut(what: str, mode: int) -> Callable[[Scene], str]:
    """Permission for the file or its folder lost while it is open."""
    def case(scene: Scene) -> str:
        one = scene.path if what == "file" else scene.place
        was = one.stat().st_mode & 0o777
        try:
            with scene.terminal(*bound()) as terminal:
                wanted = scene.works(terminal)
                one.chmod(mode)
                terminal.press("w", quiet=0.1)
                terminal.when(lambda shown: "can't be" in shown or _CHANGED in shown, "why it is not saved")
                scene.keeps(wanted, terminal)
                _kill(terminal)
        finally:
            one.chmod(was)
        scene.holds(scene.before)
        scene.recovered(wanted)
        return "told; written once it may be"

    return case


def _vanished(scene: Scene) -> str:
    with scene.terminal() as terminal:
        wanted = scene.works(terminal)
        shutil.rmtree(scene.place)
        terminal.until("gone from disk")
        terminal.press("q", quiet=0.1)
        terminal.until("write the file and leave")
        terminal.press("enter", quiet=0.1)
        terminal.until("the file has gone from the disk")
        terminal.press("enter", quiet=0.1)
        terminal.until("its folder is not there")
        terminal.press("q", "enter", quiet=0.1)
        terminal.until("it could not be written")
        terminal.press("enter", quiet=0.0)
        assert terminal.ends() == 0
    assert not scene.place.exists()
    scene.place.mkdir()
    scene.recovered(wanted)
    return "told; kept on leaving; written once it is there"


def _vanished_and_back(scene: Scene) -> str:
    away = scene.folder / "away"
    with scene.terminal() as terminal:
        wanted = scene.works(terminal)
        scene.place.rename(away)
        terminal.until("gone from disk")
        away.rename(scene.place)
        terminal.when(lambda shown: "gone from disk" not in shown, "the file again")
        terminal.press("w", quiet=0.1)
        terminal.until("written")
        scene.holds(wanted)
        terminal.press("q", quiet=0.0)
        assert terminal.ends() == 0
    assert not scene.kept()
    return "written"


def _unmounted(scene: Scene) -> str:
    scene.path.unlink()
    with small_disk(scene.place):
        scene.put()
        with scene.terminal() as terminal:
            wanted = scene.works(terminal)
            subprocess.run(["umount", "-l", str(scene.place)], check=True)
            terminal.until("gone from disk")
            scene.keeps(wanted, terminal)
            _kill(terminal)
    scene.recovered(wanted)
    return "told"


def _other(change: Callable[[Scene, str], None], seen: str, text: bool = True) -> Callable[[Scene], str]:
    """Another program changes the file: its text stays in the file, the work is kept; each can be had."""
    def case(scene: Scene) -> str:
        theirs = scene.before.replace('"1M"', '"3M"')
        at_once = scene.rng.random() < 0.5  # the key that writes comes before the change has been noticed
        with scene.terminal() as terminal:
            wanted = scene.works(terminal)
            change(scene, theirs)
            now = scene.path.read_bytes() if scene.path.is_file() else None
            if at_once:
                terminal.press("w", quiet=0.1)
            terminal.until(seen)
            assert (scene.path.read_bytes() if scene.path.is_file() else None) == now, "written over it unasked"
            scene.keeps(wanted, terminal)
            if text and scene.rng.random() < 0.5:
                terminal.press(*(() if "changed on the disk" in terminal.screen() else ("w",)), "enter", quiet=0.1)
                terminal.until("read again")
                terminal.press("u", "w", quiet=0.1)
                terminal.until("written")
                scene.holds(wanted)
                return "asked"
            _kill(terminal)
        assert (scene.path.read_bytes() if scene.path.is_file() else None) == now
        if scene.path.is_dir():
            scene.path.rmdir()
        if not text and scene.path.exists():
            scene.path.unlink()
        scene.recovered(wanted)
        return "asked"

    return case


def _replaced(scene: Scene, theirs: str) -> None:
    other = scene.folder / "other"
    other.write_text(theirs, encoding="utf-8")
    os.replace(other, scene.path)


def _written_over(scene: Scene, theirs: str) -> None:
    scene.path.write_text(theirs, encoding="utf-8")


def _made_binary(scene: Scene, theirs: str) -> None:
    scene.path.write_bytes(b"\xff\xfe\0")


def _folder_instead(scene: Scene, theirs: str) -> None:
    scene.path.unlink()
    scene.path.mkdir()


def _two(scene: Scene) -> str:
    """The first one writes, the second can't; both are killed, and the work of both is offered."""
    with scene.terminal() as first, scene.terminal() as second:
        one, two = scene.works(first, KEYS[:2]), scene.works(second, KEYS[2:])
        holder, other = (second, first) if "read-only" in first.screen().splitlines()[0] else (first, second)
        other.press("w", quiet=0.1)
        other.until("it can't be written here")
        scene.holds(scene.before)
        mine, theirs = (one, two) if holder is first else (two, one)
        holder.press("w", quiet=0.1)
        holder.until("written")
        scene.holds(mine)
        other.until("changed on the disk")
        scene.keeps(theirs, first, second)
        for terminal in scene.rng.sample((first, second), 2):
            _kill(terminal)
    scene.holds(mine)
    scene.recovered(theirs)
    return "the second one told, and asked"


def _two_killed(scene: Scene) -> str:
    with scene.terminal() as first:
        first.until("? help")
        with scene.terminal() as second:
            second.until("held by pid")
            one, two = scene.works(first, KEYS[:2]), scene.works(second, KEYS[2:])
            scene.keeps(one, first, second)
            scene.keeps(two, first, second)
            for terminal in scene.rng.sample((first, second), 2):
                _kill(terminal)
    scene.holds(scene.before)
    assert sorted(scene.kept()) == sorted((one, two))
    if scene.thorough:
        with scene.terminal() as terminal:
            terminal.until("(1 of 2)")
            terminal.press("enter", "enter", quiet=0.1)
            terminal.until("recovered")
            terminal.press("w", quiet=0.1)
            terminal.until("written")
            found = [scene.path.read_text(encoding="utf-8")]
            terminal.press("u", "w", quiet=0.1)
            terminal.when(lambda _: scene.path.read_text(encoding="utf-8") != found[0], "the other one")
            found.append(scene.path.read_text(encoding="utf-8"))
            assert {*found} == {one, two}
    return "both offered"


def _no_state(scene: Scene) -> str:
    """What was kept is removed by another hand while the file is open; an edit later it is killed."""
    with scene.terminal() as terminal:
        wanted = scene.works(terminal)
        scene.keeps(wanted, terminal)
        shutil.rmtree(scene.state)
        scene.keeps(wanted, terminal)
        _kill(terminal)
    scene.holds(scene.before)
    scene.recovered(wanted)
    return "kept again"


def _killed_unsaved(times: int, seed: int) -> str:
    found = kills.unsaved_runs(times, seed)
    oldest = max(age for *_, age in found)
    return f"edits of the last {oldest:.2f} s at most" if oldest else ""


def _killed_saving(times: int, seed: int) -> str:
    kills.runs(times, seed)
    return ""


CASES: dict[str, Callable[[Scene], str]] = {
    "SIGHUP": _ended(signal.SIGHUP),
    "SIGTERM": _ended(signal.SIGTERM),
    "SIGQUIT": _ended(signal.SIGQUIT),
    "SIGINT": _ended(signal.SIGINT),
    "the line drops": _dropped,
    "ctrl+z, then kill -9": _asleep,
    "disk full at the file": _full_file,
    "disk full everywhere": _full_both,
    "disk full, then room": _full_then_room,
    "read-only disk": _read_only_disk,
    "read-only folder": _read_only_folder,
    "folder may not be written": _shut("folder", 0o555),
    "folder shut": _shut("folder", 0o000),
    "file may not be written": _shut("file", 0o444),
    "file may not be read": _shut("file", 0o000),
    "folder deleted": _vanished,
    "folder away and back": _vanished_and_back,
    "disk taken out": _unmounted,
    "file replaced": _other(_replaced, _CHANGED),
    "file written over": _other(_written_over, _CHANGED),
    "file emptied": _other(lambda scene, _: os.truncate(scene.path, 0), _CHANGED),
    "file cut off": _other(lambda scene, _: os.truncate(scene.path, 700), _CHANGED),
    "file made binary": _other(_made_binary, "not UTF-8", text=False),
    "file deleted": _other(lambda scene, _: scene.path.unlink(), "gone from", text=False),
    "a folder in its place": _other(_folder_instead, "this is a folder", text=False),
    "two at one file": _two,
    "two at one file, both killed": _two_killed,
    "kept work deleted": _no_state,
}
"""What happens -> what is tried; each returns what the user was told or had to do."""

KILLS: dict[str, Callable[[int, int], str]] = {
    "kill -9, work unsaved": _killed_unsaved,
    "kill -9 while saving": _killed_saving,
}


def tried(name: str, seed: int, thorough: bool = True) -> str:
    """One case, once. Raises Untried, or AssertionError for what was lost."""
    with tempfile.TemporaryDirectory() as folder:
        return CASES[name](Scene(Path(folder), random.Random(f"{seed} {name}"), thorough))


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.losses")
    parser.add_argument("--times", type=int, default=5)
    parser.add_argument("--only", default="", help="the cases whose name has this")
    args = parser.parse_args()
    print(f"{'what happens':30} {'times':>5}  {'file':5} {'work':9} {'lost':38} what the user sees")
    wrong = 0
    for name in (*KILLS, *CASES):
        if args.only not in name:
            continue
        said, lost, fault = "", "nothing", ""
        try:
            if name in KILLS:
                lost = KILLS[name](args.times, 1) or lost
            else:
                for number in range(args.times):
                    said = tried(name, number)
        except Untried as reason:
            print(f"{name:30} {0:5}  not tried here: {reason}", flush=True)
            continue
        except AssertionError as error:
            wrong, fault = wrong + 1, str(error)
        if fault:
            print(f"{name:30} FAILED: {fault}", flush=True)
        else:
            print(f"{name:30} {args.times:5}  {'whole':5} {'recovered':9} {lost:38} {said}", flush=True)
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
