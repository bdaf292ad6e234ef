"""The shell: Textual hands over keys and sizes, and paints the rows that changed. All that happens is in `control`."""

from __future__ import annotations

import asyncio
import gc
import time
from collections.abc import Callable
from io import StringIO
from os.path import basename
from typing import Any, Self

from rich.console import Console
from textual import events
from textual.app import App, ComposeResult
from textual.geometry import Region
from textual.screen import Screen
from textual.strip import Strip
from textual.widget import Widget

from polebook.tui import ending, keys, terminal
from polebook.tui.control import Outcome, jobs, paste, press, watching
from polebook.tui.control.base import refuse
from polebook.tui.draw.screen import screen
from polebook.tui.guardian import Guardian
from polebook.tui.historian import Historian
from polebook.tui.lines import Line
from polebook.tui.paint import changed
from polebook.tui.styles import strip
from polebook.tui.view import State

_GATHER_S = 0.002  # keys that have come in are all applied before one painting
_WORK_S = 0.01  # a job has the loop for so long at a time
_PROGRESS_S = 0.2  # between paintings of a job's progress


class Face(Widget):
    """The one widget: the screen's rows, each painted anew only when it changed."""

    def __init__(self, state: Callable[[], State]) -> None:
        super().__init__()
        self._state = state
        self._rows: list[Line] = []
        self._drawn = (0, 0)

    def show(self) -> None:
        """Draws the state and has the rows painted that differ from those on the screen."""
        before, size = self._rows, self._drawn
        self._draw()
        if size != self._drawn:
            self.anew()
            return
        for row, (old, new) in enumerate(zip(before, self._rows, strict=True)):
            if old != new:
                self.refresh(Region(0, row, changed(old, new), 1))

    def anew(self) -> None:
        """Has all rows painted, whatever the terminal shows."""
        self.refresh(Region(0, 0, *self.size))

    @property
    def drawn(self) -> bool:
        return any(self._drawn)

    def refresh(self, *regions: Region, repaint: bool = True, layout: bool = False, recompose: bool = False) -> Self:
        """Rows that are named. Textual asks for all of them twice more for one new size, and when it begins."""
        return super().refresh(*regions, repaint=repaint) if regions else self

    def render_lines(self, crop: Region) -> list[Strip]:
        """The rows of `crop`, with no styles of Textual's own laid over them."""
        if self._drawn != tuple(self.size):
            self._draw()
        colour = self._state().colour
        rows = [strip(self._rows[row], colour) for row in crop.line_range if row < len(self._rows)]
        return [row.crop(crop.x, crop.right) for row in rows]

    def _draw(self) -> None:
        self._drawn = (self.size.width, self.size.height)
        self._rows = screen(self._state(), *self._drawn) if all(self._drawn) else []


class Sight(Screen[None], inherit_bindings=False):
    """Textual's screen without keys of its own."""

    CSS = "Sight { background: ansi_default; } Face { width: 100%; height: 100%; }"

    def __init__(self, face: Face) -> None:
        super().__init__()
        self._face = face

    def compose(self) -> ComposeResult:
        yield self._face

    def refresh(self, *regions: Region, repaint: bool = True, layout: bool = False, recompose: bool = False) -> Self:
        """Never: a new size lays it out and paints it without, and the rest is for its face to ask for."""
        return self


