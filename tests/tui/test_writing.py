"""The text page: typing, moving, undo within it, faults by line, and what becomes of the text on leaving it."""

import random

import pytest

from polebook.chain.read import parse
from polebook.session import state as sessions
from polebook.session import watch
from polebook.text.spans import scan
from polebook.tui import keys
from polebook.tui.control import Outcome, watching, writing, writing_judged, writing_text
from polebook.tui.control.base import focused, keys_of, lines, to_path
from polebook.tui.written import line_of, path_at, places
from tests.tui.desk import LISTENER, SIX, Desk, copied


def page(desk):
    return desk.view.writing


def written(desk):
    return page(desk).history.text


def row(desk):
    """The cursor's line, and the cursor in it."""
    text, at = written(desk), page(desk).cursor
    begin = text.rfind("\n", 0, at) + 1
    return text[begin:].partition("\n")[0].rstrip("\r"), at - begin


@pytest.fixture
def desk():
    return Desk(LISTENER).go("Q2.rc").press("e")


@pytest.mark.parametrize("of", [LISTENER, SIX], ids=["listener", "six"])
def test_it_opens_at_the_focused_key_and_leaves_to_the_key_under_the_cursor(of):
    desk = Desk(of)
    begun, seen = desk.state, 0
    for name in sessions.sheets_of(begun.session):
        for key in keys_of(begun.session, name):
            if not key.text:
                continue
            desk.state = to_path(begun, key.path)
            assert focused(desk.state).path == key.path
            desk.press("e")
            text, at = row(desk)
            assert text.split("=")[0].strip() == key.key.rpartition(".")[2]
            assert text[at:].startswith(key.text.partition("\n")[0]) or text[at - 3 :] == '"""'
            assert path_at(written(desk), page(desk).cursor) == key.path
            desk.press("escape")
            assert (page(desk), desk.key, desk.view.message) == (None, key.path, "")
            seen += 1
    assert seen > 50
    assert desk.state.session is begun.session


def test_a_key_that_is_not_in_the_file_opens_at_its_table():
    assert row(Desk(LISTENER).go("Q2.rf").press("e"))[0] == "[[stage]]"
    assert line_of(*at(Desk(LISTENER).go("tolerance.shape").press("e"))) == 1


def at(desk):
    return written(desk), page(desk).cursor


def test_every_character_is_text_and_leaving_is_one_edit(desk):
    before = desk.text
    desk.press("end").type(' # w q e u ? 1 + = ! "')
    assert row(desk)[0] == 'rc          = "2k2" # w q e u ? 1 + = ! "'
    assert desk.text == before
    assert desk.state.text == written(desk)
    assert desk.outcome is Outcome.NONE
    desk.press("escape")
    assert (page(desk), desk.key) == (None, "Q2.rc")
    assert len(desk.state.session.history.past) == 1
    assert desk.view.message == "text edited"
    assert desk.text == before.replace('"2k2"\nre          = "47"', '"2k2" # w q e u ? 1 + = ! "\nre          = "47"')
    assert desk.press("u").text == before
    assert desk.state.session.history.saved


def test_what_moved_is_seen_while_it_is_typed_and_told_on_leaving(desk):
    good = desk.state.session.ledger
    desk.press("delete", "delete", "delete").type("3k3")
    want = sessions.set_value(desk.state.session, "Q2.rc", "3k3", 0.0).ledger
    after = page(desk).after.ledger
    assert (after.upper_hz, after.solution.gain) == (want.upper_hz, want.solution.gain)
    assert after.upper_hz < good.upper_hz
    shown = desk.screen()
    assert "gain 63.05 dB +3.29 dB" in shown and "what has moved since e was pressed" in shown
    assert "+3.29 dB" in desk.press("escape").view.message
    assert desk.state.session.ledger is after


def test_untouched_text_is_judged_no_more_than_once(desk, monkeypatch):
    judged = []
    real = writing_judged.set_text
    monkeypatch.setattr(writing_judged, "set_text", lambda *given: judged.append(1) or real(*given))
    desk.press("up", "left", "end", "ctrl+end", "ctrl+f", "r", "escape", "ctrl+n", "ctrl+u", "ctrl+y", "tab")
    assert not judged
    desk.press("x")
    assert len(judged) == 1
    desk.press("left", "escape")
    assert len(judged) == 1


