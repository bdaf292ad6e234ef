"""The pair of rules and what panels make of it: exact up to their degree, and no peak that a panel sees is missed."""

from __future__ import annotations

from math import atan, log

import numpy as np
import pytest

from polebook.solve.quadrature import COARSE, FINE, MOST, NODES, nodes, panels, refined


def test_both_rules_are_exact_up_to_their_degree():
    for degree in range(0, 23, 2):
        assert FINE @ NODES**degree == pytest.approx(2 / (degree + 1), abs=1e-15)
    for degree in range(0, 13, 2):
        assert COARSE @ NODES**degree == pytest.approx(2 / (degree + 1), abs=1e-15)
    assert abs(FINE @ NODES**24 - 2 / 25) > 1e-9
    assert abs(COARSE @ NODES**14 - 2 / 15) > 1e-5
    assert np.count_nonzero(COARSE) == 7


def integral(density, edges):
    left, right = np.log(np.array(edges[:-1])), np.log(np.array(edges[1:]))
    hz = nodes(left, right)
    return refined(panels(left, right, hz, density(hz)), density)


@pytest.mark.parametrize("width", [1e-1, 1e-4, 1e-7, 1e-10])
def test_a_peak_at_the_edge_of_a_panel(width):
    """1/(1 + ((f - 1)/width)²) from 0.5 to 3 Hz, a panel's end on its top."""
    found = integral(lambda f: 1 / (1 + ((f[None, :] - 1) / width) ** 2), [0.5, 1.0, 3.0])
    expected = width * (atan(2 / width) + atan(0.5 / width))
    assert found.settled(0)
    assert found.total[0] == pytest.approx(expected, rel=1e-8)


def test_several_densities_at_once():
    """Each is right though only one of them has asked for smaller panels."""
    found = integral(lambda f: np.array([1 / f, 1 / (1 + ((f - 1) / 1e-3) ** 2), f**2]), [0.1, 1.0, 10.0])
    assert found.total == pytest.approx([log(100), 1e-3 * (atan(9e3) + atan(900)), (1000 - 0.001) / 3], rel=1e-8)


def test_what_has_no_integral_does_not_settle():
    """Infinite at a point of the band: the panels get as small as they may, and it is told."""
    found = integral(lambda f: 1 / (f[None, :] - 1.234) ** 2, [0.1, 1.0, 10.0])
    assert not found.settled(0)
    assert found.panels.left.size <= MOST
