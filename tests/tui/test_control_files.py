"""Files: a new chain, one with faults, read-only, changed by another hand; writing and leaving."""

import os
import tomllib

import pytest

from polebook.tui.control import Outcome
from tests.tui.desk import LISTENER, Desk, copied


def test_a_story_from_opening_to_the_file(tmp_path):
    """The part that owns most of the upper edge is found and mended; gain stays met; undo, redo, write."""
    path = copied(tmp_path)
    before = path.read_text(encoding="utf-8")
    desk = Desk(path)
    assert "upper short" in desk.screen()
    desk.press("tab", "2", "enter")
    assert desk.key == "Q2.c_comp"
    desk.press("-", "-", "-", "-")
    desk.press("tab", ".", "=")
    assert "working of" in desk.screen()
    desk.press("escape", "tab")
    while "upper short" in desk.screen():
        desk.press("/")
    assert "gain met" in desk.screen() or "all 4 met" in desk.screen()
    after = desk.text
    while desk.state.session.history.past:
        desk.press("u")
    assert desk.text == before
    while desk.state.session.history.future:
        desk.press("U")
    assert desk.text == after
    desk.press("w")
    assert path.read_text(encoding="utf-8") == after
    changed = [(a, b) for a, b in zip(before.splitlines(), after.splitlines(), strict=True) if a != b]
    assert len(changed) == 1
    assert changed[0][1].startswith("c_comp") and changed[0][1].endswith("never looked at again")
    desk.press("q")
    assert desk.outcome is Outcome.QUIT


def test_undo_goes_back_over_a_save(tmp_path):
    path = copied(tmp_path)
    before = path.read_text(encoding="utf-8")
    desk = Desk(path).go("Q1.rc").press("+", "w", "u")
    assert desk.text == before
    assert not desk.state.session.history.saved
    desk.press("w")
    assert path.read_text(encoding="utf-8") == before


def test_nothing_to_write(tmp_path):
    assert "nothing to write" in Desk(copied(tmp_path)).press("w").view.message


def test_leaving_asks_only_where_work_is_unsaved(tmp_path):
    path = copied(tmp_path)
    assert Desk(path).press("q").outcome is Outcome.QUIT
    assert Desk(path).press("ctrl+c").outcome is Outcome.QUIT
    for key in ("q", "ctrl+q", "ctrl+c"):
        desk = Desk(path).go("Q1.rc").press("+", key)
        assert (desk.outcome, desk.overlay.purpose) == (Outcome.NONE, "leave")
        assert "1 edit not written yet" in desk.screen()
        desk.press("escape")
        assert (desk.outcome, desk.overlay) == (Outcome.NONE, None)


def test_leaving_with_and_without_the_work(tmp_path):
    path = copied(tmp_path)
    before = path.read_text(encoding="utf-8")
    desk = Desk(path).go("Q1.rc").press("+", "q", "down", "enter")
    assert desk.outcome is Outcome.QUIT
    assert path.read_text(encoding="utf-8") == before
    desk = Desk(path).go("Q1.rc").press("+", "q", "enter")
    assert desk.outcome is Outcome.QUIT
    assert path.read_text(encoding="utf-8") == desk.text != before
    desk = Desk(path).go("Q1.rc").press("+", "q", "end", "enter")
    assert (desk.outcome, desk.overlay) == (Outcome.NONE, None)


def test_ctrl_q_leaves_from_a_field_and_ctrl_c_leaves_the_field(tmp_path):
    desk = Desk(copied(tmp_path)).go("Q1.rc").type("4k")
    assert desk.press("ctrl+c").view.field is None
    assert desk.type("4k").press("ctrl+q").outcome is Outcome.QUIT


def test_a_file_changed_by_another_hand_is_not_written_over_unasked(tmp_path):
    path = copied(tmp_path)
    desk = Desk(path).go("Q1.rc").press("+")
    mine = desk.text
    path.write_text(path.read_text(encoding="utf-8") + "# theirs\n", encoding="utf-8")
    desk.press("w")
    assert (desk.overlay.purpose, len(desk.labels)) == ("changed", 3)
    assert path.read_text(encoding="utf-8").endswith("# theirs\n")
    desk.press("enter")
    assert desk.text.endswith("# theirs\n")
    assert desk.press("u").text == mine
    desk.press("w", "down", "enter")
    assert path.read_text(encoding="utf-8") == mine