def test_faults_are_told_as_they_come_and_go(desk):
    good = desk.state.session.ledger
    desk.press("delete")
    assert not page(desk).after.problems
    desk.type("k")  # "kk2"
    problems = page(desk).after.problems
    assert [problem.place.line for problem in problems] == [41]
    shown = desk.screen()
    assert "! 41" in shown and "1 fault" in shown.splitlines()[0] and '"kk2"' in shown and "    fix  " in shown
    assert "figures of before the fault" in shown
    assert "upper 400 kHz" not in shown  # "k2" had figures of its own, and they are the last good ones
    assert page(desk).after.good is not good
    desk.press("backspace").type("2")
    assert not page(desk).after.problems
    assert page(desk).after.ledger.upper_hz == good.upper_hz
    shown = desk.screen()
    assert "upper 400 kHz" in shown and "before the fault" not in shown and "! 41" not in shown
    assert written(desk) == desk.text


@pytest.mark.parametrize("mend", ["here", "u", "outside", "outside, as text"])
def test_a_fault_is_taken_in_and_the_app_is_whole_when_it_is_mended(tmp_path, mend):
    path = copied(tmp_path)
    desk = Desk(path).go("Q2.rc").press("e", "backspace", "escape")  # rc = 2k2"
    assert page(desk) is None
    assert desk.state.session.ledger is None
    assert "u takes it back" in desk.view.message and "1 fault" in desk.view.message
    assert "figures of before the fault" in desk.screen()
    if mend == "here":
        desk.press("e")
        assert row(desk) == ('rc          = 2k2"', 14)
        desk.type('"').press("escape")
        assert desk.key == "Q2.rc"
    elif mend == "u":
        desk.press("u")
    else:
        desk.press("w")
        if mend == "outside, as text":
            desk.press("e")
        path.write_text(LISTENER.read_text(encoding="utf-8"), encoding="utf-8")
        look = watch.at_once(str(path), desk.state.session.identity)
        desk.state = watching.noticed(desk.state, look, desk.now)
        assert page(desk) is None and "read again" in desk.view.message
    assert desk.text == LISTENER.read_text(encoding="utf-8")
    assert (desk.line, desk.state.session.problems) == ("Q2", ())
    assert "400 kHz for 1 MHz" in desk.screen() and "before the fault" not in desk.screen()


def test_keys_go_from_fault_to_fault_and_round():
    desk = Desk(LISTENER).press("e", "ctrl+home")
    assert "no faults" in desk.press("ctrl+n").view.message
    for name in ("Q1.rb1", "Q2.rb1", "Q3.re"):
        desk.press("escape").go(name).press("e") if not page(desk).after.problems else desk.press(*_to(desk, name))
        desk.press("home", "x")
    found = places(written(desk), page(desk).after.problems)
    assert len(found) == 3
    desk.press("ctrl+home")
    seen = [page(desk.press("ctrl+n")).cursor for _ in range(4)]
    assert seen == [*found, found[0]]
    seen = [page(desk.press("ctrl+p")).cursor for _ in range(3)]
    assert seen == [found[2], found[1], found[0]]
    assert "1 of 3" in desk.screen() and "xrb1" in desk.screen()


def _to(desk, name):
    """Keys that lead to the line of a key below."""
    text = written(desk)
    stage = text.index(f'"{name.partition(".")[0]}"')
    to = text.count("\n", 0, text.index(f"\n{name.partition('.')[2]} ", stage) + 1)
    return ["down"] * (to - text.count("\n", 0, page(desk).cursor))


def test_a_fault_of_a_chain_that_can_be_read_is_told_by_line(tmp_path):
    path = tmp_path / "loose.toml"
    path.write_text("""format = 1
[supply]
positive = 10
[source]
kind = "voltage"
resistance = 50
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
[[stage]]
name = "M2"
kind = "common-source"
device = "N"
rd = "1k"
[device.N]
family = "mosfet"
gm = "1m"
""", encoding="utf-8")
    desk = Desk(path)
    assert page(desk) is not None and page(desk).after.chain is not None
    assert row(desk)[0] == "[[stage]]"
    assert "!  7" in desk.screen() and "nothing holds" in desk.screen() and "    fix  " in desk.screen()
    desk.press("down", "end", "enter").type('rd = "1k"')
    assert not page(desk).after.problems
    assert desk.press("escape").state.session.ledger is not None


