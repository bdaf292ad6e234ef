"""What of a frequency axis is in sight, and where the cursor is, as keys change them."""

import random
from math import isclose, log10

import pytest

from polebook.tui.draw.plot import sight
from polebook.tui.draw.plot.sight import LEAST_DECADES, LEAST_HZ, MOST_HZ, cursor, window
from polebook.tui.view import Plot

WHOLE = (1e3, 1e7)
MOVES = (sight.moved, sight.zoomed, sight.panned, sight.to_end)


@pytest.mark.parametrize("seed", range(8))
def test_whatever_is_pressed_the_window_is_within_limits_and_has_the_cursor(seed):
    rng = random.Random(seed)
    whole = rng.choice((WHOLE, (1e-6, 1e12), (1e-6, 1e-5), (1e11, 1e12), (1.0, 10.0)))
    plot = Plot()
    for _ in range(200):
        move = rng.choice(MOVES)
        plot = move(plot, whole, cursor(plot, whole, rng.choice((None, 1e5))), rng.choice((-1, 1)))
        low, high = window(plot, whole)
        assert LEAST_HZ * (1 - 1e-9) <= low < high <= MOST_HZ * (1 + 1e-9), (move, plot)
        assert log10(high / low) >= LEAST_DECADES * (1 - 1e-6), (move, plot)
        assert plot.cursor_hz is not None
        assert low * (1 - 1e-9) <= plot.cursor_hz <= high * (1 + 1e-9), (move, plot)


def test_closer_and_out_again_is_the_window_of_the_figures():
    plot = Plot()
    for times in (1, 2, 3):
        for _ in range(times):
            plot = sight.zoomed(plot, WHOLE, 1e5, 1)
        assert plot.low_hz is not None
        for _ in range(times):
            plot = sight.zoomed(plot, WHOLE, 1e5, -1)
        assert plot.low_hz is None and plot.high_hz is None and plot.cursor_hz == 1e5


def test_the_cursor_keeps_its_place_while_it_is_zoomed_about():
    def place(plot):
        low, high = window(plot, WHOLE)
        return log10(3e4 / low) / log10(high / low)

    plot, before = Plot(), place(Plot())
    for _ in range(3):
        plot = sight.zoomed(plot, WHOLE, 3e4, 1)
        assert isclose(place(plot), before, rel_tol=1e-9)


def test_it_goes_no_nearer_than_half_a_decade_and_no_further_than_all_there_is():
    plot = Plot()
    for _ in range(20):
        plot = sight.zoomed(plot, WHOLE, 1e5, 1)
    low, high = window(plot, WHOLE)
    assert isclose(log10(high / low), 0.5, rel_tol=1e-9)
    plot = Plot()
    for _ in range(20):
        plot = sight.zoomed(plot, WHOLE, 1e5, -1)
    assert window(plot, WHOLE) == (LEAST_HZ, MOST_HZ)
    assert sight.zoomed(plot, WHOLE, 1e5, -1) is plot


def test_a_step_of_the_cursor_is_about_a_column_on_round_values():
    plot, seen = Plot(cursor_hz=1e5), []
    for _ in range(16):
        plot = sight.moved(plot, WHOLE, cursor(plot, WHOLE, None), 1)
        seen.append(plot.cursor_hz)
    assert seen[:4] == [1.12e5, 1.26e5, 1.41e5, 1.58e5]
    assert all(float(f"{hz:.2e}") == hz for hz in seen)
    columns = 64 * log10(seen[-1] / 1e5) / 4 / 16
    assert 0.6 < columns < 1.7
    for _ in range(16):
        plot = sight.moved(plot, WHOLE, cursor(plot, WHOLE, None), -1)
    assert plot.cursor_hz == 1e5
    assert sight.stepped(274312.0, 1, 10) == 3.16e5 and sight.stepped(274312.0, -1, 10) == 2.51e5


@pytest.mark.parametrize("count", sight._STEPS)
def test_no_step_stands_still_and_none_leaves_a_value_out(count):
    hz = 1.0
    seen = [hz]
    for _ in range(3 * count):
        hz = sight.stepped(hz, 1, count)
        assert hz > seen[-1]
        seen.append(hz)
    assert isclose(hz, 1e3, rel_tol=1e-9)
    for before in reversed(seen[:-1]):
        hz = sight.stepped(hz, -1, count)
        assert hz == before


def test_the_cursor_takes_a_window_of_its_own_along_and_stays_in_that_of_the_figures():
    plot = Plot(1e4, 1e5, 1e5)
    moved = sight.moved(plot, WHOLE, 1e5, 1)
    assert moved.cursor_hz > 1e5 and moved.low_hz > 1e4 and moved.high_hz >= moved.cursor_hz
    assert sight.moved(Plot(cursor_hz=1e7), WHOLE, 1e7, 1).cursor_hz == 1e7


def test_the_ends_and_what_is_out_of_sight():
    plot = Plot(1e4, 1e5, 5e4)
    begin = sight.to_end(plot, WHOLE, 5e4, -1)
    assert window(begin, WHOLE) == pytest.approx((1e3, 1e4))
    assert sight.to_end(begin, WHOLE, 1e4, -1).cursor_hz == begin.low_hz
    end = sight.to_end(plot, WHOLE, 5e4, 1)
    assert window(end, WHOLE) == pytest.approx((1e6, 1e7))
    assert sight.to_end(Plot(), WHOLE, 5e4, 1).cursor_hz == 1e7
    there = sight.shown_at(plot, WHOLE, 2e6)
    assert there.cursor_hz == 2e6 and there.low_hz < 2e6 < there.high_hz
    assert sight.shown_at(plot, WHOLE, 2e4) == Plot(1e4, 1e5, 2e4)


@pytest.mark.parametrize("plot", [Plot(5.0, 1.0, -3.0), Plot(0.0, 0.0, 0.0), Plot(-1.0, 1e99, 1e99),
                                  Plot(float("nan"), 1.0, float("nan")), Plot(1e3, None, None)])
def test_a_state_that_no_key_makes_still_has_a_window(plot):
    low, high = window(plot, WHOLE)
    assert LEAST_HZ <= low < high <= MOST_HZ
    assert low <= cursor(plot, WHOLE, None) <= high
