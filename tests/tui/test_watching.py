"""What another hand does to the open file, and work of earlier runs: noticed, offered, decided; nothing is lost."""

import os
from dataclasses import replace

import pytest

from polebook.problem import Problem
from polebook.session import instance, recovery, watch
from polebook.session.keeper import Keeper, Work
from polebook.session.lock import Holder
from polebook.tui.control import Outcome, asked, recovered, watching
from polebook.tui.control.leaving import half_typed
from polebook.tui.draw.screen import screen
from polebook.tui.view import Care, Overlay
from tests.tui.desk import LISTENER, Desk, copied
from tests.tui.drawn import faults

TEXT = LISTENER.read_text(encoding="utf-8")
THEIRS = TEXT.replace('"1M"', '"3M"')
HELD = Holder("/x/.chain.toml.polebook", instance.Instance(123, "bench", 1e9))


class Watched(Desk):
    """A desk that looks at the disk as the shell does once a second."""

    def look(self):
        care, session = self.state.care, self.state.session
        seen = session.identity if care.theirs is None else care.theirs.identity
        found = watch.look(session.path, session.identity, seen, lambda seconds: None)
        if found is not None:
            self.state = watching.noticed(self.state, found, self.now)
        return found is not None

    def press(self, *names):
        for name in names:
            super().press(name)
            self.state = watching.due(self.state, self.now)
        return self

    @property
    def title(self):
        return self.screen().splitlines()[0]

    @property
    def purpose(self):
        return self.overlay.purpose if self.overlay else ""


@pytest.fixture
def path(tmp_path):
    return copied(tmp_path)


def edited(path):
    return Watched(path).go("Q1.rc").press("+")


def replaced(path, text):
    """The file written as an editor does, by another in its place."""
    other = path.with_suffix(".other")
    other.write_text(text, encoding="utf-8")
    os.replace(other, path)


def test_a_change_is_offered_and_reading_it_is_an_edit(path):
    desk = edited(path)
    mine = desk.text
    assert not desk.look()
    replaced(path, THEIRS)
    assert desk.look() and desk.purpose == "changed"
    assert "changed on disk" in desk.title
    assert desk.labels == ["read it again", "keep mine", "see both"]
    desk.press("enter")
    assert desk.text == THEIRS and not desk.state.unsaved and "changed on disk" not in desk.title
    assert desk.press("u").text == mine and desk.state.unsaved
    desk.press("w")
    assert path.read_text(encoding="utf-8") == mine


def test_keeping_mine_leaves_the_disk_until_it_is_written(path):
    desk = edited(path)
    replaced(path, THEIRS)
    desk.look()
    desk.press("down", "enter")
    assert path.read_text(encoding="utf-8") == THEIRS
    assert desk.state.unsaved and desk.state.care.theirs is None
    assert not desk.look()
    desk.press("u")
    assert desk.text == TEXT and desk.state.unsaved  # the disk has theirs
    desk.press("U", "w")
    assert "written" in desk.view.message and path.read_text(encoding="utf-8") == desk.text


def test_kept_mine_is_asked_about_again_where_it_changes_again(path):
    desk = edited(path)
    replaced(path, THEIRS)
    desk.look()
    desk.press("down", "enter")
    replaced(path, THEIRS + "# more\n")
    desk.press("w")
    assert desk.purpose == "changed"
    assert path.read_text(encoding="utf-8") == THEIRS + "# more\n"


def test_seeing_both_comes_back_to_the_choice(path):
    desk = edited(path)
    replaced(path, THEIRS)
    desk.look()
    desk.press("end", "enter")
    assert desk.purpose == "difference"
    signs = {line[0] for line in desk.overlay.text}
    assert signs == {"-", "+", " "}
    assert any(line[0] == "+" and '"3M"' in line for line in desk.overlay.text)
    assert any(line[0] == "-" and '"2k4"' in line for line in desk.overlay.text)
    assert "what differs" in desk.screen()
    assert desk.press("down", "pagedown", "escape").purpose == "changed"
    desk.press("escape")
    assert desk.purpose == "" and "changed on disk" in desk.title
    assert not desk.look()


