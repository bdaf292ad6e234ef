"""Figures of the wire-break listener worked out by hand, from the values of its file alone, against their workings."""

from math import log10, sqrt

import pytest

from polebook.report.look import Look
from polebook.report.working import figure, working
from tests.working.chains import every

BETA, EARLY, RX, FT, FT_IC, C_BE0 = 180.0, 75.0, 30.0, 600e6, 5e-3, 2.5e-12
VT = 1.380649e-23 * 298.15 / 1.602176634e-19


def together(*ohms):
    return 1.0 / sum(1.0 / ohm for ohm in ohms)


class Transistor:
    """A stage at its quiescent current, as the hybrid-pi model has it."""

    def __init__(self, ic):
        self.gm = ic / VT
        self.rpi = BETA / self.gm
        self.ro = EARLY / ic

    def split(self, load, lower):
        """Output current over base current of a common-emitter stage."""
        return (BETA * self.ro - lower) / (self.ro + load + lower)

    def into_base(self, load, lower):
        return RX + self.rpi + (1.0 + self.split(load, lower)) * lower

    def gain(self, load, lower):
        return -self.split(load, lower) * load / self.into_base(load, lower)


# d.c.: a divider of 56k and 12k on 12 V, seen as its open voltage behind both in parallel
OPEN_V, BEHIND = 12.0 * 12e3 / 68e3, together(56e3, 12e3)
IC1 = (OPEN_V - 0.65) / (BEHIND / BETA + (1 + 1 / BETA) * (33.0 + 680.0))
IC2 = (OPEN_V - 0.65) / (BEHIND / BETA + (1 + 1 / BETA) * (47.0 + 680.0))
# Q3's base stands at Q2's collector, which gives up its base current: 12 - 2k2·(ic2 + ib3) = 47·ib3 + 0.65 + 1k2·ie3
IC3 = (12.0 - 2.2e3 * IC2 - 0.65) / ((2.2e3 + 47.0) / BETA + 1.2e3 * (1 + 1 / BETA))
Q1, Q2, Q3 = Transistor(IC1), Transistor(IC2), Transistor(IC3)

LOAD3 = together(1.2e3, Q3.ro, 600.0)
INTO3 = 47.0 + RX + Q3.rpi + (1.0 + BETA) * LOAD3
LOAD2 = together(2.2e3, INTO3)
INTO2_BASE = Q2.into_base(LOAD2, 47.0)
INTO2 = together(56e3, 12e3, INTO2_BASE)
LOAD1 = together(2.2e3, INTO2)
INTO1_BASE = Q1.into_base(LOAD1, 33.0)
INTO1 = together(56e3, 12e3, INTO1_BASE)
K = Q2.gain(LOAD2, 47.0)  # Q2.c_comp lies straight across the stage
GAIN3 = (1.0 + BETA) * LOAD3 / INTO3
GAIN = INTO1 / (600.0 + INTO1) * Q1.gain(LOAD1, 33.0) * K * GAIN3
VCE1 = 12.0 - 2.2e3 * IC1 - 713.0 * IC1 * (1 + 1 / BETA)
CMU1 = 1.2e-12 * ((1 + 5.0 / 0.75) / (1 + (VCE1 - 0.65) / 0.75)) ** 0.33
TAU_F = 1 / (2 * 3.141592653589793 * FT) - (C_BE0 + 1.2e-12) * VT / FT_IC

