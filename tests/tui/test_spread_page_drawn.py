"""What the spread page draws: bars that are the builds, limits and marks in their columns, words for shares."""

import random
from dataclasses import replace

import numpy as np
import pytest

from polebook.tui.draw.plot.axis import Axis
from polebook.tui.draw.plot.paint import cell_of
from polebook.tui.draw.screen import screen
from polebook.tui.draw.spread_chart import _bars
from polebook.tui.draw.spread_text import more, percent
from tests.tui.desk import CHAINS, LISTENER, SIX
from tests.tui.drawn import WORDS, faults, random_size, random_state
from tests.tui.spread_told import random_spread
from tests.tui.test_spread_page import page, ran, to_table


def plot(desk):
    """The rows of the histogram at 80x24, and its axis."""
    rows = desk.screen().splitlines()[9:]
    axis = next(at for at, row in enumerate(rows) if "└" in row)
    return rows[:axis], rows[axis]


@pytest.mark.parametrize("count", [1, 7, 41, 960])
def test_bars_are_all_builds_that_are_in_sight(count):
    for one in ran(page()).view.spread.run.told.figures:
        bars = _bars(one.heap, count)
        assert bars.sum() + one.heap.below + one.heap.above == pytest.approx(2000)
        assert (bars >= 0).all()


def test_a_bar_is_the_builds_between_its_ends():
    one = ran(page()).view.spread.run.told.figures[0]
    bars = _bars(one.heap, 40)
    fine = one.heap.counts.reshape(40, -1).sum(axis=1)
    assert bars == pytest.approx(fine)


def test_limit_and_nominal_stand_where_they_lie_on_the_axis():
    desk = ran(page())
    one = next(one for one in desk.view.spread.run.told.figures if one.name == "lower_edge_hz")
    rows, axis = plot(desk)
    begin = axis.index("└") + 1
    wide = axis.rindex("─") + 1 - begin
    x = Axis(one.heap.low, one.heap.high)
    limit, nominal = (cell_of(x, value, wide, 2) for value in (5.0, one.nominal))
    assert axis[begin + nominal] == "●"
    assert rows[0][begin + limit] == "┊"
    assert sum(row[begin + nominal] != " " for row in rows) > sum(row[begin] != " " for row in rows)


def test_a_limit_far_off_is_told_and_not_drawn():
    desk = ran(page(LISTENER))
    rows, _ = plot(desk)
    assert "≥ 1.00 MHz: higher than all of…" in rows[0]
    assert "as filed it misses upper" in desk.screen()


def test_all_figures_at_once_where_there_is_room():
    shown = ran(page(SIX)).screen(140, 45)
    for title in (" gain   ● 75.31 dB", "lower edge   ● 3.31 kHz", "upper edge   ● 2.54 MHz"):
        assert title in shown
    assert shown.count("└") >= 3
    one = ran(page(SIX)).screen(80, 24)
    assert one.count("└") == 1


@pytest.mark.parametrize(("share", "text"), [
    (1.0, "100 %"), (0.0, "0 %"), (0.9999, "99.99 %"), (0.5, "50.0 %"), (0.99994, "99.99 %"), (0.999994, "99.999 %"),
    (1e-7, "0.00001 %"),
    (4e-6, "0.0004 %"), (0.03, "3.0 %")])
def test_a_share_reads_like_all_or_none_only_where_it_is(share, text):
    assert percent(share) == text


@pytest.mark.parametrize(("share", "solved", "text"), [
    (0.042, True, "+4.2"), (0.042, False, "~+4.2"), (-0.01, True, "-1.0"), (0.0, False, "0"), (None, True, "")])
def test_an_estimate_says_so(share, solved, text):
    assert more(share, solved) == text


def test_a_run_that_goes_on_says_how_far_it_is():
    desk = ran(page()).press("s")
    for done, text in ((0, "begins"), (1500, "1,500 of 2,000"), (2600, "what the tolerances cost")):
        desk.state = replace(desk.state, job=replace(desk.state.job, done=done, total=8000))
        assert text in desk.screen()
    assert "Esc stop" in desk.screen()


def test_a_run_that_was_stopped_says_how_far_it_came():
    desk = ran(page())
    run = desk.view.spread.run
    part = replace(run, told=replace(run.told, builds=8000, complete=False))
    desk.state = replace(desk.state, view=replace(desk.view, spread=replace(desk.view.spread, run=part)))
    assert " 8,000 builds, seed 1   stopped at 2,000" in desk.screen()


def test_builds_without_figures_and_devices_out_of_their_region_are_told():
    desk = ran(page())
    run = desk.view.spread.run
    odd = replace(run, told=replace(run.told, failures={"unstable": 12}, outside={"Q1": 7}))
    desk.state = replace(desk.state, view=replace(desk.view, spread=replace(desk.view.spread, run=odd)))
    assert "12 unstable   Q1 leaves its region in 7" in desk.screen()
    shown = to_table(desk).screen()
    assert "12 of the builds: unstable" in shown and "leaves the region of its law: Q1 in 7" in shown


@pytest.mark.parametrize("size", [(80, 24), (140, 45), (60, 16), (100, 30), (200, 60)])
def test_it_is_all_ascii_where_only_that_can_be_shown(size):
    desk = ran(page(CHAINS / "photodiode-front.toml"))
    desk.state = replace(desk.state, plain=True)
    for key in ("v", "v", "v", "v", "g"):
        assert desk.press(key).screen(*size).isascii()


@pytest.mark.parametrize("seed", range(5))
def test_any_run_is_drawn_at_any_size(seed):
    rng = random.Random(seed)
    for number in range(12):
        state = random_state(rng, 100 * seed + number)
        good = state.session.good
        chain = good.chain if good is not None else state.session.chain
        view = replace(state.view, page="spread", writing=None, overlay=None, spread=random_spread(rng, chain, WORDS))
        state, size = replace(state, view=view), random_size(rng)
        wrong = faults(state, *size, screen(state, *size))
        assert not wrong, (seed, number, size, wrong)


def test_a_heap_of_one_value_is_one_bar():
    desk = ran(page())
    one = next(one for one in desk.view.spread.run.told.figures if one.name == "peaking_db")
    assert np.count_nonzero(_bars(one.heap, 41)) == 1
