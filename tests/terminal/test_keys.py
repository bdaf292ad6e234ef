"""Keys as bytes: stories, Esc and each key at once, values typed ahead, signals and suspending."""

import signal
import time

import pytest

from polebook.tui import keys
from tests.helpers import WHOLE
from tests.terminal.probe import Terminal, app
from tests.tui.places import PLACES

LEAVES = {"leave", "suspend", "write"}


def test_a_planning_story_from_opening_to_saving(pair, path):
    before = path.read_text(encoding="utf-8")
    pair.press("tab", "2")
    assert "Q2.c_comp" in pair.terminal.screen()
    pair.press("enter").press("-").press("-")
    pair.press("escape", "tab", ".").press("=")
    assert "working of" in pair.terminal.screen()
    pair.press("q").press("escape")
    pair.press("f", *"Q2.c_comp", "enter").press("0").press("enter")
    assert "upper short" not in pair.terminal.screen()
    after = pair.desk.text
    pair.press(*["u"] * 6)
    assert pair.desk.text == before
    pair.press(*["U"] * 6)
    assert pair.desk.text == after
    pair.terminal.press("w")
    pair.terminal.until("written")
    assert path.read_text(encoding="utf-8") == after
    changed = [(a, b) for a, b in zip(before.splitlines(), after.splitlines(), strict=True) if a != b]
    assert [b.partition("#")[0].strip() for _, b in changed] == ['c_comp      = 0']
    assert changed[0][0].partition("#")[2] == changed[0][1].partition("#")[2]
    pair.terminal.press("q")
    assert pair.terminal.ends() == 0


def test_esc_followed_at_once_by_each_key(pair):
    """From an open field: Esc leaves it, then the key does what it always does; both in one write."""
    chosen = [name for name, action in keys.ACTIONS.items() if action not in LEAVES and action not in ("undo", "redo")]
    every = ["u", "U", *chosen, "R", "Q", "[", "]", "O", "9", "e", "z", "µ"]
    for name in every if WHOLE else every[::2]:
        pair.press("1")
        assert pair.desk.view.field is not None, name
        pair.press("escape", name)
        pair.press("escape").press("escape").press("escape")
        while pair.desk.state.session.history.past:
            pair.press("u")
        pair.press("f", *"Q1.rc", "enter")


@pytest.mark.parametrize("value", ["2u2", "4k7", "100n"] if WHOLE else ["4k7"])
def test_a_value_typed_ahead_changes_nothing_but_a_field(pair, path, value):
    before = path.read_text(encoding="utf-8")
    for place in ("sheet of a stage", "ledger", "nodes", "nodes, sheet", "field", "find", "add", "help", "working",
                  "cautions", "note", "rename", "targets"):
        pair.press(*PLACES[place]).press(*value)
        assert pair.desk.text == before
        pair.press("escape").press("escape").press("escape").press("escape")
        time.sleep(1.05) if place in ("ledger", "nodes") else None  # a letter after a digit is a value for a second
        pair.desk.now += 2
    assert path.read_text(encoding="utf-8") == before


def test_ctrl_c_leaves_a_field_then_the_app(pair):
    pair.press("1", "2").press("ctrl+c")
    assert pair.terminal.process.poll() is None
    pair.terminal.press("ctrl+c")
    assert pair.terminal.ends() == 0
    assert pair.terminal.left == ""


def test_unsaved_work_is_asked_for(pair, path):
    before = path.read_text(encoding="utf-8")
    pair.press("+").press("ctrl+q").press("escape").press("ctrl+c").press("down")
    pair.terminal.press("enter")
    assert pair.terminal.ends() == 0
    assert path.read_text(encoding="utf-8") == before


def test_ctrl_z_without_a_shell_to_go_back_to(pair):
    """As over `ssh -t host polebook FILE`: nobody could wake it. With a shell: tests.terminal.test_jobs."""
    pair.press("right")
    pair.terminal.press("ctrl+z")
    pair.terminal.until("there is no shell to go back to: q leaves")
    assert pair.terminal.raw and not pair.terminal.stopped
    pair.press("right").press("+")


def test_ctrl_l_paints_all_anew(pair):
    assert pair.terminal.told("ctrl+l").count > 1500
    pair.terminal.shows(pair.desk.screen())


def test_a_paste_is_one_value(pair, path):
    pair.press("f", *"Q1.rc", "enter")
    pair.terminal.write(b"\x1b[200~3k3\nqu2\x1b[201~")
    pair.desk.paste("3k3\nqu2")
    pair.terminal.shows(pair.desk.screen())
    assert pair.desk.view.field.typed.startswith("3k3")


def test_unknown_sequences_do_nothing(pair):
    for junk in (b"\x1b[99z", b"\x1b[1;2;3;4~", b"\x1b]0;title\x07", b"\x1b[<0;10;10M", b"\x00", b"\xff\xfe"):
        pair.terminal.press(junk.decode("latin-1")) if junk.isascii() else pair.terminal.write(junk)
        pair.terminal.quiet(0.1)
        assert pair.terminal.process.poll() is None
    before = pair.desk.text
    pair.press("escape").press("right")
    assert pair.desk.text == before


@pytest.mark.parametrize(("number", "code"), [
    (signal.SIGTERM, 143), (signal.SIGHUP, 129), (signal.SIGQUIT, 131), (signal.SIGINT, 130)])
def test_a_signal_leaves_the_terminal_as_it_was(pair, number, code):
    pair.press("right")
    pair.terminal.signal(number)
    assert pair.terminal.ends() == code
    assert pair.terminal.left == ""


def test_a_line_that_drops_ends_it(pair):
    pair.terminal.hang_up()
    assert pair.terminal.process.wait(10) in (129, -signal.SIGHUP)


def test_a_line_that_drops_ends_it_where_hangups_are_ignored(path):
    with Terminal(["sh", "-c", 'trap "" HUP; exec "$@"', "sh", *app(path)]) as terminal:
        terminal.until("? help")
        terminal.hang_up()
        assert terminal.process.wait(10) == 129
