"""A long day at the app: random keys over all pages, at random sizes, with saves and undos, on every demo chain.

    python -m tests.soak --keys 20000 --seed 1

The keys are posted to the real app under Textual's test driver, one a millisecond, some of them far ahead of the
painting. Held to: the app never ends and never has a fault; what is painted is what is drawn; every saved file holds
the text that was saved, and opened anew has the same ledger, figure for figure; undo comes back to the first text byte
for byte, redo to the last; memory does not grow. On a failure the seed and the shortest tail of keys that fails again
on a fresh file are printed.
"""

from __future__ import annotations

import argparse
import asyncio
import gc
import json
import os
import random
import shutil
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, field
from multiprocessing import get_context
from pathlib import Path
from typing import TypeAlias

from textual import events
from textual.pilot import Pilot

from polebook.book.build import document
from polebook.session.state import Session, open_file
from polebook.tui import keys
from polebook.tui.app import PolebookApp
from polebook.tui.control import opening
from polebook.tui.draw.screen import screen
from polebook.tui.guardian import Guardian
from polebook.tui.lines import plain_text
from polebook.tui.view import State

CHAINS = sorted((Path(__file__).parents[1] / "chains").glob("*.toml"))
MOST_MB = 20.0
GAP_S = 0.001  # from key to key
SEEN = 40  # keys between two looks at what is painted
REST = "rest"  # in the place of a key: until all keys have been applied
_PAINTED_S = 10.0
_SIZES = ((80, 24), (140, 45), (100, 30), (60, 16), (59, 15), (200, 60), (20, 5), (1, 1))
_LEAVING = frozenset({"leave", "suspend"})
_VALUES = ("4k7", "100n", "2p2", "1.5", "60 dB", "5 %", "0", "-3", "E12", "1m", "20k", "10k, 20k", "3", "x y", "über")
_IN_FIELD = ("escape", "enter", "enter", "tab", "shift+tab", "up", "down", "left", "right", "home", "end", "backspace",
             "delete", "pageup", "pagedown", "ctrl+u", "ctrl+y", "ctrl+w", "ctrl+k", "ctrl+g", "ctrl+n", "ctrl+f",
             "ctrl+j", "ctrl+x", "ctrl+s", "ctrl+home", "ctrl+end", "ctrl+left", "+", "-")
_PARTS = ("rc", "re", "rb1", "couple", "load.r", "source.r", "c_", "stray", "rd", "rs", "rf", "upper", "gain", "tol")
_MOST_STAGES = 10
_CHARACTERS = {"space": " ", "escape": "\x1b", "enter": "\r", "tab": "\t"}
_SAVES = frozenset({"w", "ctrl+s"})

Step: TypeAlias = "str | tuple[int, int]"
"""A key by its name, REST, or a size."""
Hand: TypeAlias = Callable[[PolebookApp], Iterator[Step]]


class Broken(Exception):
    """Something that must hold does not."""


@dataclass
class Tally:
    """What was done and seen in a session.

    memory  MB after a round over all pages, and at the end, all undone;  log  the steps;  fault  what broke, "" nothing
    """

    keys: int = 0
    edits: int = 0
    sizes: int = 0
    saves: int = 0
    ledgers: int = 0
    undone: int = 0
    screens: int = 0
    pages: set[str] = field(default_factory=set)
    memory: tuple[float, float] = (0.0, 0.0)
    fault: str = ""
    log: list[Step] = field(default_factory=list)


def hand(rng: random.Random, count: int) -> Hand:
    """Somebody who presses `count` keys, in runs of some, sees what came of them and goes on."""
    def steps(app: PolebookApp) -> Iterator[Step]:
        left = count
        while left > 0:
            for key in _run(rng, app.state):
                left -= 1
                yield key
            yield REST
            if rng.random() < 0.04:
                yield rng.choice(_SIZES) if rng.random() < 0.6 else (rng.randint(1, 200), rng.randint(1, 60))

    return steps


