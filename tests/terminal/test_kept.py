"""Unsaved work outlives the program: each signal, a line that drops, ctrl+z, a fault of ours, a full disk."""

import os
import signal
import time
from pathlib import Path

import pytest

from polebook.session import recovery
from tests.terminal.probe import Terminal, app
from tests.tui.desk import Desk, copied

FAULTY = """
import sys, polebook.tui.app as app, polebook.session.watch as watch, polebook.tui.typeahead as typeahead
press, feed = app.press, typeahead.TypeAhead.feed
def cut(self, text):
    if "K" in text:
        raise RuntimeError("put here by a test")
    return feed(self, text)
typeahead.TypeAhead.feed = cut
def faulty(state, key, character, now):
    if character == "Z":
        raise RuntimeError("put here by a test")
    if character == "V":
        app.screen = None
    if character == "S":
        watch.look = None
    return press(state, key, character, now)
app.press = faulty
from polebook.cli.main import main
sys.exit(main([sys.argv[1]]))
"""


class Kept:
    """A chain file, the state folder, and what is in both."""

    def __init__(self, folder):
        self.path = copied(folder)
        self.before = self.text
        self.state = folder / "state"

    def terminal(self, words=None, **env):
        return Terminal(words or app(self.path), **{"XDG_STATE_HOME": str(self.state)} | env)

    @property
    def text(self):
        return self.path.read_text(encoding="utf-8")

    @property
    def work(self):
        """What was kept of the file; it is the only thing there, and the user's alone."""
        (file,) = self.files(".kept")
        assert os.stat(file).st_mode & 0o777 == 0o600
        return recovery.read(str(file), os.path.realpath(self.path)).text

    def files(self, end):
        return sorted(Path(self.state, "polebook").glob(f"*{end}"))

    def wait(self, holds, seconds=5.0):
        end = time.monotonic() + seconds
        while not holds():
            assert time.monotonic() < end
            time.sleep(0.02)


@pytest.fixture
def kept(tmp_path):
    return Kept(tmp_path)


def edited(kept, terminal):
    """One edit; the text that it makes."""
    terminal.until("? help")
    terminal.press("+")
    return Desk(kept.path).press("+").text


def offers(kept, wanted):
    """Opening the file again offers the work; taking it and writing it takes it away."""
    with kept.terminal() as terminal:
        terminal.until("unsaved work, kept ")
        terminal.press("enter")
        terminal.until("recovered")
        terminal.press("w")
        terminal.until("written")
        assert kept.text == wanted
        kept.wait(lambda: not kept.files(".kept"))
        terminal.press("q")
        assert terminal.ends() == 0


@pytest.mark.parametrize(("number", "keys", "wants"), [
    (signal.SIGTERM, (), ""), (signal.SIGHUP, ("n", " and more"), "and more"),
    (signal.SIGQUIT, ("e", "# ", "x"), "# x")])
def test_a_signal_keeps_the_work_at_once(kept, number, keys, wants):
    """Also a note and a text that are being written."""
    with kept.terminal() as terminal:
        wanted = edited(kept, terminal)
        if keys:
            terminal.press(*keys)
        terminal.signal(number)
        assert terminal.ends() == 128 + number
        assert not terminal.raw
        shown = terminal.screen()
        assert f"polebook: ended by {number.name}" in shown
        assert "chain.toml: what was not written is kept; opening the file again offers it" in shown
    assert kept.text == kept.before
    assert wants in kept.work if wants else kept.work == wanted
    assert not kept.path.with_name(".chain.toml.polebook").exists()
    if not wants:
        offers(kept, wanted)


def test_a_signal_with_nothing_unsaved_keeps_and_says_nothing(kept):
    with kept.terminal() as terminal:
        terminal.until("? help")
        terminal.press("+", "w")
        terminal.until("written")
        terminal.signal(signal.SIGTERM)
        assert terminal.ends() == 143
        assert b"polebook:" not in terminal.log
    assert not kept.files("")


def test_a_line_that_drops_keeps_the_work(kept):
    with kept.terminal() as terminal:
        wanted = edited(kept, terminal)
        terminal.hang_up()
        assert terminal.process.wait(10) in (129, -signal.SIGHUP)
    assert kept.work == wanted and kept.text == kept.before


def test_a_line_that_drops_where_hangups_are_ignored_does_too(kept):
    with kept.terminal(["sh", "-c", 'trap "" HUP; exec "$@"', "sh", *app(kept.path)]) as terminal:
        wanted = edited(kept, terminal)
        terminal.hang_up()
        assert terminal.process.wait(10) == 129
    assert kept.work == wanted


