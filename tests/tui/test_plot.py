"""Curves as dots, axes in engineering units, and charts as lines."""

import math
import random
import re
from itertools import pairwise

import numpy as np
import pytest

from polebook.tui.draw.pen import pen
from polebook.tui.draw.plot import raster, scale
from polebook.tui.draw.plot.axis import Axis, decades, evenly, rounded, short, step_of
from polebook.tui.draw.plot.chart import Bars, Chart, Curve, Level, Mark, Spot, Upright
from polebook.tui.draw.plot.paint import AXIS_ROWS, columns, painted
from polebook.tui.lines import STYLES, width


def drawn(x, y, columns, rows, pattern="solid"):
    dots = raster.curve(np.array(x, dtype=float), np.array(y, dtype=float), columns, rows, pattern)
    return ["".join("#" if dot else "." for dot in row) for row in dots]


def text(lines):
    return ["".join(span.text for span in line) for line in lines]


def test_a_line_up_and_a_line_down():
    assert drawn([0, 1], [0, 1], 5, 5) == ["....#", "...#.", "..#..", ".#...", "#...."]
    assert drawn([0, 1], [1, 0], 5, 5) == ["#....", ".#...", "..#..", "...#.", "....#"]
    assert drawn([0, 1], [0.5, 0.5], 4, 3) == ["....", "####", "...."]


def test_every_column_of_a_steep_curve_is_joined_to_the_next():
    x = np.linspace(0, 1, 400)
    dots = raster.curve(x, 0.5 + 0.5 * np.sin(40 * x), 60, 32)
    for before, after in zip(dots.T, dots.T[1:], strict=False):
        a, b = np.nonzero(before)[0], np.nonzero(after)[0]
        assert a.size and b.size and a.min() <= b.max() + 1 and b.min() <= a.max() + 1


def test_a_peak_between_two_columns_keeps_its_height():
    x = np.array([0.0, 0.5299, 0.53, 0.5301, 1.0])
    dots = raster.curve(x, np.array([0.1, 0.1, 1.0, 0.1, 0.1]), 10, 20)
    assert dots[0].any() and dots[0].sum() == 1


def test_gaps_and_what_lies_outside_are_not_drawn():
    nan = float("nan")
    assert drawn([0, 0.3, 0.5, 0.7, 1], [0.5, 0.5, nan, 0.5, 0.5], 11, 3) == ["." * 11, "####...####", "." * 11]
    assert drawn([0, 1], [7, 9], 4, 4) == ["...."] * 4
    assert drawn([-5, -4], [0.5, 0.5], 4, 4) == ["...."] * 4
    assert drawn([0, 0.5, 1], [0, math.inf, 0], 4, 4) == ["....", "....", "....", "#..#"]
    assert drawn([-1, 2], [-1, 2], 5, 5) == drawn([0, 1], [0, 1], 5, 5)
    assert drawn([], [], 3, 1) == ["..."]


@pytest.mark.parametrize("seed", range(6))
def test_no_curve_makes_it_fail_and_dots_are_near_the_curve(seed):
    rng = np.random.default_rng(seed)
    for _ in range(40):
        x = np.sort(rng.uniform(-0.5, 1.5, 30))
        y = rng.choice([0.2, 0.8, np.nan, np.inf, -np.inf, 1e300, -1e300, 0.5], 30)
        columns, rows = rng.integers(0, 40, 2)
        with np.errstate(all="raise"):
            dots = raster.curve(x, y, int(columns), int(rows))
        assert dots.shape == (rows, columns)
    x, y = np.linspace(0, 1, 9), rng.uniform(0, 1, 9)
    dots = raster.curve(x, y, 200, 200)
    down, across = np.nonzero(dots)
    assert np.abs(np.interp((across + 0.0) / 199, x, y) - (1 - down / 199)).max() < 0.05
    assert dots.any(axis=0).all()


def test_patterns_differ_and_leave_some_dots():
    x, y = np.linspace(0, 1, 50), np.linspace(0.2, 0.7, 50)
    seen = {name: raster.curve(x, y, 80, 40, name).sum() for name in raster.PATTERNS}
    assert len(set(seen.values())) == len(seen)
    assert seen["solid"] > seen["dashed"] > seen["dotted"] > seen["sparse"] > 10
    steep = raster.curve(np.array([0.5, 0.5001]), np.array([0.0, 1.0]), 80, 40, "dotted")
    assert 15 <= steep.sum() <= 25, "a wall in dots has every second one"


def test_braille_has_the_dots_where_they_are():
    dots = np.zeros((4, 2), dtype=bool)
    codes = []
    for row in range(4):
        for column in range(2):
            one = dots.copy()
            one[row, column] = True
            codes.append(raster.character(int(raster.braille(one)[0, 0])))
    assert codes == list("⠁⠈⠂⠐⠄⠠⡀⢀")
    assert raster.character(int(raster.braille(~dots)[0, 0])) == "⣿"
    assert raster.character(0) == " ", "an empty cell is one byte"