def test_a_file_with_faults_opens_at_the_first(tmp_path):
    path = copied(tmp_path)
    wrong = LISTENER.read_text(encoding="utf-8").replace('"56k"', '"56 kk"').replace("c_comp ", "ccomp ")
    path.write_text(wrong, encoding="utf-8")
    desk = Desk(path)
    assert (row(desk), len(page(desk).after.problems)) == (('rb1         = "56 kk"', 14), 3)
    assert "56 kk" in desk.screen() and "3 faults" in desk.screen()
    desk.press("escape")
    assert "e comes back" in desk.view.message and not desk.state.session.history.past
    assert "! 26" not in desk.screen() and "56 kk" in desk.screen()
    desk.press("e")
    assert row(desk)[0] == 'rb1         = "56 kk"'


@pytest.mark.parametrize("text", [
    "", "\n\n", "x", "=", '"', "[", "[[stage]]\n" * 70, "\ufefformat = 1", "a\0b", "\r\r\n"])
def test_any_text_can_be_opened_written_and_left(tmp_path, text):
    path = tmp_path / "any.toml"
    path.write_bytes(text.encode())
    desk = Desk(path)
    assert (desk.overlay is not None) == (not text.strip())
    desk.press("escape", "e")
    pressed = ["end", "x", "enter", "tab", "backspace", "ctrl+n", "up", "delete", "ctrl+x", "pagedown", "ctrl+k",
               "ctrl+u", "ctrl+f", "x", "enter", "escape", "ctrl+y", "ctrl+g", "shift+tab"]
    for key in pressed:
        desk.press(key).screen()
    assert written(desk).encode() == text.encode()
    assert desk.press("escape").text == text


def test_a_run_of_typing_is_one_step_and_a_move_ends_it():
    desk = Desk(LISTENER, seconds=0.1).press("e", "ctrl+home")
    before = written(desk)
    desk.type("# one").press("enter").type("# two").press("left").type("xy").press("backspace", "backspace")
    assert [len(step.edit.splices) for step in page(desk).history.past] == [1, 1, 1, 1]
    texts = []
    while page(desk).history.past:
        texts.append(written(desk.press("ctrl+u"))[:len(written(desk)) - len(before)])
    assert texts == ["# one\n# twxyo", "# one\n# two", "# one\n", ""]
    assert "nothing to take back" in desk.press("ctrl+u").view.message
    for _ in range(4):
        desk.press("ctrl+y")
    assert written(desk) == "# one\n# two" + before
    desk.seconds = 2.0
    desk.type("ab")
    assert len(page(desk).history.past) == 6
    assert "nothing was taken back" in desk.press("ctrl+y").view.message


def test_the_cursor_goes_where_undo_and_redo_change_the_text(desk):
    desk.press("delete", "delete").press("ctrl+end").type("x").press("ctrl+home")
    assert line_of(*at(desk.press("ctrl+u"))) == written(desk).count("\n") + 1
    desk.press("ctrl+home", "ctrl+u")
    assert row(desk)[0] == 'rc          = "k2"' or row(desk)[0] == 'rc          = "2k2"'
    assert row(desk)[0].startswith("rc")
    desk.press("ctrl+home", "ctrl+y")
    assert row(desk)[0].startswith("rc")


def test_back_to_what_it_was_opened_with_loses_nothing(desk):
    before = written(desk)
    assert "nothing was written" in desk.press("ctrl+g").view.message
    desk.type("1").press("down", "ctrl+x", "ctrl+k")
    mine = written(desk)
    assert written(desk.press("ctrl+g")) == before
    assert written(desk.press("ctrl+u")) == mine
    desk.press("ctrl+g", "escape")
    assert (desk.text, desk.state.session.history.past) == (before, ())