def test_a_choice_put_off_comes_again_with_writing(path):
    desk = edited(path)
    replaced(path, THEIRS)
    desk.look()
    desk.press("escape", "w")
    assert desk.labels == ["read it again", "write mine over it", "see both"]
    desk.press("end", "enter", "escape")
    assert desk.labels[1] == "write mine over it"
    desk.press("down", "enter")
    assert path.read_text(encoding="utf-8") == desk.text and not desk.state.unsaved
    assert desk.title.count("changed on disk") == 0


def test_there_is_a_choice_on_writing_without_edits_too(path):
    desk = Watched(path)
    replaced(path, THEIRS)
    desk.press("w")
    assert desk.purpose == "changed"


def test_the_same_text_in_another_file_is_the_same(path):
    desk = edited(path)
    replaced(path, TEXT)
    assert desk.look() and desk.purpose == "" and "changed" not in desk.title
    desk.press("w")
    assert "written" in desk.view.message


def test_a_text_as_it_stands_here_is_saved(path):
    desk = edited(path)
    replaced(path, desk.text)
    desk.look()
    assert not desk.state.unsaved and desk.purpose == ""
    assert desk.press("q").outcome is Outcome.QUIT


def test_a_change_that_is_taken_back_takes_the_choice_back(path):
    desk = edited(path)
    replaced(path, THEIRS)
    desk.look()
    assert desk.purpose == "changed"
    replaced(path, TEXT)
    desk.look()
    assert desk.purpose == "" and desk.state.care.theirs is None


@pytest.mark.parametrize("opens", [("enter",), ("f",), ("n",), ("?",), ("e",), ("q",)])
def test_nothing_that_is_open_is_disturbed(path, opens):
    desk = edited(path).press(*opens)
    over, writing, field = desk.overlay, desk.view.writing, desk.view.field
    replaced(path, THEIRS)
    desk.look()
    assert (desk.overlay, desk.view.writing, desk.view.field) == (over, writing, field)
    assert "changed on disk" in desk.title
    desk.press("escape")
    assert desk.purpose == "changed"


def test_a_file_that_has_gone_is_kept_here_and_written_anew(path):
    desk = Watched(path)
    path.unlink()
    desk.look()
    assert "gone from disk" in desk.title and "*" in desk.title and desk.state.unsaved
    assert "w writes it anew" in desk.view.message
    assert desk.press("q").purpose == "leave"
    desk.press("escape", "w")
    assert desk.labels == ["write it anew", "do nothing now"]
    desk.press("enter")
    assert path.read_text(encoding="utf-8") == TEXT and "gone" not in desk.title and not desk.state.unsaved


def test_a_file_that_comes_back_is_the_file(path):
    desk = edited(path)
    path.unlink()
    desk.look()
    path.write_text(TEXT, encoding="utf-8")
    desk.look()
    assert desk.purpose == "" and "gone" not in desk.title and desk.state.unsaved
    desk.press("u")
    assert not desk.state.unsaved


@pytest.mark.parametrize(("spoil", "told"), [
    (lambda path: path.write_bytes(b"\xff\xfe"), "not UTF-8"),
    (lambda path: (path.unlink(), path.mkdir()), "this is a folder"),
    (lambda path: path.write_bytes(b"#" * 600_000), "at most 524288"),
])
def test_something_unreadable_in_its_place_is_told_and_nothing_is_lost(path, spoil, told):
    desk = edited(path)
    mine = desk.text
    spoil(path)
    desk.look()
    assert told in desk.view.message and desk.text == mine and "changed on disk" in desk.title
    desk.press("w")
    assert desk.labels == ["write mine over it", "do nothing now"] and told in desk.overlay.refusal
    assert told.split()[0] in desk.screen()
    desk.press("enter")
    assert desk.text == mine
    assert path.is_dir() or path.read_text(encoding="utf-8") == mine