def test_bars_stand_side_by_side_on_the_floor():
    dots = raster.bars(np.array([0.0, 0.5, 1.0, float("nan")]), 8, 4)
    assert dots.sum(axis=0).tolist() == [0, 0, 2, 2, 4, 4, 0, 0]
    assert dots[3, 2] and not dots[0, 2]
    assert raster.bars(np.array([]), 4, 4).shape == (4, 4)


@pytest.mark.parametrize(("value", "unit", "told"), [
    (1000.0, "", "1k"), (1e6, "", "1M"), (0.05, "", "50m"), (20.0, "", "20"), (200.0, "", "200"),
    (1.5e3, "Hz", "1.5 kHz"), (1e-6, "s", "1 us"), (2.5e9, "", "2.5G"), (-40.0, "", "-40"), (100.0, "Ω", "100 Ω")])
def test_labels_have_no_digit_too_many(value, unit, told):
    assert short(value, unit).replace("µ", "u") == told


def test_ticks_of_decades_of_a_wide_and_of_a_narrow_axis():
    assert [label for _, label in decades(1e2, 1e7, 70)] == ["100", "300", "1k", "3k", "10k", "30k", "100k", "300k",
                                                            "1M", "3M", "10M"]
    assert [label for _, label in decades(1e2, 1e7, 40)] == ["100", "1k", "10k", "100k", "1M", "10M"]
    assert [label for _, label in decades(1e-6, 1e12, 60)][:3] == ["1u", "100u", "10m"]
    assert len(decades(2e4, 5e4, 40)) >= 3
    assert len(decades(1.01e3, 1.05e3, 40)) >= 2


@pytest.mark.parametrize("seed", range(4))
def test_ticks_lie_on_their_axis_and_their_labels_keep_apart(seed):
    rng = random.Random(seed)
    for _ in range(200):
        low = 10 ** rng.uniform(-9, 11)
        high, room = low * 10 ** rng.uniform(0.01, 18), rng.randrange(8, 120)
        for upright in (False, True):
            ticks = decades(low, high, room, 1, upright)
            at = [Axis(low, high, log=True).place(value) * (room - 1) for value, _ in ticks]
            assert all(-1e-6 <= place <= room - 1 + 1e-6 for place in at), (low, high, room)
            sizes = [1 if upright else len(label) for _, label in ticks]
            for k in range(len(at) - 1):
                assert at[k + 1] - at[k] >= (sizes[k] + sizes[k + 1]) / 2
        first, step = rng.uniform(-1e3, 1e3), 10 ** rng.uniform(-3, 6)
        for value, label in evenly(first, first + step, 5):
            assert first - 1e-6 * step <= value <= first + step * (1 + 1e-6)
            assert label == "0" or re.fullmatch(r"-?[0-9.]+[a-zA-Zµ]?", label)
        assert len(evenly(first, first + step, 5)) <= 6


def test_steps_and_ends_are_round():
    assert [step_of(span, 4) for span in (1, 3, 7, 40, 55, 1e-6)] == [0.5, 1.0, 2.0, 10.0, 20.0, 5e-7]
    assert step_of(0.0, 4) == 1.0 and step_of(math.inf, 4) == 1.0
    assert rounded(-3.2, 41.0, 10.0) == (-10.0, 50.0)
    assert rounded(20.0, 20.0, 10.0) == (20.0, 30.0)


def test_axes_of_what_is_drawn_hold_all_of_it_and_do_not_move_for_little():
    y = np.array([10.0, 55.7, 40.0, float("nan")])
    axis = scale.decibels([y], 8, 60.0)
    assert axis.low <= 10.0 and axis.high >= 55.7
    assert scale.decibels([y + 0.5], 8, 60.0) == axis, "a small step of a value leaves the axis where it is"
    assert scale.decibels([np.array([0.0, -300.0])], 8, 40.0).low >= -60.0
    flat = scale.decibels([np.array([20.0, 20.0])], 8, 40.0)
    assert flat.low < 20.0 < flat.high
    assert scale.decibels([np.array([float("nan")])], 8, 40.0).low < scale.decibels([], 8, 40.0).high
    phases = scale.degrees([np.array([-100.0, 170.0])], 8)
    assert phases.low <= -100 and phases.high >= 170 and all(label.endswith("°") for _, label in phases.ticks)
    ohms = scale.sizes([np.array([3.0, 2e3, 0.0, -1.0])], 8, "Ω")
    assert ohms.low <= 3.0 and ohms.high >= 2e3 and ohms.log
    far = scale.sizes([np.array([1e-3, *[50.0] * 20, 1e9])], 8)
    assert far.low <= 50.0 <= far.high and far.high / far.low <= 1e7
    plain = scale.linear([np.array([-2e-9, 4.1e-7])], 8, "s")
    assert plain.low <= -2e-9 and plain.high >= 4.1e-7 and plain.ticks[-1][1].endswith("s")
    assert scale.linear([np.array([5.0, 5.0])], 8).low < 5.0 < scale.linear([np.array([5.0, 5.0])], 8).high