def model(text, at, key):
    """What a few keys do to a text without carriage returns and combining marks, written plainly."""
    lines = text[:at].split("\n")
    begin, end = at - len(lines[-1]), (text + "\n").index("\n", at)
    return {
        "left": (text, max(at - 1, 0)), "right": (text, min(at + 1, len(text))), "home": (text, begin),
        "end": (text, end), "ctrl+home": (text, 0), "ctrl+end": (text, len(text)),
        "backspace": (text[:max(at - 1, 0)] + text[at:], max(at - 1, 0)), "delete": (text[:at] + text[at + 1:], at),
        "ctrl+k": (text[:at] + text[end if end > at else end + 1:], at),
        "enter": (text[:at] + "\n" + text[at:], at + 1),
    }.get(key, (text[:at] + key + text[at:], at + 1))


@pytest.mark.parametrize("seed", range(4))
def test_keys_at_random_do_what_a_plain_model_does_and_undo_undoes_them(seed, tmp_path):
    rng = random.Random(seed)
    path = tmp_path / "small.toml"
    path.write_text("# a\nb = 1\n\n[c] # d\n", encoding="utf-8")
    desk = Desk(path).press("escape", "e")
    text, cursor = at(desk)
    for _ in range(150):
        desk.seconds = rng.choice((0.1, 3.0))
        key = rng.choice(["left", "right", "home", "end", "ctrl+home", "ctrl+end", "backspace", "delete", "ctrl+k",
                          "enter", "enter", *'ab= "#[é漢'])
        text, cursor = model(text, cursor, key)
        desk.press("space" if key == " " else key)
        assert at(desk) == (text, cursor), key
        assert page(desk).after.history.text == text
    past = []
    while page(desk).history.past:
        past.append(written(desk))
        desk.press("ctrl+u")
    assert written(desk) == path.read_text(encoding="utf-8")
    while past:
        assert written(desk.press("ctrl+y")) == past.pop()
    desk.press("escape")
    assert desk.text == text
    assert desk.press("u").text == path.read_text(encoding="utf-8")


def test_up_and_down_keep_the_column_over_short_lines():
    desk = Desk(LISTENER).press("e", "ctrl+home", *["right"] * 30, "down", "down", "down")
    assert row(desk) == ("format = 1", 10)
    assert row(desk.press("up"))[1] == 30
    assert row(desk.press("pagedown"))[1] < 30
    assert row(desk.press("pageup"))[1] == 30
    assert at(desk.press(*["pageup"] * 3))[1] == 0 or row(desk)[1] == 30
    assert at(desk.press("ctrl+home", "up"))[1] == 0
    assert at(desk.press("ctrl+end", "down"))[1] == len(written(desk))


def test_lines_that_end_in_two_characters_stay_so(tmp_path):
    path = tmp_path / "crlf.toml"
    before = LISTENER.read_bytes().replace(b"\n", b"\r\n")
    path.write_bytes(before)
    desk = Desk(path).go("Q2.rc").press("e")
    assert "\\r" not in desk.screen()
    desk.press("end")
    assert row(desk) == ('rc          = "2k2"', 19)
    assert row(desk.press("right"))[1] == 0
    assert row(desk.press("left"))[1] == 19
    desk.press("enter").type("# x")
    desk.paste("one\ntwo\r\nthree\rfour")
    assert written(desk).encode() == before.replace(
        b'"2k2"\r\nre          = "47"', b'"2k2"\r\n# xone\r\ntwo\r\nthree\r\nfour\r\nre          = "47"')
    desk.press("ctrl+u", "ctrl+x", "up", "end", "delete", "enter", "home", "backspace", "enter")
    assert written(desk).encode() == before
    for key in ("left", "right", "up", "down", "ctrl+left", "ctrl+right", "pageup", "pagedown", "home", "end"):
        for _ in range(30):
            desk.press(key)
            assert written(desk)[page(desk).cursor - 1 : page(desk).cursor + 1] != "\r\n", key


def test_marks_over_a_letter_go_with_it(tmp_path):
    path = tmp_path / "marks.toml"
    path.write_text("# e\u0301x\n", encoding="utf-8")
    desk = Desk(path).press("escape", "e", "home", "right", "right", "right")
    assert page(desk).cursor == 4
    assert page(desk.press("left")).cursor == 2
    assert written(desk.press("delete")) == "# x\n"


