"""What the apportion page draws: every key and target of a plan, its marks without colour, at any size, of anything."""

import random
from dataclasses import replace

import pytest

from polebook.tui import keys
from polebook.tui.apportions import rows, standing
from polebook.tui.control import Outcome
from polebook.tui.draw.screen import screen
from tests.tui.apportion_told import here, random_apportion
from tests.tui.desk import SIX, Desk
from tests.tui.drawn import WORDS, faults, random_size, random_state
from tests.tui.test_apportion_page import aimed, found, head, page


@pytest.fixture(autouse=True)
def no_process(monkeypatch):
    here(monkeypatch)


def styles(desk, text, columns=80, lines=24):
    """The styles of the spans that hold a text."""
    return {span.style for line in screen(desk.state, columns, lines) for span in line if text in span.text}


def test_met_and_missed_are_words_and_styles_say_the_same():
    desk = page()
    assert styles(desk, "missed") == {"bad"} and styles(desk, "met") == {"good"}
    found_ = found()
    assert styles(found_, "all targets are met") == {"good"}
    assert "0" in {span.text.strip() for line in screen(found_.state, 80, 24) for span in line if span.style == "moved"}


def test_keys_that_stay_are_marked_by_another_sign():
    shown = page().press("/", "down").screen().splitlines()
    assert [line[1:3] for line in shown[7:16]] == ["· "] * 7 + ["● "] * 2
    assert shown[8][0] == "▸"


@pytest.mark.parametrize("size", [(80, 24), (140, 45), (60, 16), (79, 60)])
def test_it_is_all_ascii_where_only_that_can_be_shown(size):
    for desk in (page(), found(), found().press("enter"), found().press("+"), found().press("=")):
        desk.state = replace(desk.state, plain=True)
        assert desk.screen(*size).isascii()


def test_on_a_small_screen_it_still_says_what_moves_and_what_is_missed():
    desk = page()
    small = desk.screen(60, 16)
    assert "▸● Q1.couple" in small and "upper" in small and "missed" in small
    small = found().screen(60, 16)
    for text in ("all targets are met", "Q2.c_comp", "4p7", "0", "= tells the rest", "Enter accept"):
        assert text in small, text


def test_on_a_large_one_all_of_a_plan_is_in_sight():
    desk = found()
    large = desk.screen(140, 45)
    assert "tells the rest" not in large
    for row in rows(desk.state):
        assert row.path in large
    for text in ("rise time", "group delay", "noise density", "noise figure", "noise at the input", "dynamic range"):
        assert text in large


def test_the_columns_say_of_when_they_are():
    desk = found()
    assert "today proposed" in desk.screen()
    assert "was today" in desk.press("enter").screen()
    assert "then proposed" in desk.press("down", "+").screen() and "today proposed" in desk.screen()


def test_today_s_values_are_those_of_the_text_also_beside_an_old_plan():
    desk = found().press("tab").go("Q1.rc").press("3", "k", "3", "enter", "tab")
    line = next(line for line in desk.screen(140, 45).splitlines() if " Q1.rc " in line)
    assert line.split()[1:3] == ["Q1.rc", "3k3"] or line.split()[2:4] == ["Q1.rc", "3k3"]


def test_a_target_that_is_missed_stands_first_where_there_is_no_room_for_all():
    lines = page(aimed(lower="13k")).screen(60, 16).splitlines()[6:9]
    assert [line.split()[-3] for line in lines] == ["lower", "upper", "gain"]
    assert [line.split()[-1] for line in lines] == ["missed", "missed", "met"]


@pytest.mark.parametrize("seed", range(2))
def test_anything_is_drawn_at_any_size(seed):
    rng = random.Random(seed)
    for number in range(12):
        state = random_state(rng, 100 * seed + number)
        view = replace(state.view, page="apportion", writing=None, overlay=None,
                       apportion=random_apportion(rng, state.session, WORDS))
        state, size = replace(state, view=view), random_size(rng)
        wrong = faults(state, *size, screen(state, *size))
        assert not wrong, (seed, number, size, wrong)
        standing(state)


@pytest.mark.parametrize("begun", ["found", "accepted", "old"])
def test_every_key_with_a_plan_in_sight(begun, monkeypatch):
    monkeypatch.setattr("polebook.text.files.save", lambda path, text: None)
    desk = found().press(*{"found": (), "accepted": ("enter",), "old": ("+",)}[begun])
    share = {"found": 0, "accepted": 1, "old": 2}[begun]
    for key in ("enter", "s", "u", "=", *(*keys.ACTIONS, "space", "0", "é", "ctrl+j")[share::3]):
        other = desk.again()
        past = len(other.state.session.history.past)
        other.press(key)
        assert len(other.screen().splitlines()) == 24 and other.outcome in Outcome
        if other.text != desk.text and key not in ("u", "U"):
            assert len(other.state.session.history.past) == past + 1, key
            assert other.state.session.history.undo().text == desk.text


def test_a_move_of_the_row_repaints_little():
    desk = found()
    before = screen(desk.state, 80, 24)
    after = screen(desk.press("down", "down").state, 80, 24)
    changed = [number for number, (old, new) in enumerate(zip(before, after, strict=True)) if old != new]
    assert len(changed) <= 16 and head(desk) == " all targets are met   1 value moves"


def test_progress_is_told_as_it_comes():
    desk = Desk(SIX).press("tab", "9", "v", "v", "v", "s")
    assert "begins" in head(desk)
    going = desk.view.apportion.going
    assert going.text == desk.text and [one.name for one in going.targets] == ["gain", "lower", "upper", "peaking"]
    state = desk.state.job.takes.piece(
        replace(desk.state, job=replace(desk.state.job, done=64, total=256)),
        {"reached": [["gain", 5000.0, True], ["upper", 1e7, None], ["noise", 1e-9, False]]})
    desk.state = state
    assert head(desk) == " ██▌······· 64 of at most 256 trials, 1 missed so far"
    assert "10.0M not judged" in desk.screen() and "noise" not in desk.screen()
    desk.press("tab", "+")
    assert "of before the edit" in head(desk)
