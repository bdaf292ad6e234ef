"""What the terminal gets: the first paint, its bytes and characters, sizes, and a line that takes no output."""

import os
import time

import pytest

from tests.terminal.probe import Terminal, app
from tests.tui.desk import LISTENER, SIX, Desk, copied


@pytest.mark.parametrize("size", [(80, 24), (140, 45)])
def test_the_first_paint_is_the_drawing(tmp_path, size):
    path = copied(tmp_path, SIX)
    with Terminal(app(path), *size) as terminal:
        terminal.shows(Desk(path).screen(*size))
        assert terminal.raw
        terminal.press("q")
        assert terminal.ends() == 0
        assert not terminal.raw
        assert b"\x1b[?1049l" in terminal.log and b"\x1b[?25h" in terminal.log


def test_a_session_needs_neither_scipy_nor_a_second_look_at_the_disk(tmp_path):
    """First paint, edits, both pages, save: scipy is never imported."""
    path = copied(tmp_path, SIX)
    code = ("import sys; from polebook.cli.main import main; done = main([sys.argv[1]]); "
            "print('left', done, 'scipy' in sys.modules, 'textual' in sys.modules)")
    words = [app()[0], "-c", code, str(path)]
    with Terminal(words) as terminal:
        terminal.until("? help")
        terminal.press("+", "pagedown", "w")
        terminal.until("written")
        terminal.press("q")
        terminal.until("left 0 False True")


@pytest.mark.parametrize("sizes", [[(20, 5)], [(5, 2), (1, 1)], [(200, 60)], [(60, 16), (59, 16)]])
def test_other_sizes_and_back(tmp_path, sizes):
    desk = Desk(copied(tmp_path))
    with Terminal(app(desk.state.session.path)) as terminal:
        terminal.shows(desk.screen())
        for columns, rows in sizes:
            terminal.resize(columns, rows)
            terminal.quiet(0.2)
            if columns > 20:
                terminal.shows(desk.screen(columns, rows))
        terminal.press("right")
        desk.press("right")
        terminal.resize(80, 24)
        terminal.shows(desk.screen())


def test_no_color_asks_for_none(tmp_path):
    with Terminal(app(copied(tmp_path)), NO_COLOR="1") as terminal:
        terminal.until("? help")
        terminal.press("right", "+", "tab", "2", "?")
        assert terminal.colours() == set()
        assert b"\x1b[1m" in terminal.log or b"\x1b[1;" in terminal.log


def test_the_terminal_s_own_sixteen_colours_are_asked_for(tmp_path):
    for more in ({}, {"COLORTERM": "truecolor"}, {"TERM": "linux"}):
        with Terminal(app(copied(tmp_path)), **more) as terminal:
            terminal.until("? help")
            assert terminal.colours()
            assert not terminal.colours() & {"38", "48"}


@pytest.mark.parametrize(("words", "env"), [
    (["--plain"], {}), ([], {"TERM": "linux"}), ([], {"LC_ALL": "C"}), ([], {"PYTHONIOENCODING": "latin-1"})])
def test_ascii_where_the_terminal_has_no_more(tmp_path, words, env):
    path = copied(tmp_path)
    desk = Desk(path, plain=True)
    with Terminal(app(path, *words), **env) as terminal:
        terminal.shows(desk.screen())
        terminal.press("tab", "2", "?")
        terminal.shows(desk.press("tab", "2", "?").screen())
        assert bytes(terminal.log).isascii()


@pytest.mark.parametrize("term", ["dumb", ""])
def test_a_terminal_that_can_not_place_its_cursor_gets_the_ledger(term):
    with Terminal(app(LISTENER), TERM=term) as terminal:
        assert terminal.ends() == 0
        assert b"Wire-break listener" in terminal.log
        assert b"\x1b[?1049h" not in terminal.log


def test_without_a_keyboard_it_prints_and_ends():
    nothing = os.open(os.devnull, os.O_RDONLY)
    with Terminal(app(LISTENER), stdin=nothing) as terminal:
        os.close(nothing)
        assert terminal.ends() == 0
        assert b"Wire-break listener" in terminal.log


def test_what_can_not_be_opened_is_told_and_leaves_the_terminal_alone(tmp_path):
    with Terminal(app(tmp_path)) as terminal:
        assert terminal.ends() == 2
        assert b"this is a folder" in terminal.log
        assert b"\x1b[?1049h" not in terminal.log


def test_a_step_and_a_move_are_few_bytes(tmp_path):
    """Budgets on the wire: 3.5 kB for a step of a value, 2 kB for a move; these do not depend on the machine."""
    path = copied(tmp_path, SIX)
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("f", *"Q3.rc", "enter")
        for _ in range(4):
            assert 0 < terminal.press("+").count <= 3500
            assert 0 < terminal.press("down").count <= 2000
            assert 0 < terminal.press("left").count <= 2000
            terminal.press("right", "up")


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
