"""The elimination in place against the plain one, for every kind of network."""

import numpy as np
import pytest

from polebook.circuit.build import values
from polebook.circuit.views import network
from polebook.plan.spread.batch import Batch, Midband
from polebook.plan.spread.draws import drawn
from polebook.plan.spread.nominal import nominal
from polebook.solve.determinant import determinant
from polebook.solve.fold import fold
from tests.laws.chains import BY_NAME, chain

BUILDS = 12


@pytest.mark.parametrize("name", BY_NAME)
def test_it_gives_transfer_determinant_and_gain_of_the_fold(name):
    of = nominal(drawn(chain(name)))
    layout = of.circuit.layout
    parts = values(of.circuit, of.drawn.built(2, 0, BUILDS))
    net, own = network(layout, parts), of.circuit.network
    batch, midband = Batch(layout, BUILDS), Midband(layout, own, BUILDS)
    batch.fill(parts)
    for hz in np.geomspace(0.1, 1e10, 7):
        s = np.full(BUILDS, 2j * np.pi * hz)
        folded = fold(net, complex(s[0]), "full")
        batch.look(hz)
        gains = [np.broadcast_to(gain, BUILDS) for gain in folded.gains]
        assert batch.transfer == pytest.approx(np.prod(gains, axis=0), rel=1e-12)
        pivots = determinant(folded, s)
        nominal_pivots = determinant(fold(own, s, "full"), s)
        here = Batch(layout, BUILDS)
        here.fill(own.values)
        here.look(hz)
        ours = np.prod([x / y for x, y in zip(batch.products, here.products, strict=True)], axis=0)
        assert ours == pytest.approx(np.prod(pivots / nominal_pivots, axis=0), rel=1e-9)
    gains = [np.broadcast_to(g, BUILDS) for g in fold(net, 0.0, "midband").gains]
    assert midband.look(parts) == pytest.approx(np.prod(gains, axis=0), rel=1e-13)


def test_each_build_has_a_frequency_of_its_own():
    of = nominal(drawn(chain("six-stage")))
    parts = values(of.circuit, of.drawn.built(2, 0, BUILDS))
    batch = Batch(of.circuit.layout, BUILDS)
    batch.fill(parts)
    hz = np.geomspace(10.0, 1e8, BUILDS)
    batch.look(hz)
    together = batch.transfer.copy()
    for k in range(BUILDS):
        batch.look(float(hz[k]))
        assert batch.transfer[k] == together[k]


def test_it_takes_few_operations():
    """Six stages of 30 nodes: some 14 operations a node; a plain elimination of the whole matrix takes 9000."""
    of = nominal(drawn(chain("six-stage")))
    assert sum(Batch(of.circuit.layout, 2).counts.values()) < 500
