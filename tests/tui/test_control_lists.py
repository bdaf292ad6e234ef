"""What lies over the page: lists that narrow, texts that scroll, and how they close."""

import pytest

from polebook.tui import keys
from tests.tui.desk import LISTENER, SIX, Desk


@pytest.fixture
def desk():
    return Desk(LISTENER)


def test_find_narrows_by_every_word(desk):
    desk.press("f")
    count = len(desk.labels)
    desk.type("q2 re")
    assert 0 < len(desk.labels) < count
    assert all("q2" in label.lower() and "re" in label.lower() for label in desk.labels[:2])
    desk.press("ctrl+u").type("zzz")
    assert desk.labels == []
    assert "nothing here is called" in desk.overlay.refusal
    desk.press("enter")
    assert desk.overlay is not None
    desk.press("backspace", "backspace", "backspace")
    assert len(desk.labels) == count


def test_find_goes_to_any_key(desk):
    desk.go("target.upper")
    assert desk.view.sheet == "target"
    desk.go("device.VF.beta")
    assert desk.view.sheet == "device.VF"
    desk.go("load.capacitance")
    assert (desk.line, desk.view.sheet) == ("load", "")
    desk.go("title")
    assert desk.view.sheet == "file"


def test_find_finds_by_what_a_key_is_for(desk):
    desk.press("f").type("screened rubbish")
    assert desk.labels == []
    desk.press("ctrl+u").type("rail positive")
    assert any(label.startswith("supply.positive") for label in desk.labels)


def test_rows_are_chosen_with_the_arrows_and_keep_within(desk):
    desk.press("a", "up")
    assert desk.overlay.row == 0
    desk.press("pagedown", "pagedown", "pagedown", "down")
    assert desk.overlay.row == len(desk.labels) - 1
    assert desk.press("home").overlay.row == 0


def test_the_other_sheets(desk):
    desk.press("t")
    assert desk.labels == ["target", "supply", "tolerance", "preferred", "VF", "file", "take a card"]
    desk.press("down", "enter")
    assert desk.view.sheet == "supply"
    assert desk.press("t").overlay.row == 1


@pytest.mark.parametrize("close", ["escape", "ctrl+c"])
@pytest.mark.parametrize("opening", ["f", "a", "k", "t", "n", "r", "?", "=", "!"])
def test_everything_closes(desk, opening, close):
    desk.press(opening)
    assert desk.overlay is not None
    desk.press(close)
    assert desk.overlay is None
    assert desk.text == LISTENER.read_text(encoding="utf-8")


def test_help_has_every_key_and_the_words_of_the_pages(desk):
    desk.press("?")
    text = "\n".join(desk.overlay.text)
    for key in keys.KEYS:
        assert keys.shown(key) in text
        assert key.does in " ".join(text.split())
    assert text.index("Words of the ledger page") < text.index("Words of the nodes page")
    assert max(map(len, desk.overlay.text)) <= 78
    assert "Moving" in desk.screen()
    desk.press("end")
    assert "baseline" in desk.screen()
    assert desk.press("?").overlay is None


def test_help_in_ascii():
    desk = Desk(LISTENER, plain=True).press("?")
    for _ in range(12):
        assert desk.screen().isascii()
        desk.press("pagedown")


def test_help_begins_with_the_words_of_the_page_in_sight(desk):
    text = "\n".join(desk.press("pagedown", "?").overlay.text)
    assert text.index("Words of the nodes page") < text.index("Words of the ledger page")


def test_the_working_of_the_focused_figure(desk):
    desk.press("tab", ".", ".", "=")
    assert desk.overlay.title == "working of n1.pole_hz"
    shown = desk.screen()
    assert "n1.pole_hz = " in shown
    assert "1/(2·pi·tau)" in shown or "tau" in shown
    desk.press("q")
    assert desk.overlay is None


@pytest.mark.parametrize("upper", [True, False])
@pytest.mark.parametrize("page", ["ledger", "nodes"])
def test_every_figure_that_can_be_focused_has_a_working(page, upper):
    from polebook.tui.control.figures import names_of

    desk = Desk(SIX).press("tab", "1" if page == "ledger" else "2", *([] if upper else ["b"]))
    for line in ("home", "right", "right", "end"):
        desk.press(line)
        for at, name in enumerate(names_of(desk.state)):
            desk.press(*[","] * 9, *["."] * at, "=")
            assert desk.overlay is not None, name
            assert desk.overlay.about == name
            desk.press("escape")


def test_cautions_lead_to_what_they_are_about(desk):
    desk.press("!")
    assert desk.overlay.title == "1 caution"
    desk.press("enter")
    assert desk.overlay is None
    assert desk.key.startswith("Q1.")


def test_without_cautions_it_says_so():
    desk = Desk(LISTENER)
    for key in ("Q1", "Q2", "Q3"):
        desk.go(f"{key}.note")
    found = desk.press("!").overlay
    assert found is not None
    assert all(choice.about for choice in found.choices)


def test_characters_do_nothing_where_a_question_or_a_text_is_open(desk):
    desk.go("Q1.rc").press("+")
    edited = desk.text
    for opening in ("q", "?", "=", "!"):
        desk.press(opening).type("2u2x")
        assert desk.text == edited
        desk.press("escape")
