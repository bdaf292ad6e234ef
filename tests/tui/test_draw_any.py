"""No state and no size makes the drawing raise, and no screen is anything but its size in cells that a terminal has."""

import random

import pytest

from polebook.tui.draw.screen import screen
from polebook.tui.view import State, View
from tests.golden.screens import opened
from tests.helpers import of_whole
from tests.tui.drawn import faults, random_size, random_state


@pytest.mark.parametrize("seed", range(of_whole(12, 5)))
def test_a_random_user_of_a_random_chain_gets_a_whole_screen_at_any_size(seed):
    rng = random.Random(seed)
    for number in range(12):
        state = random_state(rng, 100 * seed + number)
        columns, rows = random_size(rng)
        wrong = faults(state, columns, rows, screen(state, columns, rows))
        assert not wrong, (seed, number, columns, rows, state.view, wrong)


def test_every_size_up_to_the_wide_layout_is_filled_to_the_cell():
    state = State(opened("six-stage"), View(line=3))
    for columns, rows in [(n, 24) for n in range(1, 150, 3)] + [(80, n) for n in range(1, 60)] + [(140, 17), (1, 1)]:
        assert not faults(state, columns, rows, screen(state, columns, rows)), (columns, rows)


def test_no_size_is_no_screen():
    state = State(opened("six-stage"), View())
    assert screen(state, 80, 0) == [] and screen(state, 0, 3) == [(), (), ()]