BY_HAND = {
    "bias.Q1.current_a": IC1,
    "bias.Q3.current_a": IC3,
    "Q1.gm.value": Q1.gm,
    "Q1.rpi.value": Q1.rpi,
    "Q2.ro.value": Q2.ro,
    "Q1.cmu.value": CMU1,
    "Q1.cpi.value": Q1.gm * TAU_F + C_BE0,
    "Q3.input_ohm": INTO3,
    "Q3.gain": GAIN3,
    "Q1.gain": Q1.gain(LOAD1, 33.0),
    "Q2.c_comp.k": K,
    "Q2.c_comp.at_input": 4.7e-12 * (1 - K),
    "Q2.c_comp.at_output": 4.7e-12 * (1 - 1 / K),
    "Q1.couple.tau_s": 4.7e-9 * (600.0 + INTO1),
    "load.couple.tau_s": None,  # below: it needs the follower's output resistance
    "overall.gain": GAIN,
    "overall.gain_db": 20 * log10(abs(GAIN)),
    "target.gain.margin": (1.0 - abs(20 * log10(abs(GAIN) / 1000.0))) / 1.0,
    "n1.allotted_upper_db": 10 * log10(2) / 5,
    "account.upper.budget_db": 10 * log10(2),
}
# what drives the follower is Q2's collector: its own resistance there, the base side held by Q1 behind 2k2
AHEAD1 = together(600.0, 56e3, 12e3) + RX + Q1.rpi
OUT1 = together(2.2e3, Q1.ro * (1 + (BETA * 33.0 / (AHEAD1 + 33.0))) + together(33.0, AHEAD1))
AHEAD2 = together(OUT1, 56e3, 12e3) + RX + Q2.rpi
OUT2 = together(2.2e3, Q2.ro * (1 + (BETA * 47.0 / (AHEAD2 + 47.0))) + together(47.0, AHEAD2))
OUT3 = together((OUT2 + 47.0 + RX + Q3.rpi) / (1.0 + BETA), 1.2e3, Q3.ro)
BY_HAND["load.couple.tau_s"] = 100e-9 * (OUT3 + 600.0)


@pytest.mark.parametrize("name", BY_HAND)
def test_the_working_comes_to_what_the_hand_comes_to(name):
    one = every("wire-break-listener")[name]
    assert one.value == pytest.approx(BY_HAND[name], rel=1e-9)
    results = [step for step in one.steps if step.result]
    assert results
    for step in results:
        assert step.value == pytest.approx(BY_HAND[name], rel=1e-9)
    page = working(one.document(), "a chain", "chain.toml", Look())
    assert f" {name} = {figure(BY_HAND[name], one.unit)}\n" in page


def test_the_pole_of_n1_by_hand():
    """Each capacitance at Q1's collector and at Q2's inner base, with its half, times the resistance there."""
    one = every("wire-break-listener")["n1.pole_hz"]
    symbols = {number.symbol: number.value for number in one.numbers}
    assert symbols["R_n1"] == pytest.approx(together(OUT1, INTO2), rel=1e-9)
    assert symbols["K_Q2.c_comp"] == pytest.approx(K, rel=1e-9)
    inner = (INTO2_BASE - RX) / INTO2_BASE  # from the collector to behind rx
    back = (INTO1_BASE - RX) / INTO1_BASE / Q1.gain(LOAD1, 33.0)  # from the collector back to the inner base
    at_n1 = CMU1 * (1 - back) + 2e-12 + 4.7e-12 * (1 - K)
    emitter = (1 + Q2.split(LOAD2, 47.0)) * 47.0 / (INTO2_BASE - RX)
    at_inner = symbols["C_Q2.cpi"] * (1 - emitter) + symbols["C_Q2.cmu"] * (1 - K / inner)
    behind = together(RX + together(OUT1, 56e3, 12e3), INTO2_BASE - RX)
    tau = together(OUT1, INTO2) * at_n1 + behind * at_inner
    assert one.value == pytest.approx(1 / (2 * 3.141592653589793 * tau), rel=1e-9)


def test_the_room_of_n1_by_hand():
    """Four nodes have a pole; alike they would each need the target edge over sqrt(2^(1/4) - 1)."""
    workings = every("wire-break-listener")
    wanted = workings["n1.pole_hz"].value / (1e6 / sqrt(2**0.25 - 1))
    assert workings["n1.room"].value == pytest.approx(wanted, rel=1e-12)
