"""Whole screens against their goldens. `python -m tests.golden` remakes them: read the difference first."""

import pytest

from polebook.tui.draw.screen import screen
from tests.golden.screens import CASES, FOLDER, SIZES, texts
from tests.tui.drawn import faults


def test_the_screens_read_as_their_goldens_say():
    made = dict(texts())
    assert {path.name for path in FOLDER.glob("*.txt")} == set(made)
    for name, text in made.items():
        assert text == (FOLDER / name).read_text(encoding="utf-8"), name


@pytest.mark.parametrize("name", CASES)
def test_a_golden_screen_keeps_to_its_size_and_to_what_a_terminal_may_get(name):
    for columns, rows in SIZES:
        state = CASES[name]()
        assert not faults(state, columns, rows, screen(state, columns, rows))