class PolebookApp(App[int], inherit_bindings=False):
    """An open chain file on the terminal. `state` is all there is to it."""

    ENABLE_COMMAND_PALETTE = False

    def __init__(self, state: State, guardian: Guardian | None = None) -> None:
        """Without a guardian the app reads and writes nothing but what its user asks for."""
        super().__init__(driver_class=terminal.driver_class(), ansi_color=True)
        terminal.without_extras(self)
        terminal.on_fault(self, self.failed)
        self.state = state
        self.fault: str | None = None  # what is known of the fault of ours that ended it
        self._guardian = guardian
        self._historian = Historian()
        self.face = Face(lambda: self.state)
        self._painting: asyncio.TimerHandle | None = None
        self._working: asyncio.TimerHandle | None = None
        self._progress = 0.0  # when the progress of a job was painted last
        self._late = False  # the screen is behind the state, and earlier output is still unsent
        self._resized: events.Resize | None = None  # behind the terminal's size, likewise

    def on_ready(self) -> None:
        """The first paint is done: what was made for it stays, and garbage is collected from here on."""
        if not self.face.drawn:
            self.face.show()
        if not gc.isenabled():
            gc.freeze()
            gc.enable()

    def get_default_screen(self) -> Sight:
        return Sight(self.face)

    def on_mount(self) -> None:
        loop = asyncio.get_running_loop()

        def told() -> None:
            loop.call_soon_threadsafe(self._catch_up)

        terminal.when_sent(self._driver, told)
        self.app_resume_signal.subscribe(self, lambda _: self._anew())
        if self._guardian is not None:
            self._guardian.begin(loop, self.state, self._change, lambda error: terminal.fail(self, error))
        self._historian.begin(loop, self.state, self._change, lambda error: terminal.fail(self, error))

    async def live(self) -> None:
        """The app from beginning to end; what ends it from outside is heard from the first moment on."""
        loop = asyncio.get_running_loop()
        terminal.on_ending(loop, lambda code: self.exit(return_code=code))
        loop.set_exception_handler(self._stumbled)
        await self.run_async(mouse=False)

    def exit(self, result: int | None = None, return_code: int = 0, message: object = None) -> None:
        """Ends the app. Where its user has not left by choice, unsaved work is kept first."""
        if self._guardian is not None:
            self._guardian.end(self.state)
        super().exit(result, return_code)

    def panic(self, *renderables: Any) -> None:
        """A fault in a thread of Textual's."""
        text = StringIO()
        Console(file=text, width=120).print(*renderables)
        terminal.fail(self, RuntimeError(text.getvalue()))

    def failed(self, error: Exception) -> None:
        """A fault of ours: unsaved work is kept, and what is known of the fault."""
        self._return_code = ending.FAULT
        if self.fault is None:
            self.fault = ending.report(error)
        if self._guardian is not None:
            self._guardian.end(self.state)

    async def on_event(self, event: events.Event) -> None:
        """Every key and every paste goes to `control`, and none to a binding of Textual's."""
        if isinstance(event, events.Key):
            for key, character in keys.presses(event.key, event.character):
                self._take(*press(self.state, key, character, time.monotonic()))
        elif isinstance(event, events.Paste):
            self._take(*paste(self.state, event.text, time.monotonic()))
        elif isinstance(event, events.Resize) and self.face.drawn and terminal.unsent(self._driver):
            self._resized = event  # the last one counts, once the line has taken what was painted for those before
        else:
            await super().on_event(event)

    def _take(self, state: State, outcome: Outcome) -> None:
        begun = state.job is not self.state.job
        self.state = state if outcome is Outcome.QUIT else watching.due(state, time.monotonic())
        if self._guardian is not None:
            outcome = self._kept(self._guardian, outcome)
        self._historian.see(self.state)
        if outcome is Outcome.QUIT:
            self.exit(0)
        elif outcome is Outcome.SUSPEND:
            self.action_suspend_process()
            if terminal.stayed(self._driver):
                self.state, _ = refuse(self.state, "there is no shell to go back to", "q leaves")
        elif outcome is Outcome.REPAINT:
            self._anew()
        if outcome is not Outcome.QUIT:
            self._soon()
            if state.job is not None:
                self._later(state.job.rest if begun else 0.0)

    def _kept(self, guardian: Guardian, outcome: Outcome) -> Outcome:
        """What the key left unsaved, to be kept in time: at once where the app stops or its user leaves."""
        if outcome is Outcome.QUIT and self.state.care.keep and (reason := guardian.now(self.state)):
            self.state, outcome = refuse(self.state, f"it can't be kept ({reason})", "leaving now would lose it")
        elif outcome is Outcome.QUIT:
            guardian.leave(self.state)
        elif outcome is Outcome.SUSPEND:
            self.state = watching.unkept(self.state, guardian.now(self.state))
        else:
            guardian.see(self.state)
        return outcome

    def _change(self, work: Callable[[State], State]) -> None:
        """A change that no key made."""
        after = work(self.state)
        if after is not self.state:
            self.state = after
            if self._guardian is not None:
                self._guardian.see(after)
            self._historian.see(after)
            self._soon()

    def _stumbled(self, loop: asyncio.AbstractEventLoop, context: dict[str, Any]) -> None:
        """An exception in a call of the loop: ours, so it ends the app as one in a message does."""
        error = context.get("exception")
        if "handle" in context and isinstance(error, Exception):
            terminal.fail(self, error)

    def _soon(self) -> None:
        if self._painting is None:
            self._painting = asyncio.get_running_loop().call_later(_GATHER_S, self._paint)

    def _later(self, rest: float) -> None:
        """The job's next pieces soon; of one that is to rest first not before so much time has gone by."""
        if self._working is not None and rest > 0.0:
            self._working.cancel()
            self._working = None
        if self._working is None:
            self._working = asyncio.get_running_loop().call_later(max(rest, _GATHER_S), self._queue)

    def _queue(self) -> None:
        """Puts work behind the keys that have come in and behind the painting of what they did."""
        self._working = None
        if self._painting is not None:
            self._later(0.0)
        else:
            self.call_later(self._work)  # as a message: a fault in it ends the app as one in a key's work does

    def _work(self) -> None:
        """Pieces of the job for a moment, then whatever keys have come in; progress is shown now and then."""
        begun = time.monotonic()
        self.state = jobs.advance(self.state, lambda: time.monotonic() - begun > _WORK_S)
        ended = self.state.job is None
        if not ended:
            self._later(0.0)
        if ended or begun - self._progress > _PROGRESS_S:
            self._progress = begun
            self._soon()

    def _anew(self) -> None:
        """Everything painted once more: another program has written on the screen."""
        self.face.anew()

    def _paint(self) -> None:
        """Paints, unless earlier output is still unsent: then once, when it has gone."""
        self._painting = None
        self._late = True  # before looking: the writer may end its work, and tell so, in between
        if self.is_running and not terminal.unsent(self._driver):
            self._late = False
            self.face.show()

    def _catch_up(self) -> None:
        if self._resized is not None:
            self.post_message(self._resized)
            self._resized = None
        if self._late:
            self._paint()


def run(state: State, guardian: Guardian | None = None) -> int:
    """Runs the app on the terminal until its user leaves. Returns the exit code."""
    app = PolebookApp(state, guardian)
    with ending.as_it_was():
        try:
            asyncio.run(app.live())
        except Exception as error:
            app.failed(error)
    code = app.return_code or 0
    if guardian is not None:
        crash = None if app.fault is None else guardian.report(app.fault)
        ending.tell(basename(state.session.path), guardian, code, crash)
    terminal.let_go()
    return code
