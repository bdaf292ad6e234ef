"""Roots and maxima of many functions at once."""

import numpy as np
import pytest

from polebook.plan.spread.response import Beside, crossings, peaking, runs, summit
from polebook.plan.spread.roots import maxima, roots

COUNT = 500


def numbers(seed):
    return np.random.default_rng(seed)


@pytest.mark.parametrize("kind", ["smooth", "steep", "flat"])
def test_every_root_is_found_in_its_bracket(kind):
    random = numbers(1)
    at = random.uniform(-0.9, 0.9, COUNT)
    width = random.uniform(0.5, 3.0, COUNT)
    shapes = {"smooth": lambda d: np.tanh(d) + 0.3 * d * d * d, "steep": lambda d: np.arctan(1e4 * d) + d,
              "flat": lambda d: d * np.abs(d)}
    seen = np.zeros(COUNT)

    def f(builds, x):
        np.add.at(seen, builds, 1)
        return -shapes[kind](x - at[builds])

    a, b = at - width, at + 2 * width
    every = np.arange(COUNT)
    found = roots(f, every, a, b, f(every, a), f(every, b), 0.5 * (a + b))
    assert np.abs(found - at).max() < {"smooth": 1e-13, "steep": 1e-12, "flat": 1e-6}[kind]
    assert seen.max() < 100
    if kind == "smooth":
        assert np.median(seen) < 12


def test_a_root_does_not_depend_on_the_others():
    at = numbers(2).uniform(-0.9, 0.9, COUNT)

    def f(builds, x):
        return np.exp(at[builds] - x) - 1

    every = np.arange(COUNT)
    a, b = at - 1.0, at + 1.5
    guess = at + 0.1
    together = roots(f, every, a, b, f(every, a), f(every, b), guess)
    for k in range(0, COUNT, 50):
        one = np.array([k])
        assert roots(f, one, a[one], b[one], f(one, a[one]), f(one, b[one]), guess[one])[0] == together[k]


def test_every_maximum_is_climbed():
    random = numbers(3)
    at, skew = random.uniform(-0.3, 0.3, COUNT), random.uniform(-0.4, 0.4, COUNT)
    height = random.uniform(0.0, 1.0, COUNT)

    def f(builds, x):
        d = x - at[builds]
        return height[builds] - np.log1p(3 * d * d) - skew[builds] * d**3

    every = np.arange(COUNT)
    x = np.array([np.full(COUNT, -0.5), random.uniform(-0.2, 0.2, COUNT), np.full(COUNT, 0.5)])
    y = np.array([f(every, row) for row in x])
    held = (y[1] >= y[0]) & (y[1] >= y[2])
    assert held.sum() > 300
    best = maxima(f, every[held], x[:, held], y[:, held])
    assert np.abs(best - height[held]).max() < 1e-8


def bands(x, *corners):
    """Excess over the half-power line of first-order corners: (lower, upper) in ln f."""
    lower, upper = corners
    loss = -0.5 * np.log1p(np.exp(2 * (lower - x))) - 0.5 * np.log1p(np.exp(2 * (x - upper)))
    return loss + 0.5 * np.log(2.0)


def test_the_edges_are_the_ends_of_the_run():
    x = np.linspace(-12.0, 12.0, 41)
    lower, upper = np.array([-6.0, -5.2, -20.0]), np.array([5.0, 7.7, 6.1])
    excess = bands(x[:, None], lower, upper)
    found = runs(excess, np.zeros((40, 3), dtype=bool), (18, 22))
    assert found.plain.all()
    every = np.arange(3)

    def f(builds, y):
        return bands(y, lower[builds], upper[builds])

    up = crossings(f, x, excess, found.last, 1, every)
    down = crossings(f, x, excess, found.first, -1, every)
    assert np.abs(f(every, up)).max() < 1e-13
    assert np.abs(f(every[:2], down[:2])).max() < 1e-13
    assert np.isnan(down[2])  # the grid ends above its edge: a chain down to d.c.


