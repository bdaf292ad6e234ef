"""Direct-coupled groups against an independent nodal solution."""

from __future__ import annotations

import pytest

from polebook.circuit import bias
from tests.circuit.bias_cases import JFET, NMOS, NPN, PNP, TRIODE, chain
from tests.circuit.dense_bias import Net


def points(*args, **kwargs):
    made = chain(*args, **kwargs)
    return bias.solve(bias.plan(made), made.get)


def agree(found, net, devices):
    """devices: stage name -> (control, output, lower) nodes, in the order of the net's devices."""
    volts, currents = net.solve()
    volts = {**volts, **net.levels}
    for (name, nodes), current in zip(devices.items(), currents, strict=True):
        at = found[name]
        assert at.converged is True
        assert at.current == pytest.approx(current, rel=1e-8), name
        for value, node in zip((at.control_v, at.output_v, at.lower_v), nodes, strict=True):
            assert value == pytest.approx(volts[node], rel=1e-8, abs=1e-9), (name, node)


def test_npn_pair():
    first = {"kind": "common-emitter", "device": "A", "couple": 1e-6, "rb1": 100e3, "rb2": 22e3, "re": 680.0,
             "rc": 4700.0}
    second = {"kind": "common-emitter", "device": "A", "re": 2200.0, "rc": 1500.0, "stopper": 220.0}
    net = Net(p=15.0)
    net.r("p", "b1", 100e3)
    net.r("b1", "0", 22e3)
    net.r("e1", "0", 680)
    net.r("p", "c1", 4700)
    net.r("c1", "b2", 220)
    net.r("e2", "0", 2200)
    net.r("p", "c2", 1500)
    net.bjt("b1", "c1", "e1", 150, 0.65)
    net.bjt("b2", "c2", "e2", 150, 0.65)
    found = points([first, second], {"A": NPN}, supply={"positive": 15})
    agree(found, net, {"Q1": ("b1", "c1", "e1"), "Q2": ("b2", "c2", "e2")})


def test_npn_into_pnp_into_follower_with_load():
    stages = [
        {"kind": "common-emitter", "device": "A", "couple": 1e-6, "rb1": 68e3, "rb2": 15e3, "re": 1000.0, "rc": 2700.0},
        {"kind": "common-emitter", "device": "B", "re": 560.0, "rc": 3300.0},
        {"kind": "emitter-follower", "device": "A", "re": 1200.0},
    ]
    net = Net(p=12.0)
    net.r("p", "b1", 68e3)
    net.r("b1", "0", 15e3)
    net.r("e1", "0", 1000)
    net.r("p", "c1", 2700)
    net.r("p", "e2", 560)
    net.r("c2", "0", 3300)
    net.r("e3", "0", 1200)
    net.r("e3", "0", 8200)
    net.bjt("b1", "c1", "e1", 150, 0.65)
    net.bjt("c1", "c2", "e2", 80, 0.7, -1)
    net.bjt("c2", "p", "e3", 150, 0.65)
    found = points(stages, {"A": NPN, "B": PNP}, load={"resistance": 8200})
    agree(found, net, {"Q1": ("b1", "c1", "e1"), "Q2": ("c1", "c2", "e2"), "Q3": ("c2", "p", "e3")})


def test_jfet_into_npn_into_mosfet_follower():
    stages = [
        {"kind": "common-source", "device": "J", "rg": 1e6, "rs": 470.0, "rd": 2200.0},
        {"kind": "common-emitter", "device": "A", "re": 1800.0, "re_bypassed": 330.0, "rc": 1000.0},
        {"kind": "source-follower", "device": "M", "rs": 680.0},
    ]
    net = Net(p=12.0)
    net.r("g1", "0", 600)
    net.r("g1", "0", 1e6)
    net.r("s1", "0", 470)
    net.r("p", "d1", 2200)
    net.r("e2", "0", 2130)
    net.r("p", "c2", 1000)
    net.r("s3", "0", 680)
    net.square("g1", "d1", "s1", 2 * 0.008 / 2.5**2, -2.5)
    net.bjt("d1", "c2", "e2", 150, 0.65)
    net.square("c2", "p", "s3", 0.02, 1.8)
    found = points(stages, {"J": JFET, "A": NPN, "M": NMOS})
    agree(found, net, {"Q1": ("g1", "d1", "s1"), "Q2": ("d1", "c2", "e2"), "Q3": ("c2", "p", "s3")})