def _run(rng: random.Random, state: State) -> list[str]:
    """The next few keys."""
    view, session = state.view, state.session
    if view.overlay is not None or view.field is not None or view.writing is not None:
        if session.problems and rng.random() < 0.3:
            return ["escape", "escape", "escape", *["u"] * rng.randint(1, 3)]
        if rng.random() < 0.4:
            return ["escape"]
        if rng.random() < 0.4:
            return [*rng.choice(_VALUES), rng.choice(("enter", "enter", "tab", "escape"))]
        return [rng.choice(_IN_FIELD) for _ in range(rng.randint(1, 4))]
    if session.problems and rng.random() < 0.4:
        return ["u"] * rng.randint(1, 2)
    if session.chain is not None and len(session.chain.stages) > _MOST_STAGES:
        return ["x", "right", "x", "left", "x"]
    if state.unsaved and rng.random() < 0.02:
        return [rng.choice(("q", "ctrl+q", "ctrl+c")), rng.choice(("up", "down")), "escape"]
    if rng.random() < 0.25:
        digits = [rng.choice(tuple(keys.PAGES)) for _ in range(rng.randint(1, 3))]
        return ["tab", *digits] if view.focus == "sheet" else digits
    if rng.random() < 0.15:
        return [rng.choice(("+", "-", "left", "right", "up", "down", ",", "."))] * rng.randint(2, 20)
    if rng.random() < 0.25 and view.focus == "sheet":
        return [*["down"] * rng.randint(0, 12), rng.choice(("+", "-", "+", "-", "*", "/", "delete"))]
    if rng.random() < 0.05:
        return ["u"] * rng.randint(1, 3) + ["U"] * rng.randint(0, 2)
    if rng.random() < 0.08:
        return ["w"]
    if rng.random() < 0.12:
        steps = rng.choice((["+"], ["-"], ["*"], ["/"], ["+", "+", "-"], [*rng.choice(_VALUES), "enter"]))
        return ["f", *rng.choice(_PARTS), "enter", *steps]
    anything = [name for name, action in keys.ACTIONS.items() if action not in _LEAVING]
    return [rng.choice(anything) for _ in range(rng.choice((1, 1, 2, 3, 8)))]


async def play(path: Path, steps: Hand, tally: Tally, warm: bool) -> None:
    """The app on the file at `path`, from its opening to its end by `q`. Raises Broken, or the app's own fault."""
    tally.log.clear()
    guardian = Guardian(str(path))
    app = PolebookApp(guardian.opened(opening(str(path))), guardian)
    first = app.state.session.history.text
    async with app.run_test(size=(80, 24)) as pilot:
        await _rested(app)
        if warm:
            await _walk(app, pilot, path, _round(app), Tally())
        before = settled_mb()
        await _walk(app, pilot, path, steps(app), tally)
        await _undone(app, first, tally)
        tally.memory = before, settled_mb()
        await _leaves(app, path, first)


async def _walk(app: PolebookApp, pilot: Pilot[int], path: Path, steps: Iterator[Step], tally: Tally) -> None:
    disk, past = app.state.session.history.disk, app.state.session.history.past
    for step in steps:
        tally.log.append(step)
        if isinstance(step, tuple):
            await pilot.resize_terminal(*step)
            tally.sizes += 1
        elif step != REST:
            tally.keys += 1
            await _press(app, step)
        if step == REST or step in _SAVES or isinstance(step, tuple):
            await _rested(app)
            tally.pages.add(app.state.view.page)
            history = app.state.session.history
            tally.edits += history.past != past and not history.future
            past = history.past
            if history.disk != disk:
                disk = history.disk
                saved(path, app.state.session, tally)
            if tally.keys // SEEN > tally.screens:
                await _seen(app, tally)


async def _press(app: PolebookApp, *names: str) -> None:
    for name in names:
        app.post_message(events.Key(name, name if len(name) == 1 else _CHARACTERS.get(name)))
        await asyncio.sleep(GAP_S)


