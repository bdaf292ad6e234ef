"""The pieces of apportioning: keys, rows and their slopes, the linear program, merit."""

from __future__ import annotations

import numpy as np
import pytest

from polebook.chain.edits import content
from polebook.chain.read import known_reading
from polebook.plan.apportion.goals import Goal
from polebook.plan.apportion.handles import free
from polebook.plan.apportion.merit import Merit, merit, shortfall
from polebook.plan.apportion.prepare import bare, prepared
from polebook.plan.apportion.slopes import slopes
from polebook.plan.apportion.step import Bend, step
from polebook.plan.apportion.task import CLIP, trial
from polebook.problem import ProblemsFound
from tests.cli.helpers import CHAINS, LISTENER

TEXT = LISTENER.read_text(encoding="utf-8")
MORE = {"wire-break-listener": 'noise = "4n"\nswing = "2"\ncurrent = "10m"\n',
        "shellac-desk": 'noise = "15n"\nswing = "20"\ncurrent = "9m"\n',
        "photodiode-front": 'noise = "p3"\nrise = "1u"\n'}


def freed(text, words=()):
    reading = known_reading(text, "x.toml")
    assert reading.chain is not None, reading.problems
    return reading.chain, free(reading.chain, content(reading, text), words)


def tasked(name, words=(), favour=""):
    text = (CHAINS / f"{name}.toml").read_text(encoding="utf-8")
    chain, may = freed(text.replace("[target]\n", f"[target]\n{MORE.get(name, '')}"), words)
    plain = bare(chain, may.handles)
    return prepared(plain, favour, trial(plain, plain.start))


def drained(work):
    while True:
        try:
            next(work)
        except StopIteration as done:
            return done.value


def test_without_a_word_every_part_that_is_soldered_in_is_free():
    may = freed(TEXT)[1]
    assert may.origin == "fitted"
    paths = {handle.path for handle in may.handles}
    assert {"Q1.rc", "Q2.c_comp", "Q3.stopper", "load.couple"} < paths
    assert not paths & {"Q1.stray", "source.resistance", "load.capacitance", "load.resistance"}
    comp = next(handle for handle in may.handles if handle.path == "Q2.c_comp")
    assert comp.optional and comp.low == pytest.approx(4.7e-14) and comp.row == "E12" and comp.role == "high"
    resistor = next(handle for handle in may.handles if handle.path == "Q1.rc")
    assert (resistor.low, resistor.high) == pytest.approx((220, 22_000)) and not resistor.optional
    ladder = freed((CHAINS / "rain-radar.toml").read_text(encoding="utf-8"))[1].handles
    assert "P1.arms.2.shunt_r" in {handle.path for handle in ladder} and not any(h.path == "B1.rin" for h in ladder)


def test_the_file_says_what_is_free_and_the_user_more():
    marked = TEXT.replace('re          = "33"', 'free = ["re", "c_peak", "rc"]\nre          = "33"')
    may = freed(marked)[1]
    assert (may.origin, [handle.path for handle in may.handles]) == ("file", ["Q1.re", "Q1.rc"])
    assert "c_peak of Q1 is absent" in may.notes[0]
    chosen = freed(marked, ("Q2.couple", "Q3", "Q2.couple"))[1]
    assert chosen.origin == "chosen"
    assert [handle.path for handle in chosen.handles] == ["Q2.couple", "Q3.stopper", "Q3.re"]


@pytest.mark.parametrize(("word", "what", "fix"), [
    ("Q9.rc", "Q9", "did you mean"), ("Q1.rd", "no key", "did you mean"), ("target.upper", "can't be free", "Q1.rc"),
    ("Q1.name", "can't be free", "Q1.rc"), ("Q1.c_peak", "absent", "polebook set FILE Q1.c_peak"),
    ("supply.temperature", "can't be free", "Q1.rc"), ("supply.negative", "is zero", "polebook set"),
])
def test_what_can_not_be_free_is_refused_with_a_way_out(word, what, fix):
    with pytest.raises(ProblemsFound) as found:
        freed(TEXT, (word,))
    assert what in found.value.problems[0].what and fix in found.value.problems[0].fix


def test_sizes_are_those_of_the_series_and_other_keys_have_three_digits():
    may = freed(TEXT, ("Q1.rc", "Q1.couple", "device.VF.beta"))[1]
    resistor, capacitor, beta = may.handles
    assert (resistor.nearest(2290), resistor.up(2200), resistor.down(2200)) == (2200, 2400, 2000)
    assert (capacitor.nearest(5e-9), capacitor.up(4.7e-9)) == (4.7e-9, 5.6e-9)
    assert (beta.nearest(181.23), beta.up(180.0), beta.down(180.0)) == (181.0, 182.0, 178.0)