def test_gains_as_plain_ratios_stand_where_their_dB_do():
    axis = scale.as_ratios(Axis(0.0, 60.0), 12)
    assert axis.low == 0.0 and axis.high == 60.0
    told = {label: value for value, label in axis.ticks}
    assert told["10"] == pytest.approx(20.0) and told["1k"] == pytest.approx(60.0)
    assert scale.as_ratios(Axis(7000.0, 7060.0), 12) == Axis(7000.0, 7060.0), "beyond a double: told in dB"


CHART = Chart(Axis(1e3, 1e6, log=True, ticks=decades(1e3, 1e6, 20), unit="Hz"),
              Axis(0.0, 40.0, ticks=evenly(0, 40, 2)), Axis(-90.0, 90.0, ticks=((0.0, "0°"),)),
              curves=(Curve(np.geomspace(1e3, 1e6, 50), np.linspace(80, -80, 50), "bar", "dotted", ".", "p",
                            right=True),
                      Curve(np.geomspace(1e3, 1e6, 50), np.full(50, 35.0), letter="g")),
              uprights=(Upright(1e4, 28.0), Upright(1e5, 28.0, "bad")), levels=(Level(28.0, 1e4, 1e5, label="-3 dB"),),
              spots=(Spot(1e5, 35.0),), marks=(Mark(2e4), Mark(1e12)), cursor=3e4)


def test_a_chart_as_lines():
    lines = text(painted(CHART, 40, 10, pen(False)))
    size = columns(CHART, 40, pen(False))
    assert len(lines) == 10 and all(width(line) <= 40 for line in painted(CHART, 40, 10, pen(False)))
    plot = [line[6:6 + size] for line in lines[:8]]
    cursor = lines[8].index("▴") - 6
    assert all(row[cursor] == "│" or "⠀" < row[cursor] < "⣿" for row in plot)
    assert lines[8][6 + round((size - 1) / 3 * 1.3)] == "×", "the pole at 20 kHz; that at 1 THz is out of sight"
    assert lines[8].count("×") == 1
    assert any(line.startswith("-3 dB┤") for line in lines)
    assert sum("●" in line for line in lines) == 1 and any(line.rstrip().endswith("0°") for line in lines)
    assert plot[1].rstrip()[-1] == "g" and any("p" in row for row in plot)
    limits = [row.count("┊") for row in plot]
    assert limits[:2] == [0, 0] and max(limits[3:]) == 2, "limits stand below what they limit"
    assert lines[9].split() == ["1k", "10k", "100k", "1M", "Hz"]


def test_a_chart_in_ascii_has_a_sign_a_cell_and_nothing_else():
    lines = text(painted(CHART, 40, 10, pen(True)))
    assert all(line.isascii() for line in lines)
    assert "*" in lines[1] and any("." in line[6:] for line in lines[:8]) and "^" in lines[8] and "x" in lines[8]
    assert any(line.startswith("-3 dB|") for line in lines)


@pytest.mark.parametrize("seed", range(3))
def test_no_chart_and_no_room_makes_it_fail(seed):
    rng = random.Random(seed)
    wild = [0.0, -1.0, 1e-300, 1e300, math.nan, math.inf, 1e4, 30.0]
    for _ in range(60):
        def some(count):
            return np.array([rng.choice(wild) for _ in range(count)])

        log = rng.random() < 0.5
        chart = Chart(
            Axis(1e3, 1e6, log=log, ticks=decades(1e3, 1e6, 30), unit="Hz"), Axis(-5.0, 40.0, ticks=evenly(-5, 40, 4)),
            rng.choice((None, Axis(-90.0, 90.0, ticks=((0.0, "0°"),)))),
            tuple(Curve(np.sort(np.array([rng.uniform(1, 2e6) for _ in range(12)])), some(12), "bar",
                        rng.choice(list(raster.PATTERNS)), "*", rng.choice(("", "g", "long name", "Ω")),
                        rng.random() < 0.5) for _ in range(rng.randrange(4))),
            rng.choice((None, Bars(some(5)))), (Upright(rng.choice(wild), rng.choice((None, *wild))),),
            (Level(rng.choice(wild), rng.choice((None, 1e4)), rng.choice((None, 1e5, 1.0)), label="-3 dB"),),
            (Spot(rng.choice(wild), rng.choice(wild)),), (Mark(rng.choice(wild)),), rng.choice((None, *wild)),
            rng.choice(("", "a note that is rather long", "Ω")))
        room, rows, plain = rng.randrange(0, 70), rng.randrange(0, 20), rng.random() < 0.5
        lines = painted(chart, room, rows, pen(plain))
        assert len(lines) in (0, rows)
        for line in lines:
            assert width(line) <= room and all(span.style in STYLES for span in line)
            assert not plain or all(span.text.isascii() for span in line)
        assert not (room > 30 and rows > AXIS_ROWS) or lines


def test_neighbours_of_one_style_are_one_piece():
    for line in painted(CHART, 60, 12, pen(False)):
        styles = [span.style for span in line if span.text]
        assert all(a != b or k == 0 for k, (a, b) in enumerate(pairwise(styles))), styles
