"""The sweep of a part in the real program: keys while it runs, what they cost on the line, and leaving in the midst."""

import time

from tests.terminal.probe import Terminal, app
from tests.tui.desk import SIX, Desk, copied


def test_keys_typed_ahead_of_a_sweep_all_count_and_the_end_is_what_is_drawn(tmp_path):
    path = copied(tmp_path, SIX)
    desk = Desk(path)
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        for keys in (("tab", "7", "down", "up", "enter", ".", "."), ("z", ",", "."), ("]", "v"), ("escape",),
                     ("enter",)):
            terminal.press(*keys, quiet=0.02)
            desk.press(*keys).work()
            terminal.shows(desk.screen())
        terminal.press("home", ".", "enter", quiet=0.02)
        terminal.until("rc of Q5: 2k2 to")
        terminal.press("q", quiet=0.02)
        terminal.until("not written yet")


def test_the_cursor_and_a_row_are_few_bytes_and_a_sweep_paints_now_and_then(tmp_path):
    """Budgets on the wire: 2 kB a move; a sweep paints its progress five times a second at the most."""
    with Terminal(app(copied(tmp_path, SIX))) as terminal:
        terminal.until("? help")
        terminal.press("tab", "7")
        for key in ("down", "down", "up", "up"):
            assert 0 < terminal.told(key).count <= 2000
        before, begun = len(terminal.log), time.perf_counter()
        terminal.press("enter", quiet=0.0)
        terminal.until("as wanted")
        terminal.quiet(0.25)
        assert len(terminal.log) - before <= 3500 * (2 + (time.perf_counter() - begun) / 0.2)
        for key in (".", ".", ","):
            assert 0 < terminal.told(key).count <= 2000


def test_leaving_in_the_midst_of_a_sweep(tmp_path):
    path = copied(tmp_path, SIX)
    for keys in (("enter", "q"), ("enter", "z", "ctrl+q"), ("enter", "Z", "Z", "ctrl+c")):
        with Terminal(app(path)) as terminal:
            terminal.until("? help")
            terminal.press("tab", "7", quiet=0.05)
            terminal.press(*keys, quiet=0.0)
            assert terminal.ends(5.0) == 0
            assert b"Traceback" not in terminal.log and not terminal.raw
