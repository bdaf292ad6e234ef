"""Every key at every place: it never fails, the screen can be drawn, and what it changes one undo takes back."""

import pytest

from polebook.tui import keys
from polebook.tui.control import Outcome
from tests.helpers import of_whole
from tests.tui.desk import LISTENER, SIX
from tests.tui.places import OVER_TEXT, PLACES, at, sample

OTHERS = ("ctrl+a", "ctrl+e", "ctrl+k", "ctrl+u", "ctrl+w", "ctrl+j", "ctrl+left", "ctrl+right", "f1", "insert",
          "space", "é", "µ", "9", "0", "R", "Z", "[", "]", "e", "z", "s", "~")
EVERY = (*keys.ACTIONS, *OTHERS)
EDITS = frozenset({"step up", "step down", "decade up", "decade down", "take out", "copy", "remove", "move back",
                   "move on", "leave out"})
"""What changes the text at once, with nothing open."""
VALUES = ("2u2", "4k7", "100n", "1.5M", ".1", "1e3", "3p3", "12", "470R", "20.k")


@pytest.mark.parametrize("of", [LISTENER, SIX], ids=["listener", "six"])
@pytest.mark.parametrize("place", PLACES)
def test_every_key_at_every_place(place, of, monkeypatch):
    monkeypatch.setattr("polebook.text.files.save", lambda path, text: None)
    begun = at(place, of)
    for key in sample(EVERY, place, 4 if of == LISTENER else 8):
        desk = begun.again()
        text, past = desk.text, len(desk.state.session.history.past)
        desk.press(key)
        session = desk.state.session
        rows = desk.screen().splitlines()
        assert len(rows) == 24
        if desk.text != text and key not in ("u", "U"):
            assert len(session.history.past) == past + 1, (place, key)
            assert key in ("enter", "tab", "shift+tab") or keys.ACTIONS.get(key) in EDITS, (place, key)
            assert session.history.undo().text == text
        if place in OVER_TEXT and len(key) == 1:
            assert desk.text == begun.text, (place, key)
            assert desk.outcome is Outcome.NONE


@pytest.mark.parametrize("place", PLACES)
def test_a_value_typed_at_any_place_changes_nothing_but_a_field(place):
    begun = at(place)
    begun.seconds = 0.05
    for value in VALUES:
        _typed(begun.again(), place, value)


def _typed(desk, place, value):
    before, history = desk.text, desk.state.session.history
    desk.type(value)
    assert desk.text == before
    assert desk.state.session.history == history
    assert desk.state.session.baseline is not None if place == "pinned" else desk.state.session.baseline is None
    assert desk.outcome is Outcome.NONE
    overlay, field = desk.view.overlay, desk.view.field
    if place == "leave":
        assert overlay.purpose == "leave"
    elif "sheet" in place or place in ("targets", "supply", "card"):
        assert (field is not None and field.typed == value) or (overlay is not None and overlay.typed == value)
    elif place not in OVER_TEXT and place not in ("file", "pinned", "preferred", "help", "working", "cautions"):
        assert (field, overlay) == (None, None), place


@pytest.mark.parametrize("place", [place for place in PLACES if place not in ("field", "note", "rename", "take")])
def test_a_letter_long_after_a_digit_is_a_command_again(place):
    desk = at(place)
    if desk.view.focus == "sheet" or desk.overlay is not None or desk.view.field is not None:
        return
    assert desk.press("2", "f").overlay.purpose == "find"


@pytest.mark.parametrize("size", [(80, 24), (140, 45), (60, 16), (20, 5), (1, 1), (200, 70)])
@pytest.mark.parametrize("plain", [False, True], ids=["unicode", "ascii"])
def test_every_place_is_drawn_at_every_size(size, plain):
    for place in PLACES:
        text = at(place, plain=plain).screen(*size)
        assert len(text.splitlines()) == size[1]
        assert max(map(len, text.splitlines())) <= size[0]
        assert not plain or text.isascii()


def test_a_thousand_keys_at_random_and_undone_are_the_file_again(tmp_path):
    import random

    from tests.tui.desk import Desk, copied

    for seed in range(of_whole(6, 3)):
        source = random.Random(seed)
        path = copied(tmp_path, source.choice([LISTENER, SIX]))
        before = path.read_text(encoding="utf-8")
        desk = Desk(path)
        asked = [key for key in EVERY if keys.ACTIONS.get(key) not in ("write", "leave", "suspend")]
        for _ in range(170):
            desk.seconds = source.random()
            desk.press(source.choice(asked))
        desk.screen()
        desk.press("escape", "escape", "escape")
        for _ in range(400):
            desk.press("u")
        assert desk.text == before
        assert path.read_text(encoding="utf-8") == before