def test_five_mosfets_in_a_row():
    stages = [{"kind": "common-source", "device": "M", "rg": 1e6, "rs": 100.0, "rd": 220.0, "lower_to": "negative"}]
    stages += [{"kind": "common-source", "device": "M", "rs": 600.0 + 50 * k, "rd": 120.0} for k in range(4)]
    net = Net(p=12.0, n=-3.0)
    net.r("d0", "0", 600)
    net.r("d0", "0", 1e6)
    for k in range(1, 6):
        net.r(f"s{k}", "n" if k == 1 else "0", 100.0 if k == 1 else 600.0 + 50 * (k - 2))
        net.r("p", f"d{k}", 220.0 if k == 1 else 120.0)
        net.square(f"d{k - 1}", f"d{k}", f"s{k}", 0.02, 1.8)
    found = points(stages, {"M": NMOS}, supply={"positive": 12, "negative": -3})
    agree(found, net, {f"Q{k}": (f"d{k - 1}", f"d{k}", f"s{k}") for k in range(1, 6)})


def test_valve_into_cathode_follower():
    stages = [
        {"kind": "common-cathode", "device": "V", "couple": 1e-7, "rg": 1e6, "rk": 1500.0, "ra": 100e3},
        {"kind": "cathode-follower", "device": "V", "rk": 82e3, "stopper": 1000.0},
    ]
    p = 0.0012 / (1.5 * 0.0012 / 0.0016) ** 1.5
    net = Net(p=250.0)
    net.r("g1", "0", 1e6)
    net.r("k1", "0", 1500)
    net.r("p", "a1", 100e3)
    net.r("k2", "0", 82e3)
    net.valve("g1", "a1", "k1", 60, p)
    net.valve("a1", "p", "k2", 60, p)
    found = points(stages, {"V": TRIODE}, supply={"positive": 250})
    agree(found, net, {"Q1": ("g1", "a1", "k1"), "Q2": ("a1", "p", "k2")})


def test_follower_into_common_base_on_one_tail_resistor():
    stages = [
        {"kind": "emitter-follower", "device": "A", "couple": 1e-6, "rb2": 10e3, "re": 4700.0, "lower_to": "negative"},
        {"kind": "common-base", "device": "A", "rc": 3300.0, "rb2": 4700.0, "cb": 1e-6},
    ]
    net = Net(p=12.0, n=-12.0)
    net.r("b1", "0", 10e3)
    net.r("e", "n", 4700)
    net.r("b2", "0", 4700)
    net.r("p", "c2", 3300)
    net.bjt("b1", "p", "e", 150, 0.65)
    net.bjt("b2", "c2", "e", 150, 0.65)
    found = points(stages, {"A": NPN}, supply={"positive": 12, "negative": -12})
    agree(found, net, {"Q1": ("b1", "p", "e"), "Q2": ("b2", "c2", "e")})


def test_two_followers_of_which_the_first_has_only_the_second_to_feed():
    stages = [
        {"kind": "emitter-follower", "device": "A", "couple": 1e-6, "rb1": 1e6, "rb2": 1e6},
        {"kind": "emitter-follower", "device": "A", "re": 1000.0},
    ]
    net = Net(p=12.0)
    net.r("p", "b1", 1e6)
    net.r("b1", "0", 1e6)
    net.r("e2", "0", 1000)
    net.bjt("b1", "p", "e1", 150, 0.65)
    net.bjt("e1", "p", "e2", 150, 0.65)
    found = points(stages, {"A": NPN})
    agree(found, net, {"Q1": ("b1", "p", "e1"), "Q2": ("e1", "p", "e2")})


