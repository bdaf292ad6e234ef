"""Laws of poles: pairs, sums, number, similarity, like ones apart, and what makes each."""

from __future__ import annotations

from functools import cache
from math import pi

import numpy as np
import pytest

from polebook.book.build import document, ledger
from polebook.book.poles import poles as resolve
from polebook.book.solution import Solution
from polebook.chain.read import parse
from polebook.circuit.views import Network, network
from polebook.solve.modes import modes
from polebook.solve.poles import Poles
from polebook.solve.poles import poles as all_poles
from tests.laws.chains import BY_NAME, chain
from tests.laws.dense import pencil
from tests.laws.test_scaling import POWERS

solution = cache(lambda name: Solution(chain(name)))


def of_network(net: Network, of: Solution, slower: float = 1.0) -> Poles:
    """Poles of a network whose poles should lie where those of a solution do, divided by `slower`."""
    low, high = (float(of.sweep.hz[k]) / slower for k in (0, -1))
    found = all_poles(net, low, high, of.winding.right)
    assert found.trusted, found.why
    return found


@pytest.mark.parametrize("name", BY_NAME)
def test_every_test_chain_is_resolved_with_as_many_as_the_winding_counts(name: str) -> None:
    of = solution(name)
    found = resolve(of)
    assert found.roots is not None, found.why
    assert sum(root.value != 0 for root in found.roots) == of.winding.finite
    assert sum(root.value.real > 0 for root in found.roots) == of.winding.right
    assert [abs(root.value) for root in found.roots] == sorted(abs(root.value) for root in found.roots)


@pytest.mark.parametrize("name", BY_NAME)
def test_complex_poles_come_in_exact_pairs(name: str) -> None:
    values = [root.value for root in resolve(solution(name)).roots or ()]
    upper = sorted((v for v in values if v.imag > 0), key=lambda v: (v.real, v.imag))
    lower = sorted((v.conjugate() for v in values if v.imag < 0), key=lambda v: (v.real, v.imag))
    assert upper == lower


@pytest.mark.parametrize("name", ["six-stage", "photodiode-front", "trap-notch", "oscillating",
                                  "current-source-coupled"])
def test_rows_of_the_document(name: str) -> None:
    """hz is |p|/2π, q that of a complex pair off the axis; a real one and one at 0 have none."""
    doc = document(ledger(chain(name)))
    for row in [*doc["poles"], *doc["zeros"]]:
        value = complex(row["re"], row["im"])
        assert row["hz"] == pytest.approx(abs(value) / (2 * pi), rel=1e-14)
        if value.imag and value.real:
            assert row["q"] == pytest.approx(abs(value) / (2 * abs(value.real)), rel=1e-14)
            assert row["q"] > 0.5
        else:
            assert row["q"] is None
    assert [row["stage"] for row in doc["poles"] if row["hz"] == 0] == [None] * (name == "current-source-coupled")


@pytest.mark.parametrize("name", BY_NAME)
def test_sums_over_the_poles_are_traces_of_the_network(name: str) -> None:
    """Σ1/(s - p) = tr((G + sC)⁻¹C) on the positive real axis: the sum of the open-circuit time constants at s = 0,
    carried to where the fast poles have a say in it."""
    of = solution(name)
    dense = pencil(of.circuit.network)
    values = np.array([root.value for root in resolve(of).roots or ()])
    for s in 2 * pi * np.geomspace(1.0, 1e9, 10):
        matrix = dense.g + s * dense.c
        rows = 1.0 / np.abs(matrix).max(axis=1)
        columns = 1.0 / np.abs(matrix * rows[:, None]).max(axis=0)
        inverse = np.linalg.solve(matrix * rows[:, None] * columns, (dense.c * rows[:, None]))
        trace = s * float(np.trace(inverse * columns[:, None]))
        assert float((s / (s - values)).sum().real) == pytest.approx(trace, abs=1e-6)


@pytest.mark.parametrize("name", BY_NAME)
def test_scaling_all_storages_scales_every_pole(name: str) -> None:
    of = solution(name)
    net = of.circuit.network
    slower = [3.7 * v if p.type in ("C", "L", "tau") else v for v, p in zip(net.values, net.layout.parts, strict=True)]
    before, after = of_network(net, of), of_network(network(net.layout, slower), of, 3.7)
    assert after.at_zero == before.at_zero
    assert after.roots * 3.7 == pytest.approx(before.roots, rel=1e-9)


