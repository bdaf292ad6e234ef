"""The program in its terminal beside the same user without one."""

from tests.terminal.probe import BYTES
from tests.tui.desk import Desk


class Pair:
    """The program in its terminal and the same user without one, who press the same keys and must see the same."""

    def __init__(self, terminal, desk, screen=None):
        self.terminal, self.desk = terminal, desk if isinstance(desk, Desk) else Desk(desk, seconds=0.01)
        self.screen = screen or self.desk.screen
        terminal.shows(self.screen())

    def press(self, *names):
        self.terminal.write("".join(BYTES.get(name, name) for name in names).encode())
        self.desk.press(*names)
        self.terminal.shows(self.screen())
        return self