def test_a_jfet_follower_that_only_feeds_a_base():
    stages = [
        {"kind": "source-follower", "device": "J", "couple": 1e-6, "rg": 1e6},
        {"kind": "common-emitter", "device": "A", "re": 1000.0, "rc": 1000.0},
    ]
    net = Net(p=12.0)
    net.r("g1", "0", 1e6)
    net.r("e2", "0", 1000)
    net.r("p", "c2", 1000)
    net.square("g1", "p", "s1", 2 * 0.008 / 2.5**2, -2.5)
    net.bjt("s1", "c2", "e2", 150, 0.65)
    found = points(stages, {"J": JFET, "A": NPN})
    agree(found, net, {"Q1": ("g1", "p", "s1"), "Q2": ("s1", "c2", "e2")})


def test_a_cascode_written_as_two_stages():
    stages = [
        {"kind": "common-emitter", "device": "A", "couple": 1e-6, "rb1": 47e3, "rb2": 10e3, "re": 1000.0},
        {"kind": "common-base", "device": "A", "rb1": 22e3, "rb2": 22e3, "cb": 1e-6, "rc": 2200.0},
    ]
    net = Net(p=12.0)
    net.r("p", "b1", 47e3)
    net.r("b1", "0", 10e3)
    net.r("e1", "0", 1000)
    net.r("p", "b2", 22e3)
    net.r("b2", "0", 22e3)
    net.r("p", "c2", 2200)
    net.bjt("b1", "m", "e1", 150, 0.65)
    net.bjt("b2", "c2", "m", 150, 0.65)
    found = points(stages, {"A": NPN})
    agree(found, net, {"Q1": ("b1", "m", "e1"), "Q2": ("b2", "c2", "m")})


def test_feedback_resistor_and_ladder_between_direct_coupled_stages():
    stages = [
        {"kind": "common-emitter", "device": "A", "couple": 1e-6, "rf": 220e3, "rb2": 100e3, "stopper": 470.0,
         "re": 220.0, "rc": 2200.0},
        {"name": "L1", "kind": "ladder", "arms": [{"series_r": 1000.0}, {"shunt_r": 33e3}, {"series_r": 150.0}]},
        {"kind": "common-emitter", "device": "A", "re": 3300.0, "rc": 1500.0},
    ]
    net = Net(p=12.0)
    net.r("a1", "0", 100e3)
    net.r("a1", "b1", 470)
    net.r("b1", "c1", 220e3)
    net.r("e1", "0", 220)
    net.r("p", "c1", 2200)
    net.r("c1", "m", 1000)
    net.r("m", "0", 33e3)
    net.r("m", "b2", 150)
    net.r("e2", "0", 3300)
    net.r("p", "c2", 1500)
    net.bjt("b1", "c1", "e1", 150, 0.65)
    net.bjt("b2", "c2", "e2", 150, 0.65)
    found = points(stages, {"A": NPN})
    agree(found, net, {"Q1": ("b1", "c1", "e1"), "Q3": ("b2", "c2", "e2")})


def test_a_stated_current_is_a_source_in_its_neighbours_network():
    first = {"kind": "common-emitter", "device": "A", "couple": 1e-6, "rb1": 100e3, "rb2": 22e3, "re": 680.0,
             "rc": 4700.0, "ic": 1e-3}
    second = {"kind": "common-emitter", "device": "A", "re": 2200.0, "rc": 1500.0}
    found = points([first, second], {"A": NPN}, supply={"positive": 15})
    ib = (15 - 4.7 - 0.65) / (4700 + 151 * 2200)
    assert found["Q2"].current == pytest.approx(150 * ib, rel=1e-12)
    assert found["Q1"].output_v == pytest.approx(15 - 4.7 - ib * 4700, rel=1e-12)


def test_stated_pair_on_a_common_tail():
    stages = [
        {"kind": "emitter-follower", "device": "A", "couple": 1e-6, "rb2": 10e3, "ic": 1e-3},
        {"kind": "common-base", "device": "A", "rc": 3300.0, "ic": 1e-3},
    ]
    found = points(stages, {"A": NPN}, supply={"positive": 12, "negative": -12})
    tail = -1e-3 / 150 * 10e3 - 0.65
    assert found["Q1"].lower_v == pytest.approx(tail, rel=1e-12)
    assert found["Q2"].lower_v == found["Q1"].lower_v
    assert found["Q2"].output_v == pytest.approx(12 - 3.3, rel=1e-12)