@pytest.mark.parametrize("name", ["wire-break-listener", "shellac-desk", "photodiode-front"])
def test_slopes_are_what_the_rows_do(name):
    """Against central differences of whole ledgers; rows too far off to be followed apart."""
    task = tasked(name)
    here = trial(task, task.start)
    assert here.lives
    found = drained(slopes(task, here)).by
    checked = set()
    for k in range(len(task.handles)):
        ends = []
        for way in (1e-4, -1e-4):
            x = here.x.copy()
            x[k] += way
            ends.append(trial(task, x).rows)
        there = (ends[0] - ends[1]) / 2e-4
        for number, row in enumerate(task.rows):
            followed = row.means == "exact" or here.rows[number] < row.ease + 0.02
            if followed and row.goal not in ("peaking", "noise"):
                assert found[number, k] == pytest.approx(there[number], abs=2e-3), (row, task.handles[k].path)
                checked.add(row.goal or row.what)
            elif row.goal == "noise":  # its frequency moves a little with the band
                assert found[number, k] == pytest.approx(there[number], abs=0.05), task.handles[k].path
    assert {"gain", "lower", "upper"} <= checked


def test_the_rows_tell_by_how_much_a_figure_is_off():
    slack = 1.0 / 8.685889638065037
    gain = Goal("gain", 1000.0, slack, True, 0.5 * slack)
    assert gain.shortfalls(1000.0) == pytest.approx((slack, slack))
    above, below = gain.shortfalls(1000.0 * 10 ** 0.1)  # 2 dB too much of 1 dB that is allowed
    assert (above, below) == pytest.approx((-slack, 3 * slack))
    assert Goal("upper", 1e6, 0.0, True, 0.1).shortfalls(5e5) == pytest.approx((-np.log(2.0),))
    assert Goal("lower", 10.0, 0.0, True, 0.1).shortfalls(5.0) == pytest.approx((np.log(2.0),))
    assert Goal("peaking", 0.5, 0.0, True, 0.0).shortfalls(1.0)[0] < 0
    assert Goal("lower", 10.0, 0.0, True, 0.1).shortfalls(None)[0] > 10  # down to d.c.


def toy(short=(100.0, 100.0), ease=(0.0, 0.0), favour=(), move=0.01):
    return Merit(np.zeros(2), np.ones(2), np.array(short), np.array(ease), np.zeros(2), favour, move)


BOUNDS = np.full(2, -2.0), np.full(2, 2.0)


def test_a_step_mends_what_is_short_with_the_part_that_does_most():
    rows, by = np.array([-0.3, 0.1]), np.array([[1.0, 0.5], [0.0, 0.0]])
    found = step(toy(), rows, by, np.zeros(2), BOUNDS, 1.0)
    assert found.x == pytest.approx([0.3, 0.0], abs=1e-9)
    assert found.worth == pytest.approx(0.003)
    # the other row would come short: both parts are needed
    by = np.array([[1.0, 0.5], [-1.0, 0.0]])
    found = step(toy(), rows, by, np.zeros(2), BOUNDS, 1.0)
    assert found.x == pytest.approx([0.1, 0.4], abs=1e-9)


def test_a_step_keeps_to_its_box_and_bounds():
    rows, by = np.array([-3.0, 0.1]), np.array([[1.0, 0.5], [0.0, 0.0]])
    assert step(toy(), rows, by, np.zeros(2), BOUNDS, 0.5).x == pytest.approx([0.5, 0.5])
    assert step(toy(), rows, by, np.array([1.9, 0.0]), BOUNDS, 0.5).x == pytest.approx([2.0, 0.5])


def test_a_step_favours_a_margin_as_far_as_moves_pay():
    rows, by = np.array([0.2, 0.1]), np.array([[1.0, 0.005], [-0.4, 0.0]])
    found = step(toy(favour=(0,)), rows, by, np.zeros(2), BOUNDS, 1.0)
    assert found.x == pytest.approx([0.25, 0.0], abs=1e-9)  # to where the other row is used up; the weak part stays


def test_a_bend_that_was_seen_is_heeded():
    rows, by = np.array([-0.3, 0.2]), np.array([[1.0, 0.5], [0.0, 0.0]])
    bend = Bend(1, -0.6, np.array([-4.0, 0.0]), np.array([0.3, 0.0]))  # flat so far, steep beyond
    found = step(toy(), rows, by, np.zeros(2), BOUNDS, 1.0, [bend])
    assert found.x == pytest.approx([0.15, 0.3], abs=1e-9)


def test_the_largest_signal_is_kept_from_clipping_no_further_than_today():
    task = tasked("six-stage")
    assert task.largest is not None and task.largest < 500e-6  # it clips today
    clips = [k for k, row in enumerate(task.rows) if row.what == CLIP]
    today = trial(task, task.start)
    assert today.rows[clips].min() == pytest.approx(0.0, abs=1e-9)
    assert shortfall(task, today) == 0.0


def test_a_figure_without_a_target_is_favoured_from_where_it_is():
    task = tasked("six-stage", favour="current")
    (goal,) = [goal for goal in task.goals if goal.name == "current"]
    assert not goal.judged and goal.want == pytest.approx(trial(task, task.start).of.supply_current)
    weights = merit(task)
    (row,) = task.numbers("current")
    assert weights.favour == (row,) and weights.short[row] == 0.0


def test_values_without_figures_are_no_trial_that_lives():
    task = tasked("wire-break-listener")
    x = task.start.copy()
    x[[handle.path for handle in task.handles].index("Q1.rb2")] += np.log(1 / 12)  # cuts Q1 off
    dead = trial(task, x)
    assert not dead.lives and dead.why == "the chain is unstable"
    assert shortfall(task, dead) == float("inf")
