"""Whole screens against their goldens. `python -m tests.golden` remakes them: read the difference first."""

import pytest

from polebook.tui.draw.screen import screen
from polebook.tui.lines import plain_text
from tests.golden.screens import CASES, FOLDER, file, sizes
from tests.tui.drawn import faults


def test_every_screen_has_its_golden_and_every_golden_its_screen():
    assert {path.name for path in FOLDER.glob("*.txt")} == {file(name, *size) for name in CASES for size in sizes(name)}


@pytest.mark.parametrize("name", CASES)
def test_a_screen_reads_as_its_golden_says_and_keeps_to_its_size_and_to_what_a_terminal_may_get(name):
    for columns, rows in sizes(name):
        state = CASES[name]()
        drawn = screen(state, columns, rows)
        assert plain_text(drawn) == (FOLDER / file(name, columns, rows)).read_text(encoding="utf-8"), (columns, rows)
        assert not faults(state, columns, rows, drawn)