@pytest.mark.parametrize("name", BY_NAME)
def test_scaling_all_impedances_leaves_every_pole(name: str) -> None:
    of = solution(name)
    net = of.circuit.network
    scaled = [v * 7.3 ** POWERS[p.type] for v, p in zip(net.values, net.layout.parts, strict=True)]
    before, after = of_network(net, of), of_network(network(net.layout, scaled), of)
    assert after.at_zero == before.at_zero
    assert after.roots == pytest.approx(before.roots, rel=1e-9)


@pytest.mark.parametrize("name", BY_NAME)
def test_what_the_parts_have_of_a_pole_sums_to_one(name: str) -> None:
    of = solution(name)
    found = of_network(of.circuit.network, of)
    weights = np.array(list(modes(of.circuit.network, found).by_part.values()))
    assert weights.sum(axis=0) == pytest.approx(np.ones(found.roots.size), abs=1e-9)
    for root in resolve(of).roots or ():
        assert (root.stage is None) == (root.value == 0)
        assert root.value == 0 or (root.weight is not None and root.weight >= 1 / (len(of.chain.stages) + 2) - 1e-9)


@pytest.mark.parametrize("name", ["wire-break-listener", "photodiode-front", "ladder-arms", "valves", "blocks"])
def test_what_a_part_has_of_a_pole_is_how_the_pole_moves_with_it(name: str) -> None:
    """Re(-∂ln p/∂ln X) by solving the poles again with X a little larger and smaller."""
    of = solution(name)
    net = of.circuit.network
    found = of_network(net, of)
    weights = modes(net, found).by_part
    step = 1e-5
    for index in sorted(weights)[::3]:
        sides = []
        for factor in (1 - step, 1 + step):
            values = list(net.values)
            values[index] *= factor
            roots = of_network(network(net.layout, values), of).roots
            sides.append(np.array([roots[np.argmin(np.abs(roots - p))] for p in found.roots]))
        moved = -np.real(np.log(sides[1] / sides[0])) / (2 * step)
        assert moved == pytest.approx(np.asarray(weights[index]), rel=1e-5, abs=1e-7)


def row_of_like_stages(stage: str, count: int) -> str:
    stages = "".join(f'[[stage]]\nname = "A{k}"\n{stage}\n' for k in range(count))
    return f'format = 1\n[source]\nkind = "voltage"\nresistance = 50\n{stages}'


@pytest.mark.parametrize(("stage", "corners_hz"), [
    ('kind = "block"\ngain = 3\npoles = ["1.7M"]', [1.7e6]),
    ('kind = "block"\ngain = -2\nlower_poles = ["20"]\npoles = ["300k", "8M"]', [20.0, 300e3, 8e6]),
    ('kind = "block"\ngain = 4\nrin = "1M"\nrout = "1k"\nc_load = "100p"\npoles = ["1 GHz"]\n',
     [1 / (2 * pi * 100e-12 / (1e-3 + 1e-6)), 1e9]),
])  # fmt: skip
def test_like_stages_that_do_not_act_back_have_like_poles(stage: str, corners_hz: list[float]) -> None:
    """Eight of a kind: eight times the same poles to 1e-12, each time of another stage (the last one is not loaded)."""
    of = Solution(parse(row_of_like_stages(stage, 9), "like.toml"))
    found = [root for root in resolve(of).roots or () if root.stage != "A8"]
    assert len(found) == 8 * len(corners_hz)
    for k, corner in enumerate(corners_hz):
        own = found[8 * k:8 * k + 8]
        assert [root.value for root in own] == pytest.approx([-2 * pi * corner] * 8, rel=1e-12)
        assert {root.stage for root in own} == {f"A{k}" for k in range(8)}


def test_a_capacitor_between_two_others_has_a_pole_at_zero() -> None:
    """A node that capacitors alone lead to keeps its charge: a pole at 0, no stage's, and one more for its corner."""
    text = """
format = 1
[source]
kind = "voltage"
resistance = "1k"
[[stage]]
name = "L"
kind = "ladder"
arms = [{ series_c = "1n" }, { shunt_c = "3p" }, { series_c = "2n" }]
[load]
resistance = "10k"
"""
    of = Solution(parse(text, "charge.toml"))
    roots = resolve(of).roots
    assert roots is not None
    assert [root.value == 0 for root in roots] == [True, False, False]
    assert (roots[0].stage, roots[0].hz, roots[0].q) == (None, 0.0, None)
    series = 1 / (1 / 1e-9 + 1 / 2e-9)
    assert roots[1].hz == pytest.approx(1 / (2 * pi * 11e3 * series), rel=2e-3)
    assert {root.stage for root in roots[1:]} == {"L"}
