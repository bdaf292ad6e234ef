"""Stability by the winding count, against chains whose stability is known by hand, and poles counted by rank."""

from __future__ import annotations

import numpy as np
import pytest

from polebook.book.build import document, ledger
from polebook.book.solution import Solution
from polebook.chain.read import parse
from tests.laws.chains import chain


def boosted(gain: float) -> str:
    """A positive gain bridged by 100 kΩ, on a 10 kΩ source: at the input 1/10k + (1 - gain)/100k; 0 at a gain of 11."""
    return f"""
format = 1
[source]
kind = "voltage"
resistance = "10k"
[[stage]]
name = "B"
kind = "block"
gain = {gain}
cin = "10p"
r_bridge = "100k"
rout = "1m"
"""


@pytest.mark.parametrize(("gain", "right"), [(2.0, 0), (10.9, 0), (11.1, 1), (50.0, 1)])
def test_positive_feedback_past_its_limit_is_unstable(gain: float, right: int) -> None:
    """Hand calculation: the pole of cin is at -(1/Rs + (1 - gain)/R)/C, positive past gain = 1 + R/Rs."""
    assert Solution(parse(boosted(gain), "boosted.toml")).winding.right == right


def test_an_unstable_chain_says_so_first_and_gives_no_edges() -> None:
    doc = document(ledger(parse(boosted(20.0), "boosted.toml")))
    assert doc["overall"]["unstable"] is True
    assert doc["overall"]["upper_edge_hz"] is None and doc["overall"]["lower_edge_hz"] is None
    assert doc["overall"]["gain"] is not None
    assert all(n["lost_upper_db"] is None for n in doc["nodes"])
    assert doc["verdict"].startswith("Unstable: a pole at ") and "latches" in doc["verdict"]
    assert not any("unstable" in c["text"] for c in doc["cautions"])


def pairs(count: int) -> str:
    stages = "".join(f"""
[[stage]]
name = "A{k}"
kind = "common-emitter"
device = "D"
ic = "1m"
vce = 5
couple = "1u"
rb1 = "100k"
rb2 = "22k"
rc = "4k7"
re = "47"
re_bypassed = "1k"
ce = "100u"
[[stage]]
name = "B{k}"
kind = "emitter-follower"
device = "D"
ic = "2m"
vce = 5
re = "2k2"
""" for k in range(count))
    return f"""
format = 1
[supply]
positive = 12
[source]
kind = "voltage"
resistance = 600
{stages}
[load]
resistance = "10k"
[device.D]
family = "bjt"
beta = 200
early_voltage = 80
rx = 30
ft = "300M"
ft_ic = "10m"
cob = "3p"
cob_v = 5
"""


@pytest.mark.parametrize("count", [1, 12, 30])
def test_common_emitter_follower_pairs_are_stable_however_many(count: int) -> None:
    """Eigenvalues call 30 pairs unstable. A pair has six capacitors and no loop of capacitors alone: six poles."""
    winding = Solution(parse(pairs(count), "pairs.toml")).winding
    assert winding.right == 0
    assert winding.finite == 6 * count


def test_a_transimpedance_stage_with_a_slow_second_pole_and_much_input_capacitance() -> None:
    """Two poles in the op-amp and one at the input: 1 + a·β turns by more than half a turn before its size is 1.

    Hand calculation by the Routh criterion for (1 + sT1)(1 + sT2)(1 + sTn) + a0 = 0 with rout = 0:
    stable only while (T1T2 + T1Tn + T2Tn)(T1 + T2 + Tn) > T1T2Tn(1 + a0).
    """
    for c_in, gbw in ((1e-12, 1e6), (1e-9, 1e6), (1e-9, 1e4), (1e-12, 1e8)):
        a0, r, f2 = 1e5, 1e6, 1e5
        t1, t2, tn = a0 / (2 * np.pi * gbw), 1 / (2 * np.pi * f2), r * c_in
        stable = (t1 * t2 + t1 * tn + t2 * tn) * (t1 + t2 + tn) > t1 * t2 * tn * (1 + a0)
        text = f"""
format = 1
[source]
kind = "current"
capacitance = {c_in}
[[stage]]
name = "U"
kind = "transimpedance"
device = "A"
rf = {r}
[device.A]
family = "opamp"
gbw = {gbw}
a0 = {a0}
f2 = {f2}
rout = 0
"""
        winding = Solution(parse(text, "tia.toml")).winding
        assert winding.finite == 3
        assert winding.right == (0 if stable else 2), (c_in, gbw)


def test_a_lossless_trap_does_not_disturb_the_count() -> None:
    """A shunt arm of L and C in series has its pivot pass through zero on the axis at resonance."""
    text = """
format = 1
[source]
kind = "voltage"
resistance = "50"
[[stage]]
name = "L"
kind = "ladder"
arms = [{ shunt_l = "1u", shunt_c = "100p", role = "high" }, { series_r = "50" }, { shunt_c = "10p" }]
[load]
resistance = "50"
"""
    winding = Solution(parse(text, "trap.toml")).winding
    assert (winding.finite, winding.right) == (3, 0)


@pytest.mark.parametrize("name", ["wire-break-listener", "six-stage", "ladder-arms", "blocks", "mosfets", "valves"])
def test_finite_poles_by_the_growth_of_the_determinant(name: str) -> None:
    """The sweep is long enough: another ten times as far on either side counts the same."""
    from polebook.solve.sweep import sweep
    from polebook.solve.winding import winding

    of = Solution(chain(name))
    net = of.circuit.network
    low, high = of.sweep.hz[0] / 10, of.sweep.hz[-1] * 10
    assert winding(sweep(net, low, high, of.gains)) == of.winding
