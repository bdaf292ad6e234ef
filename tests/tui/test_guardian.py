"""The acts beside the state: when work is kept and when it goes, what an opening is told, how faults come out."""

import asyncio
import json
import os
import time
from dataclasses import replace
from threading import Event

import pytest

from polebook.session import instance, recovery, watch
from polebook.session.keeper import Keeper, Work
from polebook.tui import guardian as module
from polebook.tui.control import opening
from polebook.tui.guardian import Guardian
from tests.tui.desk import Desk, copied


@pytest.fixture
def path(tmp_path, monkeypatch):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.setattr(module, "KEEP_S", 0.1)
    monkeypatch.setattr(module, "RETRY_S", 0.1)
    monkeypatch.setattr(module, "LOOK_S", 0.05)
    return copied(tmp_path)


class Shell:
    """A state that a guardian watches over, as the app does."""

    def __init__(self, path):
        self.desk = Desk(path, seconds=0.01)
        self.guardian = Guardian(str(path))
        self.desk.state = self.guardian.opened(self.desk.state)
        self.faults, self.changes = [], 0
        self.guardian.begin(asyncio.get_running_loop(), self.desk.state, self.change, self.faults.append)

    def change(self, work):
        after = work(self.desk.state)
        if after is not self.desk.state:
            self.desk.state = after
            self.changes += 1
            self.guardian.see(after)

    def press(self, *names):
        for name in names:
            self.desk.press(name)
            self.guardian.see(self.desk.state)


def files(tmp_path):
    folder = tmp_path / "state" / "polebook"
    return sorted(folder.glob("*.kept")) if folder.exists() else []


def text_of(path, tmp_path):
    (file,) = files(tmp_path)
    return recovery.read(str(file), os.path.realpath(path)).text


async def until(holds, seconds=5.0):
    end = time.monotonic() + seconds
    while not holds():
        assert time.monotonic() < end
        await asyncio.sleep(0.005)


async def test_edits_that_go_on_do_not_put_it_off_and_the_last_is_kept_too(path, tmp_path):
    shell = Shell(path)
    begun = time.monotonic()
    while not files(tmp_path):
        shell.press("+", "+", "-")
        await asyncio.sleep(0.01)
        assert time.monotonic() - begun < 10.0
    shell.press("+")
    await until(lambda: text_of(path, tmp_path) == shell.desk.text)
    shell.press("u")
    await until(lambda: not files(tmp_path))
    shell.guardian.leave(shell.desk.state)


async def test_nothing_wakes_or_changes_while_nothing_is_unsaved(path, tmp_path):
    shell = Shell(path)
    await asyncio.sleep(0.3)
    assert shell.guardian._timer is None and shell.changes == 0 and not (tmp_path / "state").exists()
    shell.guardian.leave(shell.desk.state)


async def test_a_key_does_not_wait_for_the_disk(path, tmp_path, monkeypatch):
    act, at_it, freed, came = Keeper.act, Event(), Event(), []

    def slow(self):
        at_it.set()
        came.append(freed.wait(5.0))  # in vain, where whoever should free it waits for this
        return act(self)

    monkeypatch.setattr(Keeper, "act", slow)
    shell = Shell(path)
    shell.press("+")
    await until(at_it.is_set, 10.0)
    for _ in range(10):
        shell.guardian.see(shell.desk.state)
        await asyncio.sleep(0.01)
    assert came == []
    freed.set()
    shell.guardian.leave(shell.desk.state)
    assert files(tmp_path) == [] and all(came)


async def test_what_could_not_be_kept_is_told_and_tried_again(path, tmp_path):
    (tmp_path / "state").write_text("")
    shell = Shell(path)
    shell.press("+")
    await until(lambda: shell.desk.state.care.unkept)
    assert shell.desk.view.bad
    (tmp_path / "state").unlink()
    await until(lambda: files(tmp_path))
    await until(lambda: not shell.desk.state.care.unkept)
    shell.guardian.leave(shell.desk.state)


async def test_the_end_keeps_what_was_typed_last_and_lets_the_file_go(path, tmp_path):
    shell = Shell(path)
    shell.press("n", *"kept")
    shell.guardian.end(shell.desk.state)
    assert "kept" in text_of(path, tmp_path) and shell.guardian.kept == str(files(tmp_path)[0])
    assert not path.with_name(".chain.toml.polebook").exists()
    shell.guardian.leave(shell.desk.state)
    assert files(tmp_path)


async def test_leaving_goes_by_what_was_chosen(path, tmp_path):
    for keep in (False, True):
        shell = Shell(path)
        shell.press("escape", "+")
        await until(lambda: files(tmp_path))
        state = shell.desk.state
        shell.guardian.leave(replace(state, care=replace(state.care, keep=keep)))
        assert bool(files(tmp_path)) is keep


async def test_work_that_was_taken_goes_when_it_is_kept_or_saved_and_not_before(path, tmp_path):
    keeper = Keeper(str(path), lambda: True)
    keeper._who = replace(keeper._who, host="far")
    keeper.want(Work(Desk(path).press("+").text, None))
    keeper.act()
    shell = Shell(path)
    assert shell.desk.overlay.purpose == "recovered"
    shell.press("enter")
    before = files(tmp_path)[0].stat().st_ino
    await until(lambda: files(tmp_path)[0].stat().st_ino != before)
    assert text_of(path, tmp_path) == shell.desk.text
    shell.press("w")
    await until(lambda: not files(tmp_path))
    shell.guardian.leave(shell.desk.state)


async def test_an_opening_tells_of_damaged_work(path, tmp_path):
    folder = tmp_path / "state" / "polebook"
    folder.mkdir(parents=True)
    (folder / (recovery.digest(os.path.realpath(path)) + ".kept")).write_text("nothing")
    state = Guardian(str(path)).opened(opening(str(path)))
    assert "work kept for this file is damaged (its first two lines are missing); it is left in" in state.view.message
    assert state.view.overlay is None


async def test_looks_at_file_and_lock_change_the_state(path, tmp_path):
    held = path.with_name(".chain.toml.polebook")
    held.write_text(json.dumps(replace(instance.this(), host="far").content()))
    shell = Shell(path)
    assert shell.desk.state.session.held.startswith("held by pid")
    held.unlink()
    await until(lambda: not shell.desk.state.session.held)
    assert held.exists()
    path.write_text(path.read_text(encoding="utf-8") + "# theirs\n", encoding="utf-8")
    await until(lambda: shell.desk.overlay is not None)
    assert shell.desk.overlay.purpose == "changed"
    shell.guardian.leave(shell.desk.state)
    assert not held.exists()


async def test_a_fault_in_a_thread_comes_out_in_the_loop(path, monkeypatch):
    monkeypatch.setattr(watch, "look", None)
    shell = Shell(path)
    await until(lambda: shell.faults)
    assert isinstance(shell.faults[0], TypeError)
    shell.guardian.close()


async def test_a_fault_in_taking_in_a_note_does_not_keep_it_from_ending(path, tmp_path, monkeypatch):
    monkeypatch.setattr(module, "half_typed", None)
    shell = Shell(path)
    shell.press("+")
    shell.guardian.end(shell.desk.state)
    assert text_of(path, tmp_path) == shell.desk.text


def test_unsaved_work_on_a_file_that_can_not_be_read_is_told(path, tmp_path):
    keeper = Keeper(str(path), lambda: True)
    keeper._who = replace(keeper._who, host="far")
    keeper.want(Work("format = 1\n", None))
    keeper.act()
    (problem,) = Guardian(str(path)).left()
    assert problem.place.file == keeper.file and "kept here" in problem.what
