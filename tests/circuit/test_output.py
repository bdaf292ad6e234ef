"""A chain looked at ahead of its load: the same network, another node of it."""

from dataclasses import replace

import numpy as np
import pytest

from polebook.book.ledger import ledger
from polebook.chain.read import load
from polebook.plan.spread.alone import with_numbers
from polebook.plan.spread.draws import drawn
from polebook.plan.spread.model import Request
from polebook.plan.spread.run import spread
from polebook.solve.fold import fold
from tests.helpers import DEMOS

HZ = np.geomspace(1.0, 1e9, 20)
CHAINS = sorted([*DEMOS.glob("*.toml"), *(DEMOS.parent / "tests" / "independent" / "chains").glob("*.toml")])


def up_to(of, lines):
    """The transfer from the EMF up to a line, by the gains of the lines of the whole chain, (f,)."""
    gains = fold(of.solution.circuit.network, 2j * np.pi * HZ, "full").gains[:lines]
    return np.prod([np.broadcast_to(gain, HZ.shape) for gain in gains], axis=0)


@pytest.mark.parametrize("path", CHAINS, ids=lambda path: path.stem)
def test_the_gain_up_to_a_stage_is_the_product_of_the_lines(path):
    chain = load(str(path))
    whole = ledger(chain)
    for number, stage in enumerate(chain.stages, 2):
        there = ledger(replace(chain, output=stage.name))
        assert np.allclose(up_to(there, None), up_to(whole, number), rtol=1e-9, atol=0.0)
        assert there.solution.gain == pytest.approx(np.prod(whole.solution.gains[:number]), rel=1e-9)
        assert there.solution.winding.right == whole.solution.winding.right


def test_edges_are_those_of_that_node():
    chain = load(str(DEMOS / "six-stage.toml"))
    there = ledger(replace(chain, output="Q3"))
    for hz in (there.lower_hz, there.upper_hz):
        gains = fold(ledger(chain).solution.circuit.network, 2j * np.pi * hz, "full").gains[:4]
        assert abs(np.prod(gains)) == pytest.approx(abs(there.solution.gain) / np.sqrt(2), rel=1e-6)


def test_built_chains_are_looked_at_there_too():
    chain = replace(load(str(DEMOS / "wire-break-listener.toml")), output="Q1")
    *_, (_, _, result) = spread(Request(chain, 6, 3, figures=("gain_db", "upper_edge_hz"), corners=False, costs=False,
                                        workers=1))
    numbers = drawn(chain).built(3, 0, 6)
    for build in range(6):
        of = ledger(with_numbers(chain, {path: float(column[build]) for path, column in numbers.items()}))
        assert result.columns["upper_edge_hz"][build] == pytest.approx(of.upper_hz, rel=1e-8)
        assert result.columns["gain_db"][build] == pytest.approx(20 * np.log10(abs(of.solution.gain)), abs=1e-8)


def test_parts_keep_their_stage():
    chain = load(str(DEMOS / "six-stage.toml"))
    parts = ledger(replace(chain, output="Q2")).solution.circuit.layout.parts
    whole = ledger(chain).solution.circuit.layout.parts
    assert [(part.stage, part.name, part.type, part.role) for part in parts] == [
        (part.stage, part.name, part.type, part.role) for part in whole]
