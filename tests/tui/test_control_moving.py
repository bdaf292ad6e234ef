"""Moving about: lines, keys, figures, pages, sheet and page."""

import pytest

from polebook.tui.control.figures import focused as figure
from polebook.tui.keys import PAGES
from tests.tui.desk import LISTENER, SIX, Desk


@pytest.fixture
def desk():
    return Desk(LISTENER)


def test_it_opens_on_the_first_stage_at_a_value(desk):
    assert (desk.line, desk.key) == ("Q1", "Q1.couple")
    assert (desk.view.page, desk.view.focus) == ("ledger", "sheet")


def test_lines_from_source_to_load_and_no_further(desk):
    seen = [desk.press("right").line for _ in range(5)]
    assert seen == ["Q2", "Q3", "load", "load", "load"]
    assert [desk.press("left").line for _ in range(5)] == ["Q3", "Q2", "Q1", "source", "source"]
    assert desk.press("end").line == "load"
    assert desk.press("home").line == "source"


def test_the_key_stays_where_the_next_line_has_it(desk):
    desk.go("Q1.rc").press("right")
    assert desk.key == "Q2.rc"
    assert desk.press("right").key == "Q3.stopper"


def test_keys_of_the_sheet_from_the_first_to_the_last(desk):
    seen = [desk.key] + [desk.press("down").key for _ in range(60)]
    assert seen[-1] == seen[-2]
    assert {"Q1.rc", "Q1.tolerance.rc"} & set(seen)
    assert desk.press(*["up"] * 80).key == "Q1.couple"


def test_pages_by_digit_only_with_the_page_focused(desk):
    desk.press("tab", "2")
    assert (desk.view.page, desk.view.focus) == ("nodes", "page")
    desk.press("1")
    assert desk.view.page == "ledger"
    for digit, name in (("3", "response"), ("7", "leverage"), ("0", "history"), ("2", "nodes")):
        assert desk.press(digit).view.page == name


def test_pages_by_page_keys_from_either_focus(desk):
    every = list(PAGES.values())
    seen = [desk.press("pagedown").view.page for _ in every]
    assert seen == [*every[1:], every[-1]]
    seen = [desk.press("tab", "pageup").view.page for _ in every]
    assert seen == [*every[-2::-1], every[0]]


def test_rows_of_the_ledger_are_its_lines(desk):
    assert desk.press("tab", "down").line == "Q2"
    assert desk.press("up", "up").line == "source"


def test_figures_of_the_row(desk):
    desk.press("tab")
    seen = [figure(desk.state)] + [figure(desk.press(".").state) for _ in range(8)]
    assert seen[:3] == ["Q1.gain_db", "Q1.k", "n1.pole_hz"]
    assert seen[-1] == seen[-2] == "Q1.owns_upper"
    assert figure(desk.press(",").state) == "n1.allotted_upper_db"


def test_figures_are_chosen_on_the_page(desk):
    assert "Tab goes there" in desk.press(",").view.message


def test_enter_on_a_time_constant_goes_to_the_key_that_makes_it(desk):
    desk.press("tab", "2", "enter")
    assert (desk.key, desk.view.focus) == ("Q2.c_comp", "sheet")


def test_enter_on_the_device_s_own_capacitance_goes_to_its_device():
    desk = Desk(SIX).press("tab", "2")
    assert desk.press("enter").key == "Q5.device"


def test_enter_on_a_line_of_the_ledger_goes_to_its_sheet(desk):
    desk.press("tab", "down", "enter")
    assert (desk.line, desk.view.focus) == ("Q2", "sheet")


def test_esc_goes_back_step_by_step(desk):
    desk.press("t", "enter")
    assert desk.view.sheet == "target"
    desk.press("pagedown", "tab")
    assert desk.press("escape").view.sheet == ""
    assert desk.press("escape").view.page == "ledger"
    assert desk.press("tab", "escape").view.focus == "sheet"


def test_ends_of_the_band_and_gains(desk):
    desk.press("tab", "b")
    assert not desk.view.upper
    assert desk.view.message == "lower end of the band"
    desk.press("g")
    assert figure(desk.state) == "Q1.gain"
    assert figure(desk.press(".", ".", ".").state) == "Q1.owns_lower"


def test_a_key_that_does_nothing_says_where_help_is(desk):
    desk.press("Q")
    assert desk.view.message == "no key does that: Q: ? shows every key"


def test_a_message_goes_with_the_next_key(desk):
    assert desk.press("Q").view.message
    assert not desk.press("right").view.message