def test_what_is_not_plain_is_not_taken_for_it():
    """Builds: plain, two runs, a dip at the seed, a shallow dip that may reach the line, no number, nowhere."""
    k = np.arange(21)
    level = np.where(abs(k - 10) < 6, 0.34, -1.0)
    excess = np.array([level] * 6, dtype=float).T
    excess[1, 1] = 0.1
    excess[10, 2] = -0.2
    excess[[9, 10, 11], 3] = [0.3, 0.02, 0.3]
    excess[4, 4] = np.nan
    excess[:, 5] = -0.5
    found = runs(excess, np.zeros((20, 6), dtype=bool), (8, 12))
    assert found.plain.tolist() == [True, True, False, False, False, False]
    assert found.nowhere.tolist() == [False] * 5 + [True]
    assert (found.first[:2].tolist(), found.last[:2].tolist()) == ([5, 5], [15, 15])
    leaps = np.zeros((20, 6), dtype=bool)
    leaps[15, 0] = True  # between the band's last point and the next
    leaps[18, 1] = True  # far outside
    assert runs(excess, leaps, (8, 12)).plain.tolist()[:2] == [False, True]


def test_of_several_bumps_the_highest_counts():
    x = np.linspace(0.0, 10.0, 41)
    heights = np.array([[0.2, 0.5, 0.1], [0.4, 0.39, 0.1], [-0.2, -0.1, -0.3]])

    def f(builds, y):
        return sum(heights[builds, k] * np.exp(-8 * (y - at) ** 2) for k, at in enumerate((2.1, 5.04, 7.93))) - 0.01

    every = np.arange(3)
    grid = np.array([f(every, np.full(3, y)) for y in x])
    best, told = summit(f, x, grid, every, 1e-9)
    assert told.all()
    fine = np.linspace(0.0, 10.0, 200_001)
    assert best[0] == pytest.approx(f(np.zeros(1, dtype=int), fine).max(), abs=1e-8)
    assert best[1] == pytest.approx(f(np.ones(1, dtype=int), fine).max(), abs=1e-8)
    assert best[2] <= 0.0


def spikes(builds, x):
    """A fall over all of the grid, and on it a peak of 1e-3 ln f at a place of its own for each build."""
    at, height = np.array([2.111, 5.432, 7.777])[builds], np.array([2.0, 1.5, 0.3])[builds]
    return height / (1 + ((x - at) / 1e-3) ** 2) - 1.0 - 0.01 * x


def test_a_peak_that_shows_at_no_point_of_the_grid_is_climbed_from_what_was_seen_beside_its_pole():
    x = np.linspace(0.0, 10.0, 41)
    every = np.arange(3)
    grid = np.array([spikes(every, np.full(3, y)) for y in x])
    assert grid.max() < 0.0
    builds = np.array([0, 1, 0, 2, 1])
    at = np.array([2.1113, 5.4316, 2.13, 7.7771, 3.0])  # near the peaks, and elsewhere on the way to them
    beside = Beside(builds, at, spikes(builds, at))
    rise, told = peaking(spikes, x, grid, beside, every)
    assert told.all()
    peaks = [max(0.0, 2.0 - 1.02111), max(0.0, 1.5 - 1.05432), 0.0]
    assert rise == pytest.approx(20 / np.log(10) * np.array(peaks), abs=1e-4)
    unseen = Beside(builds[:0], at[:0], at[:0])
    assert peaking(spikes, x, grid, unseen, every)[0].tolist() == [0, 0, 0]


def test_what_cannot_be_climbed_is_told():
    """Seen high, but beside a point of the grid that is higher still: where the top is remains open."""
    x = np.linspace(0.0, 10.0, 41)

    def f(builds, y):
        return 0.5 - 0.05 * y

    grid = np.array([f(0, y) * np.ones(1) for y in x])
    seen = Beside(np.array([0]), np.array([0.3]), np.array([0.485]))
    _, told = peaking(f, x, grid, seen, np.array([0]))
    assert told.tolist() == [False]
