"""Another hand at the same file: a second polebook, an editor that writes, replaces or deletes it."""

import os
import shutil
import signal

import pytest

from tests.terminal.test_kept import Kept, edited
from tests.tui.desk import Desk


@pytest.fixture
def kept(tmp_path):
    return Kept(tmp_path)


def lock(kept):
    return kept.path.with_name(".chain.toml.polebook")


def theirs(kept):
    return kept.before.replace('"1M"', '"3M"')


def replaced(kept, text):
    other = kept.path.with_name("other")
    other.write_text(text, encoding="utf-8")
    os.replace(other, kept.path)


def test_a_second_one_says_who_holds_it_and_takes_over_once_that_has_left(kept):
    with kept.terminal() as first:
        first.until("? help")
        with kept.terminal() as second:
            shown = second.until(f"held by pid {first.process.pid} on {os.uname().nodename} since ")
            assert "read-only" in shown.splitlines()[0]
            first.press("+", "w")
            first.until("written")
            second.until("read again from the disk")  # it follows
            second.press("down", "+", "w")
            assert "it can't be written here" in second.screen()
            assert kept.text == Desk(kept.path).text != kept.before
            first.press("q")
            assert first.ends() == 0
            second.until("it can be written here now")
            second.press("w")
            second.until("written")
            assert "read-only" not in second.screen()
            second.press("q")
            assert second.ends() == 0
    assert not lock(kept).exists()


def test_each_keeps_its_own_work_and_both_are_offered(kept):
    with kept.terminal() as first:
        one = edited(kept, first)
        with kept.terminal() as second:
            second.until("held by pid")
            second.press("+", "+")
            two = Desk(kept.path).press("+", "+").text
            kept.wait(lambda: (first.read(0.01), second.read(0.01)) and len(kept.files(".kept")) == 2)
            first.signal(signal.SIGKILL)
            first.process.wait(10)
            second.until("unsaved work, kept ")  # it has got the lock, and with it what was left behind
            second.signal(signal.SIGKILL)
            second.process.wait(10)
    assert lock(kept).exists()
    with kept.terminal() as terminal:
        terminal.until("(1 of 2)")
        terminal.press("enter", "enter")
        terminal.until("recovered")
        terminal.press("w")
        terminal.until("written")
        assert kept.text in (one, two)
        terminal.press("u", "w")
        terminal.until("written")
        assert kept.text in (one, two)


def test_a_new_chain_is_locked_too_and_leaves_nothing(kept):
    kept.path.unlink()
    with kept.terminal() as first:
        first.until("first stage?")
        with kept.terminal() as second:
            second.until("held by pid")
            first.press("escape")
            assert first.ends() == 0
            second.press("escape")
            assert second.ends() == 0
    assert not lock(kept).exists()


def test_a_change_on_the_disk_is_offered_and_read(kept):
    with kept.terminal() as terminal:
        mine = edited(kept, terminal)
        replaced(kept, theirs(kept))
        shown = terminal.until("changed on the disk since it was read")
        assert "changed on disk" in shown.splitlines()[0]
        assert "see both" in shown
        terminal.press("enter")
        terminal.until("read again")
        assert kept.text == theirs(kept)
        terminal.press("u", "w")
        terminal.until("written")
        assert kept.text == mine


def test_a_file_that_goes_is_kept_and_written_anew(kept):
    with kept.terminal() as terminal:
        terminal.until("? help")
        kept.path.unlink()
        terminal.until("gone from disk")
        kept.wait(lambda: terminal.quiet(0.05) and kept.files(".kept"))
        assert kept.work == kept.before
        terminal.press("w", "enter")
        terminal.until("written")
        assert kept.text == kept.before
        kept.wait(lambda: not kept.files(".kept"))


def test_a_file_with_faults_is_whole_as_soon_as_it_is_mended(kept):
    kept.path.write_text(kept.before.replace('"2k2"', '"2k2 F"'), encoding="utf-8")
    with kept.terminal() as terminal:
        terminal.until("not a resistance")
        replaced(kept, kept.before)
        terminal.until("read again from the disk")
        assert "upper short" in terminal.screen()


def test_nothing_is_painted_while_nothing_changes(kept):
    with kept.terminal() as terminal:
        terminal.until("? help")
        terminal.press("right")
        before = len(terminal.log)
        os.utime(kept.path)  # another look of the same file is no change
        terminal.quiet(1.4, limit=1.5)
        assert len(terminal.log) == before
        replaced(kept, kept.before)
        terminal.quiet(1.4, limit=1.5)
        assert len(terminal.log) == before


def test_leaving_a_file_that_another_has_can_keep_the_work_but_not_lose_it_unseen(kept):
    with kept.terminal() as first:
        first.until("? help")
        with kept.terminal() as second:
            second.until("held by pid")
            second.press("+", "q")
            shown = second.until("1 edit not written yet")
            assert "write the file and leave" not in shown
            shutil.rmtree(kept.state, ignore_errors=True)
            kept.state.write_text("")
            second.press("enter")
            second.until("it can't be kept")
            kept.state.unlink()
            second.press("q", "enter")
            assert second.ends() == 0
            assert "what was not written is kept" in second.screen()
            assert kept.work == Desk(kept.path).press("+").text