def test_a_file_with_faults_is_read_again_as_soon_as_it_is_mended(path):
    path.write_text(TEXT.replace('"2k2"', '"2k2 F"'), encoding="utf-8")
    desk = Watched(path)
    assert desk.state.session.ledger is None and desk.view.writing is not None
    replaced(path, TEXT.replace('"2k2"', '"2k2 V"'))
    desk.look()
    assert desk.view.writing is not None and "2k2 V" in desk.view.writing.history.text
    replaced(path, TEXT)
    desk.look()
    assert desk.state.session.ledger is not None and desk.view.writing is None and desk.purpose == ""
    assert desk.text == TEXT and not desk.state.unsaved
    assert '"2k2 V"' in desk.press("u").text


def test_a_file_with_faults_and_edits_is_not_read_again_unasked(path):
    path.write_text(TEXT.replace('"2k2"', '"2k2 F"'), encoding="utf-8")
    desk = Watched(path).press("x")
    mine = desk.state.text
    replaced(path, TEXT)
    desk.look()
    assert desk.state.text == mine and desk.purpose == ""
    assert desk.press("escape").purpose == "changed"


def test_an_empty_file_that_is_filled_is_read(path):
    path.write_text("", encoding="utf-8")
    desk = Watched(path)
    assert desk.purpose == "cautions"
    replaced(path, TEXT)
    desk.look()
    assert desk.purpose == "" and desk.state.session.ledger is not None


def test_a_file_that_another_makes_takes_the_place_of_the_new_chain(tmp_path):
    desk = Watched(tmp_path / "new.toml")
    assert desk.purpose == "new"
    replaced(tmp_path / "new.toml", TEXT)
    desk.look()
    assert desk.purpose == "" and desk.text == TEXT and desk.state.session.exists and not desk.state.unsaved


def test_a_new_chain_is_not_lost_to_a_file_that_another_makes(tmp_path):
    desk = Watched(tmp_path / "new.toml").press("enter", "enter")
    mine = desk.text
    replaced(tmp_path / "new.toml", TEXT)
    desk.look()
    assert desk.purpose == "changed" and desk.text == mine


def test_a_look_from_before_a_save_tells_nothing(path):
    desk = edited(path)
    session = desk.state.session
    replaced(path, THEIRS)
    old = watch.look(str(path), session.identity, session.identity, lambda seconds: None)
    desk.press("w", "down", "enter")
    before = desk.state
    assert watching.noticed(before, old, 0.0) is before


def test_the_text_page_writes_by_what_is_known_of_the_disk_now(path):
    """What the page judged before the disk's change was noticed does not count as knowing of it."""
    desk = Watched(path).press("e", "x")
    replaced(path, TEXT)
    desk.look()
    desk.press("ctrl+s")
    assert "written" in desk.view.message
    desk.state = watching.held(desk.press("y").state, HELD, (), 0.0)
    written = path.read_text(encoding="utf-8")
    desk.press("ctrl+s")
    assert "held by pid 123" in desk.view.message
    assert path.read_text(encoding="utf-8") == written != desk.state.text


def test_a_file_that_another_has_is_not_written(path):
    desk = edited(path)
    desk.state = watching.held(desk.state, HELD, (), 0.0)
    assert "read-only" in desk.title
    assert desk.view.message.startswith("held by pid 123 on bench since 2001-09-")
    assert desk.view.message.endswith("edits can't be written")
    desk.press("+", "w")
    assert desk.view.bad and "held by pid 123 on bench" in desk.view.message
    assert path.read_text(encoding="utf-8") == TEXT
    desk.state = watching.held(desk.state, None, (), 0.0)
    assert "read-only" not in desk.title and "it can be written here now" in desk.view.message
    desk.press("w")
    assert path.read_text(encoding="utf-8") == desk.text != TEXT


