"""The text page as bytes: a story of mistakes mended, type-ahead, pastes, and what a letter costs."""


from polebook.session import state as sessions
from tests.terminal.probe import BYTES, Terminal, app
from tests.tui.desk import LISTENER, Desk, copied


def test_a_story_of_a_mistake_and_its_mending(pair, path):
    before = path.read_text(encoding="utf-8")
    pair.press("f", *"Q2.c_comp", "enter").press("e").press("delete", "delete", "delete").press(*"2p x")
    assert "figures of before the fault" in pair.terminal.screen() and "! 45" in pair.terminal.screen()
    pair.press("ctrl+home").press("ctrl+n")
    pair.press(*["right"] * 3).press("delete", "delete")
    assert "before the fault" not in pair.terminal.screen()
    pair.press("ctrl+u").press("ctrl+y").press("ctrl+f", *"600M", "enter").press("escape").press("down", "end", "x")
    pair.press("escape")
    assert "u takes it back" in pair.terminal.screen()
    pair.press("u").press("U").press("e").press("end", "backspace")
    terminal = pair.terminal  # alone from here: two that write one file would each find it changed
    terminal.press("ctrl+s")
    terminal.until(" written: ")
    assert "Esc take it in" in terminal.screen()
    after = path.read_text(encoding="utf-8")
    assert after == before.replace('"4p7"', '"2p"')
    terminal.press("escape", "u", "u", "w")
    terminal.when(lambda _: path.read_text(encoding="utf-8") == before, "the first text written")
    terminal.press("U", "U", "w")
    terminal.when(lambda _: path.read_text(encoding="utf-8") == after, "the changed text written")
    terminal.press("q")
    assert pair.terminal.ends() == 0


def test_letters_are_never_commands_and_esc_at_once_is_esc(pair):
    pair.press("e", "ctrl+home", *"# quit? x p w u U 4k7 + - * / = ! [ ] < >", "enter")
    assert pair.terminal.process.poll() is None
    pair.press("e").press("escape", "u")
    assert pair.desk.text == LISTENER.read_text(encoding="utf-8")


def test_a_paste_of_lines(pair):
    pair.press("e", "ctrl+home")
    pair.terminal.write(b"\x1b[200~# one\n# two\x07\n\x1b[201~")
    pair.desk.paste("# one\n# two\x07\n")
    pair.terminal.shows(pair.desk.screen())
    assert "# two\\x07" in pair.terminal.screen()
    pair.press("ctrl+u").press("escape")
    assert pair.desk.state.session.history.saved


def test_ctrl_q_takes_it_in_and_asks(pair, path):
    pair.press("e", "ctrl+home", "#", "enter").press("ctrl+q")
    assert "not written yet" in pair.terminal.screen()
    pair.terminal.press("enter")
    assert pair.terminal.ends() == 0
    assert path.read_text(encoding="utf-8") == "#\n" + LISTENER.read_text(encoding="utf-8")


def test_a_file_with_faults_opens_as_text_and_is_whole_when_mended(path):
    path.write_text(path.read_text(encoding="utf-8").replace('"33" ', '"33 '), encoding="utf-8")
    with Terminal(app(path), 140, 45) as terminal:
        desk = Desk(path, seconds=0.01)
        terminal.shows(desk.screen(140, 45))
        assert "this text is not closed" in terminal.screen()
        terminal.write(b'\x1b[C' * 3 + b'"')
        terminal.shows(desk.press("right", "right", "right", '"').screen(140, 45))
        assert "fault" not in terminal.screen()


def test_a_letter_is_few_bytes(tmp_path):
    """At most 0.5 kB where no figure moves, 1.5 kB where all do and a fault comes or goes."""
    path = copied(tmp_path)
    with Terminal(app(path)) as terminal:
        terminal.until("? help")
        terminal.press("f", *"Q2.rc", "enter", "e")
        for key in ("delete", "delete", "3", "k", "9"):
            assert 0 < terminal.told(key, quiet=0.08).count <= 1500, key
        terminal.press("end", "#")
        for letter in "words":
            assert 0 < terminal.told(letter, quiet=0.08).count <= 500
        for key in ("up", "left", "down"):
            assert 0 < terminal.told(key, quiet=0.08).count <= 500


def test_a_long_chain_takes_letters_at_once_and_is_judged_when_they_end(tmp_path):
    session = sessions.open_file(str(LISTENER))
    for _ in range(16):
        session = sessions.copy_stage(session, "Q1", 0.0)
    path = tmp_path / "long.toml"
    path.write_text(session.history.text, encoding="utf-8")
    desk = Desk(path, seconds=0.01)
    with Terminal(app(path)) as terminal:
        terminal.shows(desk.screen())
        keys = ["e", "delete", "3", "end", *" # as wide as it goes"]
        terminal.write("".join(BYTES.get(key, key) for key in keys).encode())
        desk.press(*keys)
        assert not desk.view.writing.judged
        terminal.shows(desk.work().screen())
