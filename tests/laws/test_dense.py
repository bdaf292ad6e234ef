"""The elimination against one dense matrix of the same elements: transfer, driving-point resistances, derivatives."""

from __future__ import annotations

from dataclasses import replace
from math import log, pi, prod

import numpy as np
import pytest

from polebook.book.build import ledger
from polebook.book.shares import derivatives
from polebook.book.solution import Solution
from polebook.circuit.views import network
from polebook.solve.fold import fold
from polebook.solve.sweep import relative_at
from polebook.solve.transfer import adjoint, voltages
from tests.laws.chains import BY_NAME, WITH_BAND, chain
from tests.laws.dense import pencil


def response(net, hz):
    return prod(fold(net, 2j * pi * hz, "full").gains, start=1.0 + 0j)


@pytest.mark.parametrize("name", BY_NAME)
def test_transfer(name: str) -> None:
    """1e-6: the dense solution loses digits to badly scaled rows long before the elimination does."""
    net = Solution(chain(name)).circuit.network
    dense = pencil(net)
    for hz in np.geomspace(300.0, 3e7, 11):
        assert response(net, float(hz)) == pytest.approx(dense.transfer(float(hz)), rel=1e-6)


@pytest.mark.parametrize("name", BY_NAME)
def test_one_frequency_and_many_agree(name: str) -> None:
    net = Solution(chain(name)).circuit.network
    grid = np.geomspace(1.0, 1e9, 9)
    together = fold(net, 2j * pi * grid, "full").gains
    for k, hz in enumerate(grid):
        alone = fold(net, 2j * pi * float(hz), "full").gains
        for one, many in zip(alone, together, strict=True):
            assert complex(one) == pytest.approx(complex(np.broadcast_to(many, grid.shape)[k]), rel=1e-12)


@pytest.mark.parametrize("name", BY_NAME)
def test_adjoint_and_forward_solution_meet_in_the_transfer(name: str) -> None:
    """The output per volt of EMF (ampere of a current source) is the same from either side."""
    net = Solution(chain(name)).circuit.network
    folded = fold(net, 2j * pi * 1.23e4, "full")
    output = net.layout.after[-1]
    entry = net.layout.emf if net.layout.emf >= 0 else net.layout.after[0]
    assert adjoint(folded, output).u[entry] == pytest.approx(voltages(folded)[output], rel=1e-9)


@pytest.mark.parametrize("name", WITH_BAND)
def test_derivatives_against_differences(name: str) -> None:
    net = Solution(chain(name)).circuit.network
    for hz in (2e3, 7e5):
        found = derivatives(net, hz).by_part
        largest = max(abs(d) for d in found.values())
        for index, exact in found.items():
            h = 1e-5
            sides = []
            for factor in (1 + h, 1 - h):
                values = list(net.values)
                values[index] *= factor
                sides.append(response(network(net.layout, values), hz))
            difference = (sides[0] - sides[1]) / (sides[0] + sides[1]) / log((1 + h) / (1 - h)) * 2
            assert difference == pytest.approx(exact, rel=1e-6, abs=1e-8 * max(1.0, largest))


@pytest.mark.parametrize("name", ["six-stage", "photodiode-front", "mixed-cascode", "ladder-arms", "jfet-electrometer"])
def test_owned_shares_against_a_second_solution_of_the_edge(name: str) -> None:
    """-d ln f/d ln X by solving the edge again with each part a hair larger and smaller."""
    book = ledger(chain(name))
    of = book.solution
    for edge, owned in ((book.upper_hz, book.owns_upper), (book.lower_hz, book.owns_lower)):
        if edge is None:
            continue
        for index in sorted(owned, key=lambda k: -abs(owned[k]))[:6]:
            logs = []
            for factor in (1 + 1e-4, 1 - 1e-4):
                values = list(of.circuit.network.values)
                values[index] *= factor
                net = network(of.circuit.layout, values)
                logs.append(_edge_near(net, of.gains, log(edge)))
            measured = -(logs[0] - logs[1]) / log((1 + 1e-4) / (1 - 1e-4))
            assert measured == pytest.approx(owned[index], rel=1e-5, abs=1e-7)


def _edge_near(net, gains, x: float) -> float:
    """ln f where the loss is 3 dB, by secants from x."""
    def excess(y: float) -> float:
        return relative_at(net, float(np.exp(y)), gains) + 0.5 * log(2)

    a, b = x - 1e-4, x + 1e-4
    for _ in range(30):
        fa, fb = excess(a), excess(b)
        if fa == fb or abs(b - a) < 1e-15:
            break
        a, b = b, b - fb * (b - a) / (fb - fa)
    return b


@pytest.mark.parametrize("name", BY_NAME)
def test_driving_point_resistances_against_injected_current(name: str) -> None:
    """Z_kk of the selected inverse is what 1 A into the node gives in the adjoint solution towards that node."""
    of = Solution(chain(name))
    for node in of.circuit.layout.after:
        assert of.inverse.own(node) == pytest.approx(adjoint(of.midband, node).u[node], rel=1e-9)


def test_replacing_a_number_is_what_a_new_circuit_computes() -> None:
    """`values` with an override gives the network that the changed file gives."""
    from polebook.circuit.build import circuit, with_values

    original = chain("six-stage")
    key = next(k for k in original.numbers if k.endswith(".rc"))
    numbers = {**original.numbers, key: original.numbers[key] * 1.1}
    again = circuit(replace(original, numbers=numbers)).network
    moved = with_values(circuit(original), {key: numbers[key]})
    assert moved.values == pytest.approx(again.values, rel=1e-13)
