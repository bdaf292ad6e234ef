"""A user at the app without a terminal: keys by name, a clock that the test sets, the screen as text."""

from __future__ import annotations

import shutil
from copy import copy
from dataclasses import replace
from functools import cache
from pathlib import Path

from polebook.tui.control import Outcome, opening, paste, press
from polebook.tui.control.jobs import advance
from polebook.tui.draw.screen import screen
from polebook.tui.lines import plain_text
from tests.helpers import fresh

CHAINS = Path(__file__).parents[2] / "chains"
LISTENER = CHAINS / "wire-break-listener.toml"
SIX = CHAINS / "six-stage.toml"
demo = cache(opening)
"""A demo chain opened: nothing writes to one."""


class Desk:
    """`seconds` pass before each key; `outcome` is that of the last one."""

    def __init__(self, path, seconds=5.0, plain=False):
        self.state = _fresh(demo(str(path), plain)) if Path(path).parent == CHAINS else opening(str(path), plain)
        self.outcome = Outcome.NONE
        self.seconds, self.now = seconds, 100.0

    def again(self):
        """Another desk in the same state."""
        other = copy(self)
        other.state = _fresh(self.state)
        return other

    def press(self, *names):
        """Keys: a character, or a name such as "enter"."""
        for name in names:
            self.now += self.seconds
            character = name if len(name) == 1 else " " if name == "space" else None
            self.state, self.outcome = press(self.state, name, character, self.now)
        return self

    def type(self, text):
        """A text, key by key."""
        return self.press(*text)

    def work(self, pieces=10**6):
        """Pieces of the job that runs, as the shell gives it time between keys."""
        for _ in range(pieces):
            if self.state.job is None:
                break
            self.state = advance(self.state, lambda: True)
        return self

    def paste(self, text):
        self.now += self.seconds
        self.state, self.outcome = paste(self.state, text, self.now)
        return self

    def go(self, path):
        """To a key by its whole path, with the find list."""
        assert self.state.view.overlay is None and self.state.view.field is None
        self.press("f").type(path).press("enter")
        assert self.key == path, (self.key, path)
        return self

    @property
    def text(self):
        return self.state.session.history.text

    @property
    def view(self):
        return self.state.view

    @property
    def key(self):
        """Path of the focused key."""
        from polebook.tui.control.base import focused

        return focused(self.state).path

    @property
    def line(self):
        from polebook.tui.control.base import line

        return line(self.state)

    @property
    def overlay(self):
        return self.state.view.overlay

    @property
    def labels(self):
        """The rows of the open list."""
        return [choice.label for choice in self.overlay.choices]

    def screen(self, columns=80, rows=24):
        return plain_text(screen(self.state, columns, rows))


def _fresh(state):
    return replace(state, session=fresh(state.session))


def copied(folder, of=LISTENER, name="chain.toml"):
    """A demo chain as a file that may be written."""
    return Path(shutil.copy(of, folder / name))
