"""The shell: Textual hands over keys and sizes, and paints the rows that changed. All that happens is in `control`."""

from __future__ import annotations

import asyncio
import gc
import time
from collections.abc import Callable

from textual import events
from textual.app import App, ComposeResult
from textual.geometry import Region
from textual.screen import Screen
from textual.strip import Strip
from textual.widget import Widget

from polebook.tui import keys, terminal
from polebook.tui.control import Outcome, paste, press
from polebook.tui.draw.screen import screen
from polebook.tui.lines import Line
from polebook.tui.styles import strip
from polebook.tui.view import State

_GATHER_S = 0.002  # keys that have come in are all applied before one painting


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
            self.refresh()
            return
        for row, (old, new) in enumerate(zip(before, self._rows, strict=True)):
            if old != new:
                self.refresh(Region(0, row, self._drawn[0], 1))

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


class PolebookApp(App[int], inherit_bindings=False):
    """An open chain file on the terminal. `state` is all there is to it."""

    ENABLE_COMMAND_PALETTE = False

    def __init__(self, state: State) -> None:
        super().__init__(driver_class=terminal.driver_class(), ansi_color=True)
        self.state = state
        self.face = Face(lambda: self.state)
        self._painting: asyncio.TimerHandle | None = None
        self._late = False  # the screen is behind the state, and earlier output is still unsent

    def on_ready(self) -> None:
        """The first paint is done: what was made for it stays, and garbage is collected from here on."""
        if not gc.isenabled():
            gc.freeze()
            gc.enable()

    def get_default_screen(self) -> Sight:
        return Sight(self.face)

    def on_mount(self) -> None:
        loop = asyncio.get_running_loop()
        terminal.on_ending(loop, lambda code: self.exit(return_code=code))

        def told() -> None:
            loop.call_soon_threadsafe(self._catch_up)

        terminal.when_sent(self._driver, told)
        self.app_resume_signal.subscribe(self, lambda _: self._anew())

    async def on_event(self, event: events.Event) -> None:
        """Every key and every paste goes to `control`, and none to a binding of Textual's."""
        if isinstance(event, events.Key):
            for key, character in keys.presses(event.key, event.character):
                self._take(*press(self.state, key, character, time.monotonic()))
        elif isinstance(event, events.Paste):
            self._take(*paste(self.state, event.text, time.monotonic()))
        else:
            await super().on_event(event)

    def _take(self, state: State, outcome: Outcome) -> None:
        self.state = state
        if outcome is Outcome.QUIT:
            self.exit(0)
        elif outcome is Outcome.SUSPEND:
            self.action_suspend_process()
        elif outcome is Outcome.REPAINT:
            self._anew()
        if self._painting is None and outcome is not Outcome.QUIT:
            self._painting = asyncio.get_running_loop().call_later(_GATHER_S, self._paint)

    def _anew(self) -> None:
        """Everything painted once more: another program has written on the screen."""
        self.refresh(repaint=True, layout=True)

    def _paint(self) -> None:
        """Paints, unless earlier output is still unsent: then once, when it has gone."""
        self._painting = None
        self._late = True  # before looking: the writer may end its work, and tell so, in between
        if self.is_running and not terminal.unsent(self._driver):
            self._late = False
            self.face.show()

    def _catch_up(self) -> None:
        if self._late:
            self._paint()


def run(state: State) -> int:
    """Runs the app on the terminal until its user leaves. Returns the exit code."""
    app = PolebookApp(state)
    app.run(mouse=False)
    terminal.let_go()
    return app.return_code or 0