async def _rested(app: PolebookApp) -> None:
    """Until every key that was posted has been applied."""
    through = asyncio.Event()
    app.call_later(through.set)
    while not through.is_set() and app.fault is None and app.is_running:
        await asyncio.sleep(GAP_S)
    if app.fault is not None:
        raise Broken(app.fault)
    if not app.is_running:
        raise Broken("the app has ended")


async def _seen(app: PolebookApp, tally: Tally) -> None:
    """That what is painted is what is drawn; a job's progress may be between two paintings."""
    tally.screens = tally.keys // SEEN
    end = time.monotonic() + _PAINTED_S
    while app.state.job is None:
        drawn = plain_text(screen(app.state, *app.size))
        if drawn == "\n".join(row.text.rstrip() for row in app.screen._compositor.render_strips()) + "\n":
            break
        if time.monotonic() > end:
            raise Broken(f"not painted as drawn:\n{drawn}")
        await asyncio.sleep(0.01)


def saved(path: Path, session: Session, tally: Tally) -> None:
    """That the file holds what was saved, and opened anew is the same chain with the same ledger."""
    tally.saves += 1
    if path.read_bytes() != (session.history.disk or "").encode("utf-8"):
        raise Broken("the file does not hold what was saved")
    if session.history.text != session.history.disk:
        return
    again = open_file(str(path))
    if again.problems != session.problems or (again.ledger is None) != (session.ledger is None):
        raise Broken(f"saved and opened anew it has other problems: {again.problems}, not {session.problems}")
    if again.ledger is not None and session.ledger is not None:
        tally.ledgers += 1
        one, other = (json.dumps(document(ledger), default=str) for ledger in (session.ledger, again.ledger))
        if one != other:
            at = next(n for n, (a, b) in enumerate(zip(one, other, strict=False)) if a != b)
            raise Broken(f"saved and opened anew it has another ledger: {one[at - 60:at + 60]} | "
                         f"{other[at - 60:at + 60]}")


async def _undone(app: PolebookApp, first: str, tally: Tally) -> None:
    """All undone, redone, and undone again."""
    for _ in range(8):  # whatever is open, and the choice that waited behind it
        await _press(app, "escape")
        await _rested(app)
    view = app.state.view
    if view.overlay is not None or view.field is not None or view.writing is not None:
        raise Broken(f"Esc leaves something open: {view.overlay or view.field or 'the text page'}")
    history = app.state.session.history
    while history.future:  # of steps that were undone on the way
        history = history.redo()
    last = history.text
    tally.undone += len(history.past)
    for key, wanted in (("u", first), ("U", last), ("u", first)):
        while app.state.session.history.past if key == "u" else app.state.session.history.future:
            before = app.state.session.history
            await _press(app, *[key] * 10)
            await _rested(app)
            if app.state.session.history == before:
                raise Broken(f"{key} does nothing")
        if app.state.session.history.text != wanted:
            raise Broken(f"all of {key} gives another text:\n{app.state.session.history.text}")


async def _leaves(app: PolebookApp, path: Path, first: str) -> None:
    await _press(app, "w")
    await _rested(app)
    if path.read_bytes() != first.encode("utf-8"):
        raise Broken("the first text is not in the file")
    await _press(app, "q")
    end = time.monotonic() + _PAINTED_S
    while app.is_running and time.monotonic() < end:
        await asyncio.sleep(0.01)
    if app.is_running or app.return_code != 0 or app.fault is not None:
        raise Broken(f"q does not leave: {app.return_code} {app.fault}")


def resident_mb() -> float:
    """Memory of this process, MB."""
    pages = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[1])
    return pages * os.sysconf("SC_PAGE_SIZE") / 1e6


def settled_mb() -> float:
    for _ in range(3):
        gc.collect()
    return resident_mb()


def _round(app: PolebookApp) -> Iterator[Step]:
    """Once over all pages, with a look at what each of them can."""
    yield from ("tab", REST)
    for digit in keys.PAGES:
        yield from (digit, REST, "enter", REST, "=", REST, "escape", "v", "s", REST, "b", "down", ".", REST, "escape",
                    *(() if app.state.view.focus == "page" else ("tab",)), REST)
    yield from ("escape", "?", "escape", "!", "escape", "e", "escape", "+", "u", REST, (140, 45), REST,
                *(("tab",) if app.state.view.focus == "page" else ()))


