"""Lines that take no output for a while, or little at a time; and a session in which nothing happens."""

import fcntl
import termios
import time

import pytest

from tests.bench.slow_line import run
from tests.helpers import WHOLE
from tests.terminal.probe import Terminal, app
from tests.tui.desk import SIX, Desk, copied


def test_keys_held_down_are_applied_at_once_and_painted_once_the_line_takes_it(tmp_path):
    """Nobody reads while 400 keys come in: all count, and what waits to be sent stays small."""
    path = copied(tmp_path, SIX)
    desk = Desk(path, seconds=0.01)
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        for _ in range(40):
            terminal.write(b"\x1b[C" * 5 + b"\x1b[D" * 5)
            desk.press(*["right"] * 5, *["left"] * 5)
            time.sleep(0.02)
        before = len(terminal.log)
        terminal.write(b"\x1b[C")
        terminal.shows(desk.press("right").screen())
        assert len(terminal.log) - before < 40_000


def test_sizes_dragged_through_are_painted_once_the_line_takes_it(tmp_path):
    """Nobody reads while a window is dragged through forty sizes: the last one counts."""
    desk = Desk(copied(tmp_path, SIX))
    with Terminal(app(desk.state.session.path)) as terminal:
        terminal.until("? help")
        terminal.quiet(0.2)
        before = len(terminal.log)
        for step in range(40):
            terminal.resize(81 + step % 20, 24 + step % 7)
            time.sleep(0.02)
        terminal.resize(84, 26)
        terminal.shows(desk.screen(84, 26))
        assert len(terminal.log) - before < 25_000  # five or six paintings, most of them in the terminal's own buffer


def test_over_9600_baud_keys_held_down_are_neither_lost_nor_painted_one_by_one(tmp_path):
    """960 bytes a second go through, thirty keys a second come in, for a second and a half."""
    desk = Desk(copied(tmp_path, SIX), seconds=0.01)
    with Terminal(app(desk.state.session.path)) as terminal:
        terminal.shows(desk.screen())
        terminal.quiet(0.2)
        before = len(terminal.log)
        for number in range(45):
            key = ("right", "left", "down")[number // 5 % 3]
            terminal.write({"right": b"\x1b[C", "left": b"\x1b[D", "down": b"\x1b[B"}[key])
            desk.press(key)
            terminal.read(0.0, 32)
            time.sleep(1 / 30)
        terminal.shows(desk.screen())
        assert len(terminal.log) - before < 20_000  # one by one they would be 30 kB and more


def test_where_nothing_happens_nothing_is_sent_and_little_is_done(tmp_path):
    """Unsaved work with its plot, and a text that is being edited: for a second and a half, both at once."""
    places = {"plot": b"+\t3", "text": b"e"}
    terminals = {}
    try:
        for name, keys in places.items():
            terminals[name] = Terminal(app(copied(tmp_path, name=f"{name}.toml")))
            terminals[name].until("? help")
            terminals[name].write(keys)
        for terminal in terminals.values():
            terminal.quiet(0.6)
        used = {name: terminal.cpu_seconds for name, terminal in terminals.items()}
        time.sleep(1.5)
        for name, terminal in terminals.items():
            assert terminal.read(0.0) == b"", name
            assert terminal.cpu_seconds - used[name] < 0.15, name
    finally:
        for terminal in terminals.values():
            terminal.__exit__()


def test_a_terminal_set_not_to_wait_is_waited_for(tmp_path):
    """As a program that crashed may have left it: a write that does not fit would fail."""
    desk = Desk(copied(tmp_path))
    code = "import os, sys; os.set_blocking(1, False); os.execv(sys.argv[1], sys.argv[1:])"
    with Terminal([app()[0], "-c", code, *app(desk.state.session.path)], 200, 60) as terminal:
        end = time.perf_counter() + 10
        while int.from_bytes(fcntl.ioctl(terminal.fd, termios.FIONREAD, bytes(4)), "little") < 2000:
            assert time.perf_counter() < end
            time.sleep(0.02)
        time.sleep(0.2)  # the first painting is more than the terminal's buffer holds
        terminal.shows(desk.screen(200, 60))


@pytest.mark.skipif(not WHOLE, reason="waits half a minute for a slow line; python -m tests.bench.slow_line tells more")
@pytest.mark.parametrize(("name", "keys", "paints"), [("typed ahead, all at once", 16, 6), ("+ held down", 24, 10)])
def test_over_9600_baud_and_300_ms_no_key_is_lost_and_few_are_painted(tmp_path, name, keys, paints):
    """How many are painted depends on how fast the machine is, that they are fewer than the keys does not."""
    told = run(name, copied(tmp_path, SIX), keys)
    assert told.keys == keys and 0 < told.paints <= paints and told.sent <= 1500 * paints