def test_work_is_kept_in_time_while_keys_go_on_and_goes_when_there_is_none(kept):
    with kept.terminal() as terminal:
        terminal.until("? help")
        terminal.press("e", "end", quiet=0.05)
        begun = time.monotonic()
        while not kept.files(".kept"):  # keys every 20 ms do not put it off
            terminal.write(b"x")
            terminal.read(0.02)
            assert time.monotonic() - begun < 10.0
        assert "xxxx" in kept.work
        terminal.write(b"\x15" * 3 + b"\x07")  # as the page was opened
        kept.wait(lambda: terminal.quiet(0.05) and not kept.files(".kept"))
        assert terminal.process.poll() is None and kept.text == kept.before


def test_leaving_by_choice_leaves_nothing(kept):
    with kept.terminal() as terminal:
        edited(kept, terminal)
        kept.wait(lambda: kept.files(".kept"))
        terminal.press("q", "down", "enter")
        assert terminal.ends() == 0
        assert b"polebook:" not in terminal.log
    assert not kept.files("") and kept.text == kept.before
    assert [path.name for path in kept.path.parent.iterdir() if path.is_file()] == ["chain.toml"]


def test_ctrl_z_keeps_the_work_and_fg_goes_on(kept):
    with kept.terminal(["bash", "--norc", "--noprofile", "-i"], PS1="$ ") as terminal:
        terminal.until("$")
        terminal.write(" ".join(app(kept.path)).encode() + b"\r")
        wanted = edited(kept, terminal)
        terminal.press("ctrl+z")
        terminal.until("Stopped")
        assert kept.work == wanted
        terminal.write(b"fg\r")
        terminal.until("? help")
        terminal.press("w")
        terminal.until("written")
        assert kept.text == wanted
        kept.wait(lambda: not kept.files(".kept"))


@pytest.mark.parametrize(("key", "what"), [
    ("Z", "put here by a test"), ("V", "NoneType"), ("S", "NoneType"), ("K", "put here by a test")])
def test_a_fault_of_ours_keeps_the_work_and_shows_no_traceback(kept, key, what):
    """In the work of a key, in painting, in the thread that watches, in the thread that reads the keys."""
    with kept.terminal([app()[0], "-c", FAULTY, str(kept.path)]) as terminal:
        wanted = edited(kept, terminal)
        terminal.press(key)
        assert terminal.ends() == 70
        assert not terminal.raw
        shown = terminal.screen()
        assert "polebook: a fault of its own ended it, not one of your file" in shown
        assert "what was not written is kept" in shown and "what happened is written down in" in shown
        assert b"Traceback" not in terminal.log
    assert kept.work == wanted and kept.text == kept.before
    (report,) = kept.files(".crash.txt")
    told = report.read_text(encoding="utf-8")
    assert what in told and "Traceback" in told


def test_a_fault_at_the_opening_is_told_likewise(kept):
    code = "import sys, polebook.tui.control; sys.modules['polebook.tui.control.opening'].open_file = None\n" \
           "from polebook.cli.main import main; sys.exit(main([sys.argv[1]]))"
    with kept.terminal([app()[0], "-c", code, str(kept.path)]) as terminal:
        assert terminal.ends() == 70
        assert b"a fault of its own ended it" in terminal.log and b"nothing was unsaved" in terminal.log
        assert b"Traceback" not in terminal.log
    assert len(kept.files(".crash.txt")) == 1
    assert not kept.path.with_name(".chain.toml.polebook").exists()


def test_work_that_can_not_be_kept_is_told_and_ends_nothing(kept):
    kept.state.write_text("a file where the folder would be")
    folder = kept.path.parent / "temporary"
    folder.mkdir()
    with kept.terminal(TMPDIR=str(folder)) as terminal:
        edited(kept, terminal)
        told = "unsaved work can't be kept (a file is in its folder's place): only w saves it now"
        terminal.when(lambda text: "no recovery" in text and told in " ".join(text.split()), told)
        terminal.press("+")
        assert "no recovery" in terminal.screen()
        terminal.signal(signal.SIGTERM)
        assert terminal.ends() == 143
        assert "at the next opening (a file is in its folder's place)" in " ".join(terminal.screen().split())
    (file,) = folder.glob("polebook-*.kept")
    assert os.stat(file).st_mode & 0o777 == 0o600
    assert file.read_text(encoding="utf-8").endswith(Desk(kept.path).press("+", "+").text)


def test_a_file_that_can_not_be_opened_says_that_work_on_it_is_kept(kept):
    with kept.terminal() as terminal:
        wanted = edited(kept, terminal)
        terminal.signal(signal.SIGTERM)
        terminal.ends()
    kept.path.write_bytes(b"\xff\xfe")
    with kept.terminal() as terminal:
        assert terminal.ends() == 2
        assert b"the file is not UTF-8 text" in terminal.log
        assert b": work on this file that was not written is kept here" in terminal.log
    assert kept.work == wanted