def alone(chain: Path, steps: Hand, tally: Tally, folder: Path, warm: bool = False) -> None:
    """One session on a copy of a chain; `warm`: with a round over all pages before the steps."""
    path = Path(shutil.copy(chain, folder / "chain.toml"))
    asyncio.run(play(path, steps, tally, warm))
    left = [one.name for one in folder.iterdir() if one != path and one.name != "state"]
    if left or list(folder.glob("state/polebook/*.kept")):
        raise Broken(f"left behind: {left or 'work kept that is saved'}")


def shortest(chain: Path, log: list[Step], kind: str, folder: Path) -> list[Step]:
    """The shortest tail of the steps that fails likewise on a fresh file; all of them where none does."""
    def fails(size: int) -> bool:
        for one in folder.glob("state/polebook/*"):
            one.unlink()
        try:
            alone(chain, lambda app: iter([*log[-size:], REST]), Tally(), folder)
        except Exception as error:
            return told(error) == kind
        return False

    high = 1
    while high < len(log) and not fails(high):
        high *= 2
    low, high = high // 2, min(high, len(log))
    while high - low > 1:
        half = (low + high) // 2
        low, high = (low, half) if fails(half) else (half, high)
    return log[-high:]


def told(error: BaseException) -> str:
    """What tells one failure from another."""
    return f"{type(error).__name__}: {str(error).strip().splitlines()[-1] if str(error).strip() else ''}"[:160]


def session(chain: Path, seed: int, count: int) -> Tally:
    """`count` keys on a copy of a chain, in a process of its own, as the program has it."""
    tally = Tally()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        os.environ["XDG_STATE_HOME"] = str(folder / "state")
        try:
            alone(chain, hand(random.Random(f"{seed} {chain.name}"), count), tally, folder, warm=True)
        except Exception as error:
            log = list(tally.log)
            tail = shortest(chain, log, told(error), folder)
            tally.fault = f"{error}\nthe shortest tail that fails, {len(tail)} steps of {len(log)}:\n{tail}"
    return tally


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.soak")
    parser.add_argument("--keys", type=int, default=20000, help="shared out among the chains")
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--only", default="", help="the demo chains whose name has this")
    args = parser.parse_args()
    chains = [chain for chain in CHAINS if args.only in chain.name]
    begun, found = time.monotonic(), []
    for number, chain in enumerate(chains):
        share = args.keys * (number + 1) // len(chains) - args.keys * number // len(chains)
        with ProcessPoolExecutor(1, get_context("spawn")) as process:
            tally = process.submit(session, chain, args.seed, share).result()
        found.append(tally)
        if tally.fault:
            print(f"seed {args.seed}, {chain.name}, after {tally.keys} keys: {tally.fault}")
            return 1
        before, after = tally.memory
        print(f"{chain.name:28} {tally.keys:6} keys {tally.edits:5} edits {tally.undone:4} steps undone at the end "
              f"{tally.saves:4} saves {before:6.1f} MB before {after:6.1f} after {after - before:+5.1f}", flush=True)
    pages = set().union(*(tally.pages for tally in found))
    grown = max(tally.memory[1] - tally.memory[0] for tally in found)
    print(f"seed {args.seed}: {sum(tally.keys for tally in found)} keys, {sum(tally.edits for tally in found)} edits, "
          f"{sum(tally.sizes for tally in found)} sizes in {time.monotonic() - begun:.0f} s; "
          f"pages {', '.join(sorted(pages))}")
    print(f"{sum(tally.saves for tally in found)} saves, {sum(tally.ledgers for tally in found)} of them opened anew "
          f"with the same ledger, the rest with the same faults or edited on; memory {grown:+.1f} MB at most")
    return 0 if grown < MOST_MB and pages == set(keys.PAGES.values()) else 1


if __name__ == "__main__":
    sys.exit(main())
