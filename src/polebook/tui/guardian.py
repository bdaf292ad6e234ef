"""The acts beside the state that see to it that nothing is lost: the lock, the recovery file, looks at the disk.

Unsaved work is kept at most `KEEP_S` and a write to the disk after an edit, however many edits follow it; at once where
the program ends or stops. Reading and writing are done in threads; what they come to changes the state in the loop.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from contextlib import suppress
from dataclasses import replace
from typing import TYPE_CHECKING

from polebook.problem import Place, Problem
from polebook.session import recovery, watch
from polebook.session.instance import clock
from polebook.session.keeper import NOTHING, Keeper, Work
from polebook.session.lock import Holder, Lock
from polebook.session.places import Unfit
from polebook.session.recovery import Kept
from polebook.session.watch import Look
from polebook.text.files import Identity
from polebook.tui.background import Ashore, Background
from polebook.tui.control import recovered, watching
from polebook.tui.control.base import at
from polebook.tui.control.leaving import half_typed
from polebook.tui.view import State

if TYPE_CHECKING:  # a file that can't be read is told without it, 40 ms sooner
    import asyncio

KEEP_S = 1.0  # after the first edit that is not kept yet
RETRY_S = 5.0  # after one that could not be kept
LOOK_S = 1.0  # between looks at the file and its lock

Change = Callable[[Callable[[State], State]], None]


class Guardian:
    """Of one open file. `opened`, `begin`, then `see` after each change of the state; `end` or `leave` at the end."""

    def __init__(self, path: str) -> None:
        """Takes the file's lock: before it is read, so that what is read stays what is there."""
        self._path = path
        self._lock = Lock(path)
        self._holder = self._lock.hold()
        self._keeper = Keeper(path, lambda: self._lock.ours)
        self._ashore = Ashore()
        self._state: State | None = None
        self._handed: Work | None = NOTHING  # what was given to be kept; None after it failed
        self._taken: tuple[Kept, ...] = ()
        self._change: Change = lambda work: None
        self._timer: asyncio.TimerHandle | None = None
        self._keeping = Background("polebook-keeping", self._ashore.broken)
        self._watching = Background("polebook-watching", self._ashore.broken)
        self._looks = False  # a look is under way
        self.kept = ""  # where unsaved work was kept at the end, "" nowhere
        self.unkept = ""  # why not where it is looked for at the next opening

    def opened(self, state: State) -> State:
        """The state of the opened file, told who has it, or of what was left behind."""
        self._state = state
        if self._holder is not None:
            words = self._holder.words()
            state = replace(state, session=replace(state.session, held=words))
            return at(state, message=watching.refused(words), bad=True)
        kept, told = self._found(state)
        if told:
            state = at(state, message="; ".join(told), bad=True)
        return recovered.ask(recovered.found(state, kept))

    def begin(self, loop: asyncio.AbstractEventLoop, state: State, change: Change,
              failed: Callable[[Exception], None]) -> None:
        """Watches from now on. `change` is called, in the loop, with what makes a new state; `failed` with faults."""
        self._ashore.begin(loop, failed)
        self._change = change
        self.see(state)
        loop.call_later(LOOK_S, self._poll)

    def see(self, state: State) -> None:
        """What is to be kept from now on."""
        self._state = state
        for one in state.care.taken:
            if one not in self._taken:
                self._taken = (*self._taken, one)
        if self._ashore.loop is None or self._ashore.over:
            return
        if not state.unsaved:
            if self._handed != self._nothing():
                self._keep()
        elif self._timer is None and self._handed is None:
            self._timer = self._ashore.loop.call_later(RETRY_S, self._keep)
        elif self._timer is None and self._handed is not None and self._handed.text != state.text:
            self._timer = self._ashore.loop.call_later(KEEP_S, self._keep)

    def now(self, state: State) -> str:
        """Keeps the work at once, where the program stops or ends. Why it can't be, "" where it is."""
        self._state = state
        work = self._work(state)
        self._keeper.want(work)
        reason = self._keeper.act()
        self._handed = None if reason else work
        return reason

    def end(self, state: State) -> None:
        """The program ends, not by choice: the work is kept, an open note with it, and the file let go."""
        if self._ashore.over:
            return
        self._ashore.over = True
        with suppress(Exception):  # that may be just where the fault is that ends it
            state = half_typed(state, time.monotonic())
        self.unkept = self.now(state)
        if state.unsaved:
            self.kept = self._keeper.elsewhere() if self.unkept else self._keeper.file
        self._lock.release()

    def leave(self, state: State) -> None:
        """The program is left by choice: the work goes where its user sent it, and the file is let go."""
        if self._ashore.over:
            return
        if state.care.keep:
            self.end(state)
            return
        self._ashore.over = True
        self._keeper.want(self._nothing())
        self._keeper.act()
        self._lock.release()

    def left(self) -> list[Problem]:
        """Unsaved work on a file that can't be opened: where it is."""
        kept, _ = recovery.found(self._path, None)
        return [Problem(Place(one.file), "work on this file that was not written is kept here",
                        f"it was kept {clock(one.when)}, and can't be offered before that file can be read",
                        "mend or remove that file, or open this one: it is a chain file itself") for one in kept]

    def close(self) -> None:
        """The file let go, where the app does not come to run."""
        self._ashore.over = True
        self._lock.release()

    def report(self, text: str) -> str:
        """Keeps what is known of a crash. Where; "" where it can't be."""
        with suppress(Unfit):
            return self._keeper.report(text)
        return ""

    def _work(self, state: State) -> Work:
        return Work(state.text, state.session.history.disk, self._taken) if state.unsaved else self._nothing()

    def _nothing(self) -> Work:
        return replace(NOTHING, taken=self._taken)

    def _keep(self) -> None:
        """Has the work of now kept in the background."""
        if self._timer is not None:
            self._timer.cancel()
            self._timer = None
        if self._state is None or self._ashore.over:
            return
        self._handed = self._work(self._state)
        self._keeper.want(self._handed)
        self._keeping.do(self._keeper.act, lambda reason: self._ashore.tell(lambda: self._did(reason)))

    def _did(self, reason: str) -> None:
        if reason:
            self._handed = None
        self._change(lambda state: watching.unkept(state, reason))
        if self._state is not None:
            self.see(self._state)

    def _poll(self) -> None:
        """Another look, unless one hangs on a disk that does not answer."""
        if self._ashore.loop is None or self._state is None or self._ashore.over:
            return
        self._ashore.loop.call_later(LOOK_S, self._poll)
        if not self._looks:
            self._looks = True
            state, theirs = self._state, self._state.care.theirs
            known = state.session.identity
            seen = known if theirs is None else theirs.identity
            self._watching.do(lambda: self._look(state, seen),
                              lambda found: self._ashore.tell(lambda: self._saw(*found)))

    def _look(self, state: State, seen: Identity | None) -> tuple[Look | None, Holder | None, tuple[Kept, ...], bool]:
        """At the file and its lock; what was left behind where the lock has become ours; whether kept work is gone."""
        session = state.session
        look = watch.look(self._path, session.identity, seen)
        holder = self._lock.hold()
        kept = self._found(state)[0] if holder is None and session.held else ()
        return look, holder, kept, self._keeper.lost

    def _saw(self, look: Look | None, holder: Holder | None, kept: tuple[Kept, ...], lost: bool) -> None:
        self._looks = False
        if lost:
            self._keep()
        self._change(lambda state: watching.held(state, holder, kept, time.monotonic()))
        if look is not None:
            self._change(lambda state: watching.noticed(state, look, time.monotonic()))

    def _found(self, state: State) -> tuple[tuple[Kept, ...], tuple[str, ...]]:
        return recovery.found(self._path, state.session.history.disk, self._keeper.file)