def test_who_only_reads_follows_what_is_written(path):
    desk = Watched(path)
    desk.state = watching.held(desk.state, HELD, (), 0.0)
    replaced(path, THEIRS)
    desk.look()
    assert desk.text == THEIRS and desk.purpose == ""
    desk.press("+")
    replaced(path, TEXT)
    desk.look()
    assert desk.purpose == "changed"


def test_leaving_what_can_not_be_written_can_keep_it(path):
    desk = edited(path)
    desk.state = watching.held(desk.state, HELD, (), 0.0)
    assert desk.press("q").labels[0].startswith("leave; opening the file again offers")
    desk.press("enter")
    assert desk.outcome is Outcome.QUIT and desk.state.care.keep
    desk = edited(path)
    desk.state = watching.held(desk.state, HELD, (), 0.0)
    desk.press("q", "down", "enter")
    assert desk.outcome is Outcome.QUIT and not desk.state.care.keep


def test_leaving_counts_what_is_not_written(path):
    desk = edited(path).press("w").press("right", "right", "down", "+").press("q")
    assert desk.overlay.title == "1 edit not written yet"
    desk.press("escape", "u", "u").press("q")
    assert desk.overlay.title == "what stands here is not written yet"


def test_the_text_page_is_asked_for_and_written_on_leaving(path):
    desk = Watched(path).press("e", "#", "ctrl+q")
    assert desk.overlay.title == "1 edit not written yet"
    desk.press("enter")
    assert desk.outcome is Outcome.QUIT
    assert path.read_text(encoding="utf-8") == desk.text != TEXT


def test_work_that_can_not_be_kept_is_told_once(path):
    desk = edited(path)
    desk.state = watching.unkept(desk.state, "disk full")
    assert "disk full" in desk.view.message and "no recovery: disk full" in desk.title
    desk.press("right")
    desk.state = watching.unkept(desk.state, "disk full")
    assert desk.view.message == "" and "no recovery: disk full" in desk.title
    desk.state = watching.unkept(desk.state, "")
    assert "no recovery" not in desk.title


@pytest.mark.parametrize("plain", [False, True])
def test_every_title_and_choice_fits_every_size(path, plain):
    desk = edited(path)
    kept = recovery.Kept("/x", (0, 0, 0), THEIRS, 1e9, "", replace(HELD.who, host="far\x1b\u202e" * 20))
    looks = (None, watch.Look(None, None), watch.Look(None, None, THEIRS),
             watch.Look(None, desk.state.session.identity, None, recovered_fault()))
    for look in looks:
        for unkept in ("", "the reason is \x1b[31m long " * 9):
            care = Care(look, False, (kept, kept), (kept,), unkept)
            begun = replace(desk.state, plain=plain, care=care)
            for state in (begun, asked.question(begun), asked.question(begun, True), recovered.ask(begun),
                          asked.both(begun, Overlay("changed", "")), recovered.chosen(begun, "see", 0.0)[0]):
                for size in ((80, 24), (140, 45), (60, 16), (61, 30), (5, 3)):
                    assert not faults(state, *size, screen(state, *size)), (look, unkept, state.view.overlay, size)


def recovered_fault():
    return Problem(None, "the file is \x1b[31m another " * 9, "for a reason\n" * 30, "mend it")


@pytest.fixture
def state(tmp_path, monkeypatch):
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    return tmp_path / "state" / "polebook"


def keeps(path, text, base=TEXT, host="far"):
    """Work that a polebook on another host kept."""
    keeper = Keeper(str(path), lambda: True)
    keeper._who = replace(keeper._who, host=host)
    keeper.want(Work(text, base))
    assert keeper.act() == ""
    return keeper


def offered(path):
    desk = Watched(path)
    kept, told = recovery.found(str(path), desk.state.session.history.disk)
    assert not told
    desk.state = recovered.ask(recovered.found(desk.state, kept))
    return desk


