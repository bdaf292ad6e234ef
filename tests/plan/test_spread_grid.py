"""The grid that all builds share: as fine as the nominal chain needs it, and no finer."""

import numpy as np
import pytest

from polebook.book.solution import Solution
from polebook.plan.spread.grid import FALL, OF_INTEREST, TURN, grid
from polebook.solve.sweep import wrapped
from tests.laws.chains import BY_NAME, chain


@pytest.mark.parametrize("name", BY_NAME)
def test_little_happens_between_two_frequencies(name):
    """What lies between two points of the nominal sweep belongs to one or two intervals of the grid."""
    s = Solution(chain(name)).sweep
    hz = grid(s)
    assert (np.diff(hz) > 0).all()
    assert hz[0] <= s.hz[0] * (1 + 1e-9)
    assert hz[-1] >= s.hz[-1] * (1 - 1e-9)
    assert hz.size < 60 or name in ("direct-mixed", "current-source-coupled", "photodiode-bare", "band-pass",
                                    "trap-notch", "follower-into-trap")
    inside = np.searchsorted(hz, np.sqrt(s.hz[1:] * s.hz[:-1]))
    turned = np.abs(np.concatenate([wrapped(s.angles), wrapped(s.turns)]))
    seen = np.maximum(s.loss[1:], s.loss[:-1]) > OF_INTEREST
    for k in np.unique(inside):
        here = inside == k
        if here.sum() > 1:
            assert turned[:, here].sum(axis=1).max() < TURN + turned[:, here].max()
            fallen = np.abs(np.diff(s.loss))[here & seen]
            assert fallen.sum() <= FALL + (fallen.max() if fallen.size else 0.0)


def test_it_looks_further_where_the_response_is_level():
    level = Solution(chain("direct-mixed")).sweep
    falling = Solution(chain("six-stage")).sweep
    assert grid(level)[0] < 1e-2 * level.hz[0]
    assert grid(falling)[0] == pytest.approx(falling.hz[0])
