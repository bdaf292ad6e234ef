"""What the terminal gets: the first paint, its bytes and characters, sizes, and a line that takes no output."""

import os
import subprocess

import pytest

from tests.terminal.probe import BYTES, ROOT, Terminal, app
from tests.tui.desk import LISTENER, SIX, Desk, copied
from tests.tui.places import PLACES


@pytest.mark.parametrize("size", [(80, 24), (140, 45)])
def test_the_first_paint_is_the_drawing(tmp_path, size):
    path = copied(tmp_path, SIX)
    with Terminal(app(path), *size) as terminal:
        terminal.shows(Desk(path).screen(*size))
        assert terminal.raw
        terminal.press("q")
        assert terminal.ends() == 0
        assert terminal.left == ""
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


SIZES = [(20, 5), (5, 2), (1, 1), (200, 60), (60, 16), (59, 16), (60, 15), (80, 24)]


@pytest.mark.parametrize("place", ["field refused", "response", "text"])
def test_other_sizes_and_back(tmp_path, place):
    """Whatever is open stays open. Below 60x16 it says what it needs, as far as there is room for it."""
    desk = Desk(copied(tmp_path), seconds=0.01)
    with Terminal(app(desk.state.session.path)) as terminal:
        terminal.shows(desk.screen())
        keys = (*PLACES.get(place, ("tab", "3")), "right")
        terminal.press(*keys, quiet=0.05)
        terminal.shows(desk.press(*keys).screen())
        before = desk.screen()
        for size in SIZES:
            terminal.resize(*size)
            terminal.shows(desk.screen(*size))
            if size == (20, 5):
                assert " ".join(terminal.screen().split()).startswith("This needs 60 columns by 16 rows; the term")
        assert terminal.screen() == before
        terminal.press("right", quiet=0.05)
        terminal.shows(desk.press("right").screen())


def test_a_new_size_is_painted_once_and_the_first_one_too(tmp_path):
    """Textual by itself paints three times. The budget: all cells, and half of that for the looks of them."""
    desk = Desk(copied(tmp_path))
    with Terminal(app(desk.state.session.path)) as terminal:
        terminal.shows(desk.screen())
        terminal.quiet(0.3)
        for columns, rows in ((80, 24), (90, 28)):
            # none where the terminal's answer comes after the paint; of two the budget tells too
            assert bytes(terminal.log).count(b"\x1b[?2026h") <= 1
            assert len(terminal.log) < 1.5 * len(desk.screen(columns, rows).encode()) + columns * rows
            terminal.log.clear()
            terminal.resize(90, 28)
            terminal.shows(desk.screen(90, 28))
            terminal.quiet(0.2)


@pytest.mark.parametrize(("words", "env"), [
    (["--plain"], {}), ([], {"TERM": "linux"}), ([], {"LANG": "C"}), ([], {"LC_ALL": "de_DE.ISO-8859-1"}),
    ([], {"PYTHONIOENCODING": "latin-1"})])
def test_ascii_where_the_terminal_has_no_more(tmp_path, words, env):
    path = copied(tmp_path)
    text = path.read_text(encoding="utf-8").replace("Wire-break", "Wire\u2014break \u6f22\u202e")
    path.write_text(text.replace("board", "b\u00f6ard"), encoding="utf-8")
    desk = Desk(path, plain=True, seconds=0.01)
    with Terminal(app(path, *words), **env) as terminal:
        terminal.shows(desk.screen())
        for keys in (("tab", "2", "?"), ("escape", "3"), ("e",), ("escape", "tab", "t", "end", "up", "enter", "down")):
            terminal.write("".join(BYTES.get(key, key) for key in keys).encode())
            terminal.shows(desk.press(*keys).screen())
        assert bytes(terminal.log).isascii()


@pytest.mark.parametrize("env", [{"TERM": "dumb"}, {"TERM": ""}, {"TERM": "dumb", "LC_ALL": "C"}])
def test_a_terminal_that_can_not_place_its_cursor_gets_the_ledger(env):
    with Terminal(app(LISTENER), **env) as terminal:
        assert terminal.ends() == 0
        assert b"Wire-break listener" in terminal.log
        assert b"\x1b[?" not in terminal.log and b"\x1b[1;1H" not in terminal.log
        assert bytes(terminal.log).isascii() is ("LC_ALL" in env)


def test_without_a_keyboard_it_prints_and_ends():
    nothing = os.open(os.devnull, os.O_RDONLY)
    with Terminal(app(LISTENER), stdin=nothing) as terminal:
        os.close(nothing)
        assert terminal.ends() == 0
        assert b"Wire-break listener" in terminal.log


@pytest.mark.parametrize("line", ["$P $F | head -1", "$P $F < /dev/null | cat", "$P $F <&-",
                                  "unset TERM; $P $F > out; cat out"])
def test_where_there_is_no_terminal_it_prints_and_ends(tmp_path, line):
    env = {"P": " ".join(app()), "F": str(LISTENER), "PYTHONPATH": str(ROOT / "src"), "PATH": os.environ["PATH"],
           "TERM": "xterm"}
    run = subprocess.run(["sh", "-c", line], check=False, capture_output=True, timeout=20, cwd=tmp_path, env=env)
    assert run.returncode == 0 and not run.stderr
    assert b"Wire-break listener" in run.stdout and b"\x1b" not in run.stdout
    assert ("head" in line) or b"Upper edge 400 kHz" in run.stdout


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
            assert 0 < terminal.told("+").count <= 3500
            assert 0 < terminal.told("down").count <= 2000
            assert 0 < terminal.told("left").count <= 2000
            terminal.press("right", "up")