def test_kept_work_is_taken_as_one_edit(path, state):
    keeps(path, THEIRS)
    desk = offered(path)
    assert desk.overlay.title.startswith("unsaved work, kept ") and " on far" in desk.overlay.title
    assert desk.overlay.refusal == ""
    desk.press("enter")
    assert desk.text == THEIRS and "recovered" in desk.title and "*" in desk.title
    assert len(list(state.iterdir())) == 1  # until it is kept anew
    assert desk.press("u").text == TEXT
    assert "recovered" not in desk.title
    desk.press("U", "w")
    assert path.read_text(encoding="utf-8") == THEIRS and "recovered" not in desk.title


def test_it_can_be_looked_at_dropped_and_put_off(path, state):
    keeps(path, THEIRS)
    desk = offered(path).press("down", "enter")
    assert desk.purpose == "difference" and any("3M" in line for line in desk.overlay.text)
    desk.press("escape")
    assert desk.purpose == "recovered"
    desk.press("escape")
    assert desk.purpose == "" and "at the next opening" in desk.view.message and len(list(state.iterdir())) == 1
    desk = offered(path).press("down", "down", "enter")
    assert desk.purpose == "" and desk.text == TEXT and list(state.iterdir()) == []


def test_it_says_whether_the_file_has_changed_since(path, state):
    keeps(path, THEIRS, base=TEXT + "# older\n")
    assert "changed since" in offered(path).overlay.refusal
    path.unlink()
    assert "has gone since" in offered(path).overlay.refusal


def test_one_after_the_other(path, state):
    keeps(path, THEIRS)
    keeps(path, THEIRS + "# more\n")
    desk = offered(path)
    assert "(1 of 2)" in desk.overlay.title
    desk.press("enter")
    assert desk.purpose == "recovered" and "of 2" not in desk.overlay.title
    desk.press("enter")
    assert len(desk.state.care.taken) == 2 and desk.text in (THEIRS, THEIRS + "# more\n")


def test_kept_work_of_a_new_chain(tmp_path, state):
    path = tmp_path / "new.toml"
    keeps(path, TEXT, base=None)
    desk = offered(path)
    assert desk.purpose == "recovered"
    assert desk.again().press("escape").purpose == "new"
    desk.press("enter")
    assert desk.purpose == "" and desk.line == "Q1" and desk.state.unsaved


def test_kept_work_with_faults_opens_as_text(path, state):
    keeps(path, TEXT.replace('"2k2"', '"2k2 F"'))
    desk = offered(path).press("enter")
    assert desk.view.writing is not None and "2k2 F" in desk.view.writing.history.text
    path.write_text(TEXT.replace('"2k2"', '"2k2 V"'), encoding="utf-8")
    desk = offered(path)
    assert desk.purpose == "recovered"
    desk.press("escape")
    assert desk.purpose == "" and desk.view.writing is not None


def test_whoever_gets_the_lock_is_offered_what_was_left_behind(path, state):
    keeps(path, THEIRS)
    desk = Watched(path)
    desk.state = watching.held(desk.state, HELD, (), 0.0)
    desk.press("enter")
    kept, _ = recovery.found(str(path), TEXT)
    desk.state = watching.held(desk.state, None, kept, 0.0)
    assert desk.view.field is not None and desk.purpose == ""
    desk.press("escape")
    assert desk.purpose == "recovered"


def test_a_note_that_is_open_is_taken_in_where_the_program_ends(path):
    desk = Watched(path).press("n").type(" and more")
    assert desk.text == TEXT
    assert "and more" in half_typed(desk.state, 0.0).text
    desk = Watched(path).go("Q1.rc").type("4")
    assert half_typed(desk.state, 0.0) is desk.state  # half of 47k is another value
    desk = Watched(path).press("e", "#")
    assert half_typed(desk.state, 0.0).text == desk.state.text != TEXT
