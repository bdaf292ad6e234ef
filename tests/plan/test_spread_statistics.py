"""What columns come to."""

import numpy as np
import pytest
from scipy.stats import binomtest

from polebook.plan.spread.statistics import histogram, statistics, wilson


def test_the_statistics_are_those_of_another_hand():
    column = np.random.default_rng(1).normal(5, 2, 3001)
    column[::7] = np.nan
    there = column[~np.isnan(column)]
    told = statistics(column)
    assert told.builds == there.size
    assert told.mean == pytest.approx(there.mean())
    assert told.deviation == pytest.approx(there.std(ddof=1))
    assert list(told.percentiles) == ["0.1", "1", "50", "99", "99.9"]
    other = np.quantile(there, [0.001, 0.01, 0.5, 0.99, 0.999]).tolist()
    assert list(told.percentiles.values()) == pytest.approx(other)
    assert (told.least, told.greatest) == (there.min(), there.max())


def test_few_builds():
    assert statistics(np.full(3, np.nan)) is None
    assert statistics(np.zeros(0)) is None
    one = statistics(np.array([np.nan, 4.0]))
    assert (one.builds, one.mean, one.deviation) == (1, 4.0, None)
    assert set(one.percentiles.values()) == {4.0}


@pytest.mark.parametrize(("count", "of"), [(0, 10), (10, 10), (1, 1), (0, 1), (9312, 10_000), (3, 7), (999_999, 10**6)])
def test_the_interval_is_wilsons(count, of):
    told = wilson(count, of)
    other = binomtest(count, of).proportion_ci(0.95, "wilson")
    assert (told.share, told.low, told.high) == pytest.approx((count / of, other.low, other.high), abs=1e-7)
    assert 0.0 <= told.low <= told.share <= told.high <= 1.0


def test_a_histogram_holds_every_build_and_every_target():
    column = np.random.default_rng(2).normal(100, 3, 5000)
    column[:10] = np.nan
    told = histogram(column, 24, (80.0,))
    assert told.edges.size == 25
    assert told.edges[0] == 80.0
    assert told.counts.sum() + told.below + told.above == 4990
    assert 0 < told.above <= 10
    assert np.diff(told.edges) == pytest.approx(np.full(24, (told.edges[-1] - 80.0) / 24))
    counts = [((told.edges[k] <= column) & (column < told.edges[k + 1])).sum() for k in range(23)]
    assert told.counts[:23].tolist() == counts


def test_a_histogram_of_one_value():
    told = histogram(np.full(40, -7.0), 5)
    assert told.counts.tolist() == [0, 0, 40, 0, 0]
    assert histogram(np.zeros(9), 3).counts.tolist() == [0, 9, 0]
    assert histogram(np.full(4, np.nan), 5) is None