@pytest.mark.parametrize("count", [8, 24])
def test_long_direct_coupled_rows_are_solved(count):
    first = {"kind": "emitter-follower", "device": "A", "couple": 1e-6, "rb1": 47e3, "rb2": 47e3, "re": 4700.0}
    up = {"kind": "emitter-follower", "device": "B", "re": 4700.0}
    down = {"kind": "emitter-follower", "device": "A", "re": 4700.0}
    stages = [first, *([up, down] * (count // 2))]
    found = points(stages, {"A": NPN, "B": PNP})
    net = Net(p=12.0)
    net.r("p", "b", 47e3)
    net.r("b", "0", 47e3)
    nodes, before = {}, "b"
    for k, stage in enumerate(stages):
        lower, sign = f"e{k}", 1 if stage["device"] == "A" else -1
        net.r(lower, "0" if sign > 0 else "p", 4700)
        net.bjt(before, "p" if sign > 0 else "0", lower, 150 if sign > 0 else 80, 0.65 if sign > 0 else 0.7, sign)
        nodes[f"Q{k + 1}"] = (before, "p" if sign > 0 else "0", lower)
        before = lower
    agree(found, net, nodes)


def test_what_nothing_settles_spoils_no_neighbour():
    stages = [
        {"kind": "common-emitter", "device": "A", "couple": 1e-6, "re": 1000.0, "rc": 1000.0},  # its base floats
        {"kind": "emitter-follower", "device": "A", "re": 1000.0},
        {"kind": "common-source", "device": "J", "couple": 1e-8, "rg": 1e6, "rs": 470.0, "rd": 2200.0},
    ]
    found = points(stages, {"A": NPN, "J": JFET})
    assert found["Q1"].current is None and found["Q2"].current is None and found["Q2"].output_v == 12
    assert found["Q3"].current > 0 and all(point.converged is True for point in found.values())


def test_a_stated_neighbour_does_not_settle_a_floating_base():
    stages = [
        {"kind": "common-emitter", "device": "A", "couple": 1e-6, "re": 1000.0, "rc": 1000.0},
        {"kind": "emitter-follower", "device": "A", "re": 1000.0, "ic": 5e-3},
    ]
    found = points(stages, {"A": NPN})
    assert found["Q1"].current is None and found["Q1"].output_v is None
    assert found["Q2"].control_v == pytest.approx(5e-3 * 151 / 150 * 1000 + 0.65, rel=1e-12)


def test_ends_where_nothing_flows():
    ladder = {"name": "L1", "kind": "ladder", "arms": [{"shunt_c": 1e-9}, {"series_r": 9240.0}, {"series_r": 3.3}]}
    stage = {"kind": "common-base", "device": "B", "couple": 1e-6, "rc": 130.0, "re": 2e4}
    assert points([stage, ladder], {"B": PNP})["Q1"].converged is True
    dead = {"kind": "source-follower", "device": "M", "couple": 1e-8, "rg": 1e6}
    fed = {"kind": "emitter-follower", "device": "A", "re": 1000.0}
    found = points([dead, fed], {"M": NMOS, "A": NPN})
    assert found["Q1"].current == 0 and found["Q1"].converged is True


def test_a_large_feedback_resistor_beside_amperes():
    stages = [
        {"kind": "emitter-follower", "device": "B", "couple": 1e-6, "rb1": 4410.0, "re": 1730.0, "lower_to": "ground"},
        {"kind": "common-emitter", "device": "A", "rb1": 35300.0, "rc": 12600.0, "rf": 591e3},
    ]
    found = points(stages, {"A": NPN, "B": PNP}, supply={"positive": 250, "negative": -12})
    assert found["Q1"].converged is True and found["Q1"].lower_v == pytest.approx(0.65, rel=1e-13)
