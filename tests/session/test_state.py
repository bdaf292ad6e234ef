"""The open file: opened, changed, undone, saved, pinned; what its text means follows every change."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from polebook.problem import ProblemsFound
from polebook.session import state
from polebook.session.state import ChangedOnDisk, Session
from tests.helpers import DEMOS

DEMO = DEMOS / "wire-break-listener.toml"


@pytest.fixture
def path(tmp_path: Path) -> str:
    copy = tmp_path / "chain.toml"
    copy.write_bytes(DEMO.read_bytes())
    return str(copy)


@pytest.fixture
def opened(path: str) -> Session:
    return state.open_file(path)


def test_an_open_file_has_its_figures(opened: Session) -> None:
    assert opened.exists and opened.history.saved and not opened.read_only and opened.newline == "\n"
    assert opened.chain is not None and not opened.problems and opened.baseline is None
    assert opened.ledger is not None and opened.good is opened.ledger and opened.ledger.chain is opened.chain
    assert state.moved(opened) is None


def test_a_file_that_is_not_there_is_an_empty_one(tmp_path: Path) -> None:
    fresh = state.open_file(str(tmp_path / "new.toml"))
    assert not fresh.exists and fresh.history.text == "" and fresh.chain is None and fresh.ledger is None
    assert [problem.what for problem in fresh.problems] == ["the file is empty"]
    lost = state.open_file(str(tmp_path / "nowhere" / "new.toml"))
    assert lost.read_only == "its folder does not exist"
    link = tmp_path / "link.toml"
    link.symlink_to(tmp_path / "behind.toml")
    assert not state.open_file(str(link)).exists


def test_what_is_no_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ProblemsFound, match="folder"):
        state.open_file(str(tmp_path))
    (tmp_path / "latin").write_bytes(b"title = '\xe4'")
    with pytest.raises(ProblemsFound, match="UTF-8"):
        state.open_file(str(tmp_path / "latin"))
    with pytest.raises(ProblemsFound):
        state.open_file("a\0b")


def test_a_file_with_faults_opens_with_them(tmp_path: Path) -> None:
    bad = tmp_path / "bad.toml"
    bad.write_text(DEMO.read_text(encoding="utf-8").replace('"2k2"', '"2k2 V"'), encoding="utf-8")
    session = state.open_file(str(bad))
    assert session.chain is None and session.good is None and len(session.problems) == 2
    assert all(problem.place is not None and problem.place.line for problem in session.problems)
    bad.write_text("format = [", encoding="utf-8")
    assert state.open_file(str(bad)).problems and not state.keys_of(state.open_file(str(bad)), "Q1")


def test_a_new_session_is_not_saved(tmp_path: Path) -> None:
    text = DEMO.read_text(encoding="utf-8").replace("\n", "\r\n")
    session = state.new_session(str(tmp_path / "new.toml"), text)
    assert not session.exists and not session.history.saved and session.ledger is not None
    assert session.newline == "\r\n"
    kept = state.save(session)
    assert kept.exists and kept.history.saved and (tmp_path / "new.toml").read_bytes() == text.encode()


def test_an_edit_is_felt_at_once_and_undone(opened: Session) -> None:
    after = state.set_value(opened, "Q2.c_comp", "1p", 0.0)
    assert after.ledger is not None and opened.ledger is not None
    assert (after.ledger.upper_hz or 0) > 1.5 * (opened.ledger.upper_hz or 0)
    assert not after.history.saved and after.history.past[-1].edit.label == "c_comp of Q2: 4p7 to 1p"
    back, label = state.undo(after)
    assert label == "c_comp of Q2: 4p7 to 1p" and back.history.text == opened.history.text and back.history.saved
    again, label = state.redo(back)
    assert label == "c_comp of Q2: 4p7 to 1p" and again.history.text == after.history.text
    assert state.undo(opened) == (opened, "") and state.redo(opened) == (opened, "")


def test_a_chain_without_a_ledger_keeps_the_last_good_one(opened: Session) -> None:
    block = '[[stage]]\nname = "B{}"\nkind = "block"\ngain = 1e300\n\n'
    text = opened.history.text.replace("[load]", block.format(1) + block.format(2) + "[load]")
    silent = state.set_text(opened, text, 0.0)
    assert silent.chain is not None and silent.problems and silent.ledger is None and silent.good is opened.ledger
    assert state.moved(state.pin(silent)) is None
    faulty = state.set_text(opened, opened.history.text.replace('"2k2"', '"2k2 V"'), 0.0)
    assert faulty.chain is None and faulty.ledger is None and faulty.good is opened.ledger and len(faulty.problems) == 2
    assert state.undo(faulty)[0].ledger is not None


def test_figures_that_no_number_holds_are_a_problem_not_an_exception(opened: Session) -> None:
    session = opened
    for key, typed in (("source.capacitance", "1e200"), ("load.capacitance", "1e-250"), ("Q1.rc", "1e-200")):
        session = state.set_value(session, key, typed, 0.0)
        assert session.ledger is not None or session.problems


def test_undo_reaches_back_over_a_save(opened: Session, path: str) -> None:
    first = Path(path).read_bytes()
    after = state.save(state.set_value(opened, "Q1.rc", "2k4", 0.0))
    assert after.history.saved and b'"2k4"' in Path(path).read_bytes()
    back, _ = state.undo(after)
    assert not back.history.saved and back.history.text.encode() == first
    assert state.save(back).history.saved and Path(path).read_bytes() == first


def test_saving_changes_the_edited_lines_alone(path: str) -> None:
    raw = Path(path).read_bytes().replace(b"\n", b"\r\n").rstrip(b"\r\n")
    Path(path).write_bytes(raw)
    os.chmod(path, 0o640)
    state.save(state.set_value(state.open_file(path), "target.upper", "2M", 0.0))
    assert Path(path).read_bytes() == raw.replace(b'upper   = "1M"', b'upper   = "2M"')
    assert os.stat(path).st_mode & 0o777 == 0o640


def test_a_file_changed_by_another_hand_is_not_lost(opened: Session, path: str) -> None:
    edited = state.set_value(opened, "Q1.rc", "2k4", 0.0)
    assert not state.changed_on_disk(edited)
    theirs = Path(path).read_text(encoding="utf-8").replace('"1M"', '"3M"')
    Path(path).write_text(theirs, encoding="utf-8")
    assert state.changed_on_disk(edited)
    with pytest.raises(ChangedOnDisk) as found:
        state.save(edited)
    assert found.value.problems[0].fix and Path(path).read_text(encoding="utf-8") == theirs
    read_again = state.reload(edited, 5.0)
    assert read_again.history.text == theirs and read_again.history.saved
    back, label = state.undo(read_again)
    assert back.history.text == edited.history.text and label == "read again from the disk" and not back.history.saved
    over = state.save(edited, over=True)
    assert over.history.saved and '"2k4"' in Path(path).read_text(encoding="utf-8")
    assert not state.changed_on_disk(over) and state.save(over).history.saved


def test_a_file_that_appeared_meanwhile_is_not_lost(tmp_path: Path) -> None:
    fresh = state.new_session(str(tmp_path / "new.toml"), "format = 1\n")
    (tmp_path / "new.toml").write_text("title = 'theirs'", encoding="utf-8")
    with pytest.raises(ChangedOnDisk):
        state.save(fresh)


def test_what_can_not_be_saved_says_so_and_stays_as_it_is(tmp_path: Path) -> None:
    session = state.new_session(str(tmp_path / "gone" / "new.toml"), "format = 1\n")
    with pytest.raises(ProblemsFound):
        state.save(session)
    assert not session.history.saved and not session.exists


def test_a_read_only_file_says_so_on_opening(path: str, monkeypatch: pytest.MonkeyPatch) -> None:
    real = os.access
    monkeypatch.setattr(os, "access", lambda name, mode, **more: False if mode & os.W_OK and str(name) == path
                        else real(name, mode, **more))
    session = state.open_file(path)
    assert "permissions" in session.read_only and session.ledger is not None
    with pytest.raises(ProblemsFound):
        state.save(state.set_value(session, "Q1.rc", "2k4", 0.0))
    monkeypatch.setattr(os, "access", lambda name, mode, **more: False if mode & os.W_OK and str(name) != path
                        else real(name, mode, **more))
    assert "folder" in state.open_file(path).read_only


def test_the_pinned_figures_stay_while_the_chain_moves(opened: Session) -> None:
    pinned = state.pin(opened)
    after = state.set_value(pinned, "Q1.re", "47", 0.0)
    assert after.baseline is opened.ledger
    changes = state.moved(after)
    assert changes is not None
    gain = changes.overall("gain_db")
    assert gain is not None and gain.delta is not None and gain.delta < -0.3
    assert state.moved(state.unpin(after)) is None


def test_a_stage_that_comes_and_goes_is_one_step_each(opened: Session) -> None:
    session = state.add_stage(opened, "Q3", "common-base", 0.0)
    session = state.copy_stage(session, "Q4", 0.1)
    session = state.move_stage(session, "Q5", -1, 0.2)
    session = state.rename_stage(session, "Q5", "extra", 0.3)
    session = state.change_kind(session, "extra", "emitter-follower", 0.4)
    session = state.toggle_left_out(session, "extra", 0.5)
    session = state.set_note(session, "extra", "a\nb", 0.6)
    session = state.remove_stage(session, "Q4", 0.7)
    labels = [step.edit.label for step in session.history.past]
    assert labels == ["Q4 added after Q3: common-base", "Q4 copied as Q5", "Q5 moved towards the source",
                      "Q5 renamed extra", "extra: common-base to emitter-follower; taken out: cb, rc",
                      "extra left out", "note of extra set", "Q4 removed"]
    told = []
    while session.history.past:
        session, label = state.undo(session)
        told.append(label)
    assert told == labels[::-1] and session.history.text == opened.history.text


def test_a_card_is_taken_from_another_file(opened: Session, path: str) -> None:
    after = state.take_card(opened, "VOLT", str(DEMOS / "photodiode-front.toml"), 0.0)
    assert after.chain is not None and after.chain.cards["VOLT"].family == "opamp"
    assert after.history.past[-1].edit.label.startswith("card VOLT taken from ")
    with pytest.raises(ProblemsFound):
        state.take_card(opened, "NONE", str(DEMOS / "photodiode-front.toml"), 0.0)


def test_the_text_page_is_one_edit(opened: Session) -> None:
    text = opened.history.text.replace("600", "620").replace("format = 1", "format = 1 # one")
    after = state.set_text(opened, text, 0.0)
    assert after.history.text == text and len(after.history.past) == 1
    assert state.undo(after)[0].history.text == opened.history.text
    assert state.set_text(opened, opened.history.text, 0.0) is opened