def test_words_lines_and_values():
    desk = Desk(LISTENER).press("e", "ctrl+home", "tab")
    assert row(desk) == ("format = 1", 9)
    assert row(desk.press("tab")) == ('title  = "Wire-break listener"', 10)
    assert row(desk.press("ctrl+right")) == ('title  = "Wire-break listener"', 14)
    assert row(desk.press("ctrl+left"))[1] == 10
    assert row(desk.press("shift+tab"))[0] == "format = 1"
    assert row(desk.press("tab", "end", "ctrl+w"))[0] == 'title  = "Wire-break '
    assert row(desk.press("ctrl+x"))[0] == 'note   = """'
    seen = []
    desk.press("ctrl+g", "ctrl+home")
    for _ in range(100):
        seen.append(page(desk.press("tab")).cursor)
    assert seen == sorted(seen)
    values = [entry.value.start for entry in scan(desk.text).entries.values()]
    quotes = {"\"\"\"": 3, "\"": 1}
    assert set(seen) == {start + next((size for mark, size in quotes.items() if desk.text.startswith(mark, start)), 0)
                         for start in values}


def test_a_text_is_looked_for(desk):
    begun = page(desk).cursor
    desk.press("ctrl+f").type("Q3")
    assert row(desk)[0] == 'name        = "Q3"' and "1 of 1" in desk.screen()
    desk.press("backspace", "backspace").type("COUPLE").press("enter")
    found = [row(desk.press("enter"))[0] for _ in range(3)]
    assert [text.partition("#")[0].strip() for text in found] == [
        'couple      = "3n3"', 'couple      = "100n"', 'couple      = "4n7"']
    assert row(desk.press("up"))[0] == 'couple      = "100n"'
    desk.type("zz")
    assert "nothing like it" in desk.screen() and written(desk) == desk.text
    desk.press("escape")
    assert page(desk) is not None and page(desk).cursor != begun
    desk.press("ctrl+f").paste("re_\nbypassed")
    assert page(desk).find == "re_ bypassed"
    desk.press("home", "x")
    assert page(desk).find is None and written(desk) != desk.text


def test_writing_the_file_stays_on_the_page(tmp_path):
    path = copied(tmp_path)
    desk = Desk(path).go("Q2.rc").press("e", "delete").type("3").press("ctrl+s")
    assert "written" in desk.view.message and page(desk) is not None
    assert path.read_text(encoding="utf-8") == written(desk) == desk.text
    assert "*" not in desk.screen().splitlines()[0]
    assert len(desk.state.session.history.past) == 1
    desk.press("ctrl+u", "ctrl+u")
    assert "*" in desk.screen().splitlines()[0]
    desk.press("escape")
    assert desk.text == LISTENER.read_text(encoding="utf-8")
    assert len(desk.state.session.history.past) == 2
    assert "nothing to write" in Desk(path).press("e", "ctrl+s").view.message


def test_another_hand_is_asked_about_and_nothing_is_lost(tmp_path):
    path = copied(tmp_path)
    desk = Desk(path).press("e", "ctrl+home").type("# mine").press("enter")
    mine = written(desk)
    path.write_text(path.read_text(encoding="utf-8") + "# theirs\n", encoding="utf-8")
    desk.press("ctrl+s")
    assert desk.overlay.purpose == "changed" and desk.text == mine
    desk.press("enter")
    assert (desk.text.endswith("# theirs\n"), page(desk)) == (True, None)
    assert desk.press("u").text == mine


def test_leaving_the_app_takes_the_text_in_first(tmp_path):
    path = copied(tmp_path)
    assert Desk(path).press("e", "ctrl+q").outcome is Outcome.QUIT
    desk = Desk(path).press("e", "ctrl+home").type("# mine").press("enter")
    mine = written(desk)
    desk.press("ctrl+q")
    assert (desk.outcome, desk.overlay.purpose) == (Outcome.NONE, "leave")
    assert "1 edit not written yet" in desk.screen()
    desk.press("escape")
    assert desk.state.text == mine
    desk.press("ctrl+q", "enter")
    assert desk.outcome is Outcome.QUIT
    assert path.read_text(encoding="utf-8") == mine
    assert Desk(path).press("e").type("x").press("ctrl+c").view.writing is None


