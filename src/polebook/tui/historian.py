"""The act beside the state that finds out what the history page wants, in a thread: no key waits for git or a disk."""

from __future__ import annotations

from collections.abc import Callable
from datetime import date
from typing import TYPE_CHECKING

from polebook.tui.background import Ashore, Background
from polebook.tui.control.history import taken
from polebook.tui.histories import Answer, Wish, wish
from polebook.tui.record_work import answer
from polebook.tui.view import State

if TYPE_CHECKING:
    import asyncio

    from polebook.tui.guardian import Change


class Historian:
    """`begin`, then `see` after each change of the state: one wish at a time, that of the state as it then is."""

    def __init__(self) -> None:
        self._ashore = Ashore()
        self._work = Background("polebook-history", self._ashore.broken)
        self._change: Change = lambda work: None
        self._state: State | None = None
        self._busy = False
        self._timer: asyncio.TimerHandle | None = None

    def begin(self, loop: asyncio.AbstractEventLoop, state: State, change: Change,
              failed: Callable[[Exception], None]) -> None:
        """`change` is called, in the loop, with what makes a new state; `failed` with faults of ours."""
        self._ashore.begin(loop, failed)
        self._change = change
        self.see(state)

    def see(self, state: State) -> None:
        """What is wanted from now on; keys that follow each other soon are waited for where there is time."""
        self._state = state
        if self._ashore.loop is None or self._busy:
            return
        if self._timer is not None:
            self._timer.cancel()
            self._timer = None
        if (wanted := wish(state)) is not None:
            if wanted.rest:
                self._timer = self._ashore.loop.call_later(wanted.rest, self._do, wanted)
            else:
                self._do(wanted)

    def _do(self, wanted: Wish) -> None:
        self._busy, self._timer = True, None
        self._work.do(lambda: answer(wanted, date.today()), lambda found: self._ashore.tell(lambda: self._took(found)))

    def _took(self, found: Answer) -> None:
        self._busy = False
        self._change(lambda state: taken(state, found))
        if self._state is not None:
            self.see(self._state)
