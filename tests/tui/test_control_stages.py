"""Whole stages: each key one edit, one step of undo, and the user stays with the stage."""

import tomllib

import pytest

from tests.tui.desk import LISTENER, Desk, copied


@pytest.fixture
def desk():
    return Desk(LISTENER)


def names(desk):
    return [stage["name"] for stage in tomllib.loads(desk.text)["stage"]]


def kinds(desk):
    return {stage["name"]: stage["kind"] for stage in tomllib.loads(desk.text)["stage"]}


def test_add_after_the_line(desk):
    desk.press("a")
    assert (desk.overlay.purpose, desk.overlay.title) == ("add", "add a stage after Q1")
    assert "cascode" in desk.labels
    desk.type("casc").press("enter")
    assert names(desk) == ["Q1", "Q4", "Q2", "Q3"]
    assert (desk.line, kinds(desk)["Q4"]) == ("Q4", "cascode")
    assert desk.state.session.ledger is not None
    desk.press("u")
    assert desk.text == LISTENER.read_text(encoding="utf-8")


@pytest.mark.parametrize(("end", "at"), [("home", 0), ("end", 3)])
def test_add_after_source_and_at_the_load(desk, end, at):
    desk.press(end, "a").type("block").press("enter")
    assert names(desk)[at] == "B1"
    assert desk.line == "B1"


def test_copy_and_remove(desk):
    desk.press("right", "c")
    assert names(desk) == ["Q1", "Q2", "Q4", "Q3"]
    assert desk.line == "Q4"
    desk.press("x")
    assert names(desk) == ["Q1", "Q2", "Q3"]
    assert desk.line == "Q3"
    desk.press("u", "u")
    assert desk.text == LISTENER.read_text(encoding="utf-8")


def test_move_goes_along(desk):
    desk.press(">")
    assert (names(desk), desk.line) == (["Q2", "Q1", "Q3"], "Q1")
    desk.press("<")
    assert (names(desk), desk.line) == (["Q1", "Q2", "Q3"], "Q1")
    assert "first stage" in desk.press("<").view.message


def test_rename(desk):
    desk.press("r")
    assert (desk.overlay.purpose, desk.overlay.typed) == ("rename", "Q1")
    desk.press("ctrl+u").type("Q2").press("enter")
    assert desk.overlay.refusal
    desk.press("ctrl+u").type("front").press("enter")
    assert names(desk) == ["front", "Q2", "Q3"]
    assert desk.line == "front"
    assert desk.overlay is None


def test_a_name_typed_on_the_sheet_renames_too(desk):
    desk.go("Q1.name").press("enter", "ctrl+u").type("front").press("enter")
    assert (desk.line, desk.key) == ("front", "front.name")


def test_kind(desk):
    desk.press("k")
    assert desk.overlay.purpose == "kind"
    assert desk.labels[desk.overlay.row] == "common-emitter"
    desk.type("emitter-f").press("enter")
    assert kinds(desk)["Q1"] == "emitter-follower"
    assert desk.press("u").text == LISTENER.read_text(encoding="utf-8")


def test_leave_out_and_in_again(desk):
    desk.press("o")
    assert tomllib.loads(desk.text)["stage"][0]["left_out"] is True
    assert desk.line == "Q1"
    desk.press("o")
    assert desk.text == LISTENER.read_text(encoding="utf-8")


@pytest.mark.parametrize("key", ["c", "x", "<", ">", "r", "k", "o"])
@pytest.mark.parametrize("end", ["home", "end"])
def test_source_and_load_are_no_stages(desk, end, key):
    desk.press(end, key)
    assert desk.view.bad
    assert "only a stage can" in desk.view.message
    assert desk.text == LISTENER.read_text(encoding="utf-8")


def test_the_only_stage_can_not_be_removed(desk):
    desk.press("x", "x", "x")
    assert len(names(desk)) == 1
    assert "only stage" in desk.view.message


def test_notes_over_several_lines(desk):
    desk.press("n").type("first").press("ctrl+j").type("second")
    assert desk.overlay.purpose == "note"
    assert "second" in desk.screen()
    desk.press("up", "end").type(" line")
    desk.press("enter")
    assert tomllib.loads(desk.text)["stage"][0]["note"].strip() == "first line\nsecond"
    desk.press("n", "ctrl+u", "backspace", "ctrl+u", "enter")
    assert "note" not in tomllib.loads(desk.text)["stage"][0]


def test_a_note_left_with_esc_is_as_it_was(desk):
    desk.press("n").type("never").press("escape")
    assert desk.text == LISTENER.read_text(encoding="utf-8")


def test_the_note_of_a_line_without_one_of_its_own_is_the_file_s(desk):
    desk.press("home", "n")
    assert desk.overlay.title == "note of the file"
    assert "prestressing" not in desk.overlay.typed
    assert "anchor block" in desk.overlay.typed


def test_a_pasted_note_keeps_its_lines(desk):
    desk.press("n").paste("one\r\ntwo").press("enter")
    assert tomllib.loads(desk.text)["stage"][0]["note"].strip() == "one\ntwo"


def test_a_card_from_another_file(desk, tmp_path):
    other = copied(tmp_path, name="other.toml")
    other.write_text(other.read_text(encoding="utf-8").replace("device.VF", "device.LN"), encoding="utf-8")
    desk.press("t").type("take").press("enter")
    assert desk.overlay.purpose == "take"
    desk.type("nowhere.toml").press("enter")
    assert "no such file" in desk.overlay.refusal
    desk.press("ctrl+u").paste(str(other)).press("enter")
    assert desk.labels == ["LN"]
    desk.press("enter")
    assert "[device.LN]" in desk.text
    assert desk.view.sheet == "device.LN"
    desk.press("u")
    assert desk.view.sheet == ""
