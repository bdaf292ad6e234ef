"""Laws of zeros: with the poles they are the response; no neighbour moves them; pairs, similarity."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from math import pi

import numpy as np
import pytest

from polebook.book.poles import poles as resolve
from polebook.book.poles import zeros as resolve_zeros
from polebook.book.solution import Solution
from polebook.chain.read import parse
from polebook.circuit.views import network
from polebook.solve.fold import fold
from polebook.solve.zeros import zeros as all_zeros
from tests.laws.chains import BY_NAME, chain

solution = cache(lambda name: Solution(chain(name)))


@pytest.mark.parametrize("name", BY_NAME)
def test_zeros_over_poles_are_the_response(name: str) -> None:
    """H(s)/H(s0) = Π(s - z)/(s0 - z) over Π(s - p)/(s0 - p): none too many, none missing, all in their places."""
    of = solution(name)
    zeros = np.array([root.value for root in resolve_zeros(of) or ()])
    poles = np.array([root.value for root in resolve(of).roots or ()])
    s = 2j * pi * np.geomspace(1.0, 1e10, 21)
    gains = np.array([np.broadcast_to(gain, s.shape) for gain in fold(of.circuit.network, s, "full").gains])
    response = np.log(gains).sum(axis=0)
    product = np.log(s[:, None] - zeros).sum(axis=1) - np.log(s[:, None] - poles).sum(axis=1)
    apart = np.exp((response - product) - (response - product)[10])
    assert apart == pytest.approx(np.ones(s.size), rel=1e-7)


@pytest.mark.parametrize("name", BY_NAME)
def test_complex_zeros_come_in_pairs_and_rise(name: str) -> None:
    zeros = resolve_zeros(solution(name))
    assert zeros is not None
    values = [root.value for root in zeros]
    upper = np.array(sorted((v for v in values if v.imag > 0), key=abs))
    lower = np.array(sorted((v.conjugate() for v in values if v.imag < 0), key=abs))
    assert upper == pytest.approx(lower, rel=1e-9)
    assert [abs(v) for v in values] == sorted(abs(v) for v in values)


@pytest.mark.parametrize("name", ["wire-break-listener", "six-stage", "valves", "ladder-arms", "blocks"])
def test_no_neighbour_moves_a_stage_s_zeros(name: str) -> None:
    """Every element of the even stages, source and load among them, changed: the zeros of the odd ones stay."""
    of = solution(name)
    net = of.circuit.network
    names = [segment.name for segment in net.layout.segments]
    changed = [v if names.index(p.stage) % 2 else 1.9 * v for v, p in zip(net.values, net.layout.parts, strict=True)]
    low, high = float(of.sweep.hz[0]), float(of.sweep.hz[-1])
    before, after = all_zeros(net, low, high), all_zeros(network(net.layout, changed), low, high)
    kept = [one for one in before if names.index(one.stage) % 2]
    assert sum(one.roots is not None and one.roots.size > 0 for one in kept) >= 1
    for one in kept:
        (again,) = (other for other in after if other.stage == one.stage)
        assert np.sort_complex(again.roots) == pytest.approx(np.sort_complex(one.roots), rel=1e-9)


@pytest.mark.parametrize("name", BY_NAME)
def test_scaling_all_storages_scales_every_zero(name: str) -> None:
    of = solution(name)
    net = of.circuit.network
    slower = [3.7 * v if p.type in ("C", "L", "tau") else v for v, p in zip(net.values, net.layout.parts, strict=True)]
    low, high = float(of.sweep.hz[0]), float(of.sweep.hz[-1])
    before, after = all_zeros(net, low, high), all_zeros(network(net.layout, slower), low / 3.7, high / 3.7)
    for one, other in zip(before, after, strict=True):
        assert np.sort_complex(3.7 * other.roots) == pytest.approx(np.sort_complex(one.roots), rel=1e-9)


def test_each_capacitor_in_the_signal_s_way_is_a_zero_at_zero() -> None:
    """source.couple, load.couple and every stage's couple: one each, in the name of its line."""
    original = chain("wire-break-listener")
    zeros = resolve_zeros(Solution(original)) or ()
    assert sorted(root.stage or "" for root in zeros if root.value == 0) == ["Q1", "Q2", "load"]
    coupled = replace(original, numbers={**original.numbers, "source.couple": 1e-6})
    zeros = resolve_zeros(Solution(coupled)) or ()
    assert sorted(root.stage or "" for root in zeros if root.value == 0) == ["Q1", "Q2", "load", "source"]


def test_traps_across_the_line_are_zeros_of_their_ladder() -> None:
    """A coil and a capacitor in series to ground: ±j/√(LC), whether the ladder's ends are one node or two."""
    for arms, count in (("{ shunt_l = '1u', shunt_c = '100p', role = 'high' }", 2),
                        ("{ series_r = '10' }, { shunt_l = '1u', shunt_c = '100p', role = 'high' }", 2),
                        ("{ shunt_l = '1u', shunt_c = '100p', role = 'high' }, { shunt_l = '1m' }", 3)):
        text = f"""
format = 1
[source]
kind = "voltage"
resistance = "50"
[[stage]]
name = "L"
kind = "ladder"
arms = [{arms}]
[load]
resistance = "50"
"""
        zeros = resolve_zeros(Solution(parse(text, "trap.toml")))
        assert zeros is not None and len(zeros) == count
        pair = [root.value for root in zeros if root.value != 0]
        assert pair == pytest.approx([-1e8j, 1e8j], rel=1e-12)
        assert {root.stage for root in zeros} == {"L"}


def test_a_nulling_resistor_near_its_value_sends_the_zero_far_away() -> None:
    """1/(C·(1/gm - R)), on the right below 1/gm and on the left above, however far it lies."""
    for resistance in (0.0, 300.0, 600.0, 644.0, 645.0, 646.0, 650.0, 700.0, 2e3):
        text = f"""
format = 1
[source]
kind = "current"
resistance = "100k"
[[stage]]
name = "M"
kind = "common-source"
device = "N"
rd = "100k"
c_comp = "3.2p"
r_comp = {resistance}
c_load = "5p"
[device.N]
family = "mosfet"
gm = "1.55m"
cgs = "0.12p"
"""
        (zero,) = resolve_zeros(Solution(parse(text, "null.toml"))) or ()
        assert zero.value.imag == 0
        assert zero.value.real == pytest.approx(1 / (3.2e-12 * (1 / 1.55e-3 - resistance)), rel=1e-9)
