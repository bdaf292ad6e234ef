"""Leaving where the file can't be written, and kept work that another hand removes."""

import asyncio
import time

from polebook.problem import Place, Problem, ProblemsFound
from polebook.text import files
from polebook.tui import guardian as module
from polebook.tui.control import Outcome
from tests.tui.desk import Desk, copied
from tests.tui.test_guardian import Shell, text_of
from tests.tui.test_guardian import files as kept_files


def full(path, text):
    raise ProblemsFound([Problem(Place(str(path)), "the file can't be saved", "the disk is full", "free some space")])


def test_a_save_that_fails_on_leaving_offers_to_keep_the_work(tmp_path, monkeypatch):
    desk = Desk(copied(tmp_path)).press("+", "q")
    monkeypatch.setattr(files, "save", full)
    desk.press("enter")
    assert desk.outcome is Outcome.NONE
    assert "disk is full" in desk.overlay.refusal and "the disk is full" in desk.screen()
    assert [choice.value for choice in desk.overlay.choices] == ["keep", "lose", "stay"]
    assert desk.again().press("escape").state.unsaved
    desk.press("enter")
    assert desk.outcome is Outcome.QUIT and desk.state.care.keep


async def test_kept_work_that_is_removed_is_kept_again(tmp_path, monkeypatch):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.setattr(module, "KEEP_S", 0.02)
    monkeypatch.setattr(module, "LOOK_S", 0.05)
    shell = Shell(copied(tmp_path))
    shell.press("+")
    for _ in range(2):
        end = time.monotonic() + 5.0
        while not kept_files(tmp_path):
            assert time.monotonic() < end
            await asyncio.sleep(0.02)
        assert text_of(shell.desk.state.session.path, tmp_path) == shell.desk.text
        kept_files(tmp_path)[0].unlink()
    shell.guardian.leave(shell.desk.state)
    await asyncio.sleep(0.1)
    assert shell.faults == []