def test_a_read_only_file_says_so_on_opening(tmp_path, monkeypatch):
    path = copied(tmp_path)
    real = os.access
    monkeypatch.setattr(os, "access", lambda name, mode, **more: not mode & os.W_OK and real(name, mode, **more))
    desk = Desk(path)
    assert "read-only" in desk.view.message
    assert "read-only" in desk.screen().splitlines()[0]
    desk.go("Q1.rc").press("+", "w")
    assert desk.view.bad


def test_a_chain_with_faults_can_be_mended_from_their_list(tmp_path):
    path = copied(tmp_path)
    path.write_text(path.read_text(encoding="utf-8").replace('rc          = "2k2"', 'rc          = "2k2 F"', 1),
                    encoding="utf-8")
    desk = Desk(path).press("escape", "!")
    assert desk.overlay.purpose == "cautions"
    assert "not a resistance" in desk.screen()
    desk.press("enter")
    assert desk.key == "Q1.rc"
    desk.type("2k2").press("enter")
    assert desk.state.session.ledger is not None
    assert desk.text == LISTENER.read_text(encoding="utf-8")


@pytest.mark.parametrize("text", [
    "", "format = 2\n", "format = [\n", "stage = 3\n", "[[stage]]\n", "format = 1\n[source]\n"])
def test_files_that_are_no_chains_can_be_looked_at_and_left(tmp_path, text):
    path = tmp_path / "no.toml"
    path.write_text(text, encoding="utf-8")
    desk = Desk(path)
    assert desk.state.session.ledger is None
    for key in ["escape", *"12ax<>ckonfgbpt=!?", "enter", "escape", "escape", "+", "*", "5", "enter", "escape", "tab",
                ".", ",", "down", "enter", "u", "U", "w"]:
        desk.press(key)
        desk.screen()
    desk.press("escape", "escape", "ctrl+q")
    assert desk.outcome is Outcome.QUIT or desk.overlay.purpose == "leave"


def test_a_missing_file_becomes_a_new_chain(tmp_path):
    path = tmp_path / "new.toml"
    desk = Desk(path)
    assert desk.overlay.purpose == "new"
    assert "its first stage?" in desk.screen()
    desk.type("common-s").press("enter").type("emitter-f").press("enter")
    assert "common-source > emitter-follower" in desk.screen()
    desk.press("enter")
    assert desk.overlay.purpose == "start"
    desk.press("up", "up", "up", "up").type("24").press("enter", "enter").type("50R").press("enter").type("1 F")
    desk.press("enter", "enter")
    assert "not a resistance" in desk.overlay.refusal
    assert desk.overlay.row == 3
    desk.type("600R").press("enter", "enter")
    read = tomllib.loads(desk.text)
    assert [stage["kind"] for stage in read["stage"]] == ["common-source", "emitter-follower"]
    assert (read["supply"]["positive"], read["source"]["resistance"]) == ("24", "50R")
    assert desk.state.session.ledger is not None
    assert not path.exists()
    assert desk.press("q").overlay.purpose == "leave"
    desk.press("escape", "w")
    assert path.read_text(encoding="utf-8") == desk.text
    assert desk.press("q").outcome is Outcome.QUIT


def test_a_ready_chain_in_two_keys(tmp_path):
    desk = Desk(tmp_path / "new.toml").press("enter", "enter")
    assert len(tomllib.loads(desk.text)["stage"]) == 2


def test_stages_are_taken_back_and_leaving_makes_nothing(tmp_path):
    path = tmp_path / "new.toml"
    desk = Desk(path).type("block").press("enter", "home", "enter", "escape", "escape")
    assert desk.overlay.title.endswith("its first stage?")
    assert desk.press("escape").outcome is Outcome.QUIT
    assert list(tmp_path.iterdir()) == []


def test_a_folder_that_does_not_exist_is_told_on_writing(tmp_path):
    desk = Desk(tmp_path / "no" / "new.toml").press("enter", "enter", "w")
    assert desk.view.bad
    assert not desk.state.session.history.saved


def test_line_ends_and_a_missing_last_newline_are_kept(tmp_path):
    path = tmp_path / "chain.toml"
    raw = LISTENER.read_bytes().replace(b"\n", b"\r\n").rstrip(b"\r\n")
    path.write_bytes(raw)
    Desk(path).go("Q1.rc").press("+", "w")
    assert path.read_bytes() == raw.replace(b'rc          = "2k2"', b'rc          = "2k4"', 1)