def test_pastes_keep_their_lines_and_have_an_end():
    desk = Desk(LISTENER).press("e", "ctrl+home").paste("# a\r\n\tb\x1b[31m\u202e\n")
    assert written(desk).startswith("# a\n\tb\x1b[31m\u202e\n# Listens")
    assert "\\t" in desk.screen() and "\\x1b" in desk.screen() and "\\u202e" in desk.screen()
    assert len(page(desk).history.past) == 1
    before = written(desk)
    desk.paste("x" * 600_000)
    assert written(desk) == before and desk.view.bad and "512 KiB" in desk.view.message


@pytest.fixture(scope="module")
def long_chain(tmp_path_factory):
    """A file of a chain that takes its time."""
    session = sessions.open_file(str(LISTENER))
    for _ in range(20):
        session = sessions.copy_stage(session, "Q1", 0.0)
    path = tmp_path_factory.mktemp("long") / "long.toml"
    path.write_text(session.history.text, encoding="utf-8")
    return path


def test_a_long_chain_is_judged_when_no_key_comes(long_chain):
    desk = Desk(long_chain).go("Q1.rc").press("e", "delete")
    assert (page(desk).judged, desk.state.job.rest) == (False, writing_judged.PAUSE_S)
    assert "figures of a moment ago" in desk.screen() and "*" in desk.screen().splitlines()[0]
    first = desk.state.job
    desk.type("3")
    assert desk.state.job is not first
    job = desk.state.job
    desk.press("left")
    assert desk.state.job is job
    desk.work()
    assert (page(desk).judged, desk.state.job) == (True, None)
    assert "a moment ago" not in desk.screen()
    want = sessions.set_text(desk.state.session, written(desk), 0.0)
    assert page(desk).after.ledger.upper_hz == want.ledger.upper_hz != desk.state.session.ledger.upper_hz
    desk.press("ctrl+u", "ctrl+u")
    assert (page(desk).judged, desk.state.job) == (True, None)  # the text that is known


def test_a_judgement_that_comes_late_is_not_taken(long_chain):
    desk = Desk(long_chain).press("e").type("x")
    late = desk.state.job
    desk.press("backspace").type("y")
    state = late.takes.piece(desk.state, next(late.work)[2])
    assert not state.view.writing.judged


def test_leaving_before_a_long_chain_is_judged(long_chain):
    desk = Desk(long_chain).go("Q1.rc").press("e", "delete").type("3")
    mine = written(desk)
    desk.press("escape")
    assert (desk.state.job, desk.text) == (None, mine)
    assert desk.state.session.ledger is not None and desk.line == "Q1"
    assert parse(mine, "x").numbers == desk.state.session.chain.numbers


def test_marks_of_faults_move_with_their_lines_until_they_are_judged(long_chain):
    desk = Desk(long_chain).go("Q2.rc").press("e", "end", "x").work()
    line = line_of(*at(desk))
    desk.press("ctrl+home", "enter")
    assert not page(desk).judged
    desk.press("ctrl+end", *["pageup"] * 3)
    shown = desk.press("ctrl+home", *["down"] * line).screen()
    assert f"!{line + 1:>4}" in shown
    assert desk.press("escape").state.session.problems and lines(desk.state.session)


def test_the_help_and_the_key_line_name_the_page_s_keys(desk):
    told = "\n".join(desk.again().press("escape", "?").overlay.text)
    page_of = told[told.index("The text page") :]
    named = {name for name in writing._OWN if name.startswith("ctrl+")} - {"ctrl+c"}
    assert {name for name in named if name in page_of} == named
    for faults in (False, True):
        for finding in (False, True):
            line = "   ".join(" ".join(hint) for hint in keys.writing_hints(faults, finding)[:5])
            assert len(line) <= 78, line
    known = {*writing._OWN, *writing_text._MOVES, *writing_text._TAKES, "ctrl+q", "Esc", "Tab"}
    assert {name for name, _ in (*keys.writing_hints(False, False), *keys.writing_hints(True, False))} <= known
