"""The table of keys: whole, fed to the README, and what terminals make of Esc and a character."""

import pytest

from polebook.tui import keys
from polebook.tui.control import pages, pressing
from polebook.tui.draw.overlay import overlay
from tests.cli.helpers import ROOT

README = (ROOT / "README.md").read_text(encoding="utf-8")


def test_every_key_of_the_design_does_what_it_says():
    fixed = {
        "pageup": "page before", "left": "line before", "right": "line after", "up": "row before", ",": "figure before",
        ".": "figure after", "tab": "focus", "a": "add", "c": "copy", "x": "remove", "<": "move back", ">": "move on",
        "k": "kind", "o": "leave out", "n": "note", "g": "decibels", "b": "band", "!": "cautions", "enter": "act",
        "escape": "back", "+": "step up", "-": "step down", "*": "decade up", "/": "decade down", "u": "undo",
        "U": "redo", "w": "write", "p": "pin", "=": "working", "f": "find", "t": "sheets", "?": "help", "q": "leave",
        "ctrl+q": "leave", "ctrl+c": "leave", "ctrl+z": "suspend", "1": "page", "2": "page", "3": "page", "4": "page",
        "5": "page", "6": "page", "7": "page", "e": "text", "z": "zoom in", "Z": "zoom out", "[": "pan left",
        "]": "pan right",
    }
    assert {key: keys.ACTIONS[key] for key in fixed} == fixed


def test_no_key_of_a_page_that_is_not_there():
    assert {digit for digit in "1234567890" if digit in keys.ACTIONS} == set(keys.PAGES)
    assert list(keys.PAGES.values()) == list(pages.PAGES)
    assert list(keys.PAGES) == sorted(keys.PAGES, key="1234567890".index)


def test_every_action_is_work():
    assert set(keys.ACTIONS.values()) == set(pressing._WORK)


def test_the_readme_lists_the_keys_of_the_table():
    table = "\n".join(keys.table())
    assert table in README
    assert README.count("| key | does |") == 1


@pytest.mark.parametrize(("pressed", "are"), [
    (("alt+u", "u"), (("escape", None), ("u", "u"))),
    (("alt+shift+u", "U"), (("escape", None), ("U", "U"))),
    (("alt+1", None), (("escape", None), ("1", "1"))),
    (("alt+left", None), (("escape", None), ("left", None))),
    (("u", "u"), (("u", "u"),)),
    (("escape", "\x1b"), (("escape", "\x1b"),)),
])
def test_alt_and_a_character_are_esc_and_that_character(pressed, are):
    assert keys.presses(*pressed) == are


def test_hints_fit_in_80_columns_and_name_real_keys():
    for purpose in ("", "help", "find", "note", "leave", "start", "new", "cautions", "rename"):
        line = "   ".join(" ".join(hint) for hint in keys.hints("sheet", purpose))
        assert len(line) <= 78, line
    known = {name for key in keys.KEYS for name in key.shown}
    for focus, page in [("sheet", "ledger"), *(("page", name) for name in keys.PAGES.values())]:
        told = keys.hints(focus, page=page)
        assert all(name in known for names, _ in told for name in names.split())
        assert ("?", "help") in told
    assert keys.hints("sheet", field=True)[0] == ("Enter", "accept")


def test_the_words_without_arrows():
    shown = [keys.words(text, True) for key in keys.KEYS for text in (*key.shown, key.does, key.word)]
    assert all(text.isascii() for text in shown)
    assert callable(overlay)
