"""Values: typed, refused in place, stepped, taken out, chosen from a list; undone and done again."""

import pytest

from tests.tui.desk import LISTENER, Desk


@pytest.fixture
def desk():
    return Desk(LISTENER)


def test_a_digit_opens_the_field_with_it(desk):
    desk.go("Q1.rc").type("3k9")
    assert (desk.view.field.path, desk.view.field.typed) == ("Q1.rc", "3k9")
    assert 'rc          = "2k2"' in desk.text
    desk.press("enter")
    assert desk.view.field is None
    assert 'rc          = "3k9"' in desk.text


def test_a_point_opens_it_too_and_r_of_a_resistance(desk):
    assert desk.go("Q1.re").press(".").view.field.typed == "."
    assert desk.press("escape", "R").view.field.typed == "R"
    desk.press("escape").go("Q1.couple").press("R")
    assert desk.view.field is None


def test_enter_opens_it_with_the_text_of_the_file(desk):
    desk.go("Q1.rc").press("enter")
    assert (desk.view.field.typed, desk.view.field.cursor) == ("2k2", 3)
    desk.press("home", "delete").type("3").press("enter")
    assert 'rc          = "3k2"' in desk.text


def test_tab_accepts_and_goes_to_the_next_key(desk):
    desk.go("Q1.rb1").type("47k").press("tab")
    assert 'rb1         = "47k"' in desk.text
    assert (desk.key, desk.view.field) == ("Q1.rb2", None)
    desk.type("10k").press("shift+tab")
    assert desk.key == "Q1.rb1"


def test_esc_and_ctrl_c_leave_the_value_as_it_was(desk):
    for key in ("escape", "ctrl+c"):
        desk.go("Q1.rc").type("9k1").press(key)
        assert desk.view.field is None
        assert desk.text == LISTENER.read_text(encoding="utf-8")


@pytest.mark.parametrize(("typed", "why"), [
    ("100 nF", "is not a resistance"), ("1,5k", "decimal"), ("4k7k", "4k7k"), ("0", "is zero"), ("1..2", "1..2")])
def test_a_bad_value_stays_open_with_reason_and_fix(desk, typed, why):
    desk.go("Q1.rc").type(typed).press("enter")
    field = desk.view.field
    assert field.typed == typed
    assert why in field.refusal and "; " in field.refusal
    assert desk.text == LISTENER.read_text(encoding="utf-8")
    assert typed in desk.screen()
    desk.press("left")
    assert desk.view.field.refusal
    desk.press("end", "backspace")
    assert desk.view.field.refusal == ""


def test_a_refused_value_does_not_move_on(desk):
    desk.go("Q1.rc").type("1F").press("tab")
    assert (desk.view.field.typed, desk.key) == ("1F", "Q1.rc")


def test_an_emptied_field_takes_an_optional_key_out(desk):
    desk.go("Q2.c_comp").press("enter", "ctrl+u", "enter")
    assert "c_comp" not in desk.text
    assert "taken out" in desk.view.message


def test_delete_takes_a_key_out_and_says_what_moved(desk):
    desk.go("Q2.c_comp").press("delete")
    assert "c_comp" not in desk.text
    assert "upper +" in desk.view.message
    assert "the file has no c_comp" in desk.press("delete").view.message


def test_a_required_key_can_not_be_taken_out(desk):
    desk.press("end").go("source.resistance").press("delete")
    assert desk.view.bad
    assert desk.text == LISTENER.read_text(encoding="utf-8")


def test_steps_along_the_series_and_decades(desk):
    desk.go("Q1.rc").press("+")
    assert 'rc          = "2k4"' in desk.text
    assert "rc of Q1: 2k2 to 2k4" in desk.view.message
    desk.press("-", "-")
    assert 'rc          = "2k0"' in desk.text or 'rc          = "2k"' in desk.text
    desk.press("*")
    assert 'rc          = "20k"' in desk.text
    desk.press("/", "/")
    assert 'rc          = "200R"' in desk.text


def test_a_run_of_steps_within_a_second_is_one_undo_step(desk):
    before = desk.text
    desk.go("Q1.rc")
    desk.seconds = 0.2
    desk.press("+", "+", "+")
    assert 'rc          = "3k"' in desk.text
    assert "rc of Q1: 2k7 to 3k" in desk.view.message
    desk.press("u")
    assert desk.text == before


def test_steps_further_apart_are_steps_of_their_own(desk):
    desk.go("Q1.rc").press("+", "+", "u")
    assert 'rc          = "2k4"' in desk.text


def test_undo_and_redo_to_the_ends(desk):
    before = desk.text
    desk.go("Q1.rc").press("+").go("Q2.re").press("-").press("o")
    after = desk.text
    desk.press("u", "u", "u")
    assert desk.text == before
    assert "nothing to undo" in desk.press("u").view.message
    desk.press("U", "U", "U")
    assert desk.text == after
    assert "nothing to redo" in desk.press("U").view.message


def test_a_choice_is_a_list(desk):
    desk.press("t").type("preferred").press("enter", "enter")
    assert desk.overlay.purpose == "choice"
    assert desk.labels[3] == "E24"
    assert desk.overlay.row == 3
    desk.type("96").press("enter")
    assert 'resistor = "E96"' in desk.text


def test_digits_on_a_choice_narrow_its_list(desk):
    desk.press("t").type("preferred").press("enter", "1", "2")
    assert desk.labels == ["E12"]
    assert desk.view.field is None


def test_a_card_is_chosen_from_a_list(desk):
    desk.go("Q1.device").press("enter")
    assert (desk.overlay.purpose, desk.labels) == ("card", ["VF"])


def test_a_step_goes_to_the_next_choice(desk):
    desk.press("t").type("preferred").press("enter", "+")
    assert 'resistor = "E48"' in desk.text


def test_a_pasted_value_opens_the_field_and_one_in_the_field_joins_it(desk):
    desk.go("Q1.rc").paste("3k3\n")
    assert desk.view.field.typed == "3k3"
    desk.press("home").paste("1")
    assert desk.view.field.typed == "13k3"
    desk.press("escape").paste("unit")
    assert "there is no field" in desk.view.message


def test_what_moved_is_told_against_the_pin(desk):
    desk.press("p").go("Q2.c_comp").press("delete")
    assert "pinned" in desk.screen()
    assert desk.state.session.baseline is not None
    assert desk.press("p").view.message == "unpinned"


def test_a_value_without_a_chain_keeps_the_last_figures(desk):
    """Taking out what biases a stage leaves no ledger: the figures stay, said to be old, and undo brings them back."""
    desk.go("Q3.re").press("delete")
    session = desk.state.session
    assert session.good is not None
    desk.press("u")
    assert desk.state.session.ledger is not None
