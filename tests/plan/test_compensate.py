"""Compensation: every way does what is wanted, its values obey the laws of the network, what is not there is told."""

from __future__ import annotations

import tomllib
from cmath import isclose
from functools import cache
from math import atan, degrees, log, pi, sqrt

import pytest

from polebook import series
from polebook.book.ledger import ledger
from polebook.chain.read import parse
from polebook.plan.compensate import Wanted, options, task
from polebook.plan.compensate_figures import dominant_hz, upper_poles, upper_zeros
from polebook.plan.compensate_loop import NEVER_BELOW, NO_CROSSING, loop
from polebook.plan.compensate_nodes import two_nodes
from polebook.plan.compensate_search import capacitor, changed, seen_ohm
from polebook.plan.compensate_zero import added, brought
from polebook.problem import ProblemsFound
from tests.cli.helpers import LISTENER, ROOT
from tests.independent.linear import mp
from tests.independent.oracle import Oracle

TEXT = LISTENER.read_text(encoding="utf-8")
PHOTODIODE = (ROOT / "chains" / "photodiode-front.toml").read_text(encoding="utf-8")
EXACT = 1e-9
FET = """format = 1
[source]
kind = "voltage"
resistance = "{rs}"
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
rd = "{rd}"
c_load = "{c2}"
[device.N]
family = "mosfet"
gm = "{gm}"
cgs = "{c1}"
cgd = "{cgd}"
"""
PLAIN = FET.format(rs="100k", rd="20k", c2="1p", gm="2m", c1="0.5p", cgd="50f")
BUFFERED = """format = 1
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "A1"
kind = "block"
gain = 10
rout = "10k"
[[stage]]
name = "A2"
kind = "block"
gain = {gain}
rout = 0
poles = ["3M"]
"""
POLES = """format = 1
[source]
kind = "voltage"
resistance = 0
[[stage]]
name = "A1"
kind = "block"
gain = {gain}
poles = [{poles}]
"""


@cache
def ways(text, stage, what, hz, *only):
    """The task, and every way of a stage, or those named, by its name."""
    of = task(text, "x.toml", stage, Wanted(what, hz))
    return of, {option.name: option for _, _, option in options(of, only=only)}


def edge_of(text, values):
    return ledger(changed(parse(text, "x.toml"), values)).upper_hz


def test_every_way_has_the_wanted_edge():
    of, found = ways(TEXT, "Q2", "edge", 200e3)
    assert list(found) == ["across", "away", "left", "ground"]
    for option in found.values():
        assert edge_of(TEXT, option.values) == pytest.approx(200e3, rel=EXACT), option.name
        assert option.figures.edge_hz == pytest.approx(200e3, rel=EXACT)
    assert set(found["across"].values) == {"Q2.c_comp"} and set(found["ground"].values) == {"Q2.c_load"}
    assert set(found["left"].values) == {"Q2.c_comp", "Q2.r_comp"}
    assert of.today.upper_hz == pytest.approx(399945.96, rel=1e-6)


@pytest.mark.parametrize("hz", [50e3, 390e3])
def test_near_today_and_far_from_it(hz):
    _, found = ways(TEXT, "Q2", "edge", hz, "across", "away", "ground")
    for option in found.values():
        assert edge_of(TEXT, option.values) == pytest.approx(hz, rel=EXACT), option.name


def test_a_way_has_the_wanted_pole():
    _, found = ways(TEXT, "Q2", "pole", 150e3, "away", "ground")
    for option in found.values():
        now = ledger(changed(parse(TEXT, "x.toml"), option.values))
        assert dominant_hz(now) == pytest.approx(150e3, rel=1e-8), option.name
        assert option.figures.first.hz == pytest.approx(150e3, rel=1e-8)


def test_the_values_to_buy_are_of_the_series_and_verified_as_a_file():
    of, found = ways(TEXT, "Q2", "edge", 200e3)
    for option in found.values():
        for key in option.bought.keys:
            row = of.chain.preferred["resistor" if key.path.endswith("r_comp") else "capacitor"]
            assert series.holds(key.value, row)
            assert key.value == series.nearest(option.values[key.path], row)
        after = option.bought.edit.apply(TEXT)
        assert option.bought_figures.edge_hz == ledger(parse(after, "x.toml")).upper_hz
        old, new = ([line.partition("#")[2] for line in text.splitlines() if "#" in line] for text in (TEXT, after))
        assert new == old  # every comment


def test_the_second_round_of_the_same_changes_nothing():
    text = PLAIN.replace('"1p"', '"1p"\nc_comp = "3p3"')
    hz = edge_of(text, {})
    _, found = ways(text, "M1", "edge", hz, "across")
    assert found["across"].values["M1.c_comp"] == pytest.approx(3.3e-12, rel=1e-6)
    assert not found["across"].bought.edit


def test_far_below_all_poles_the_capacitors_are_as_the_resistances_that_they_see():
    chain = parse(PLAIN, "x.toml")
    _, found = ways(PLAIN, "M1", "pole", 10.0, "across", "ground")
    ratio = found["ground"].values["M1.c_load"] / found["across"].values["M1.c_comp"]
    seen = seen_ohm(changed(chain, {"M1.c_comp": 1e-12}), "M1.c_comp") / seen_ohm(chain, "M1.c_load")
    assert seen == pytest.approx(100e3 / 20e3 * (1 + 40) + 1, rel=1e-9)  # (R1·(1 - K) + R2)/R2
    assert ratio == pytest.approx(seen, rel=1e-3)
    assert found["across"].figures.second.hz > 50 * found["ground"].figures.second.hz


@pytest.mark.parametrize("gain", [-100, -1, -0.05, 0.5])
@pytest.mark.parametrize("what", ["edge", "pole"])
def test_across_an_ideal_output_a_capacitor_is_one_to_ground_before_it_times_1_less_k(gain, what):
    """Miller's theorem, exact at every frequency where K is; what the second stage's own pole does to K is left."""
    text = BUFFERED.format(gain=gain).replace('poles = ["3M"]\n', "")
    _, across = ways(text, "A2", what, 20e3, "across")
    _, ground = ways(text, "A1", what, 20e3, "ground")
    farad = across["across"].values["A2.c_bridge"]
    assert ground["ground"].values["A1.c_load"] == pytest.approx(farad * (1 - gain), rel=1e-8)
    assert across["across"].k == pytest.approx(gain)


def test_a_hundred_times_slower_takes_a_hundred_times_the_capacitance():
    slow = FET.format(rs="100k", rd="20k", c2="100p", gm="2m", c1="50p", cgd="5p")
    for name, path in (("across", "M1.c_comp"), ("ground", "M1.c_load")):
        fast = ways(PLAIN, "M1", "edge", 5e4, name)[1][name].values[path]
        other = ways(slow, "M1", "edge", 5e2, name)[1][name].values[path]
        assert other == pytest.approx(100 * fast, rel=1e-8)


@pytest.mark.parametrize("cgd", ["0", "50f", "1p"])
def test_a_bare_device_loses_its_zero_by_1_over_gm(cgd):
    text = FET.format(rs="100k", rd="20k", c2="5p", gm="2m", c1="0.5p", cgd=cgd)
    of, found = ways(text, "M1", "edge", 2e4, "across", "away")
    away = found["away"]
    assert away.values["M1.r_comp"] == pytest.approx(500.0, rel=1e-8)
    bare = upper_zeros(ledger(changed(of.chain, {"M1.c_comp": 0.0})), "M1")
    now = [zero.value for zero in away.figures.zeros]
    assert sum((1 / z).real for z in now) == pytest.approx(sum((1 / z).real for z in bare), rel=1e-6, abs=1e-18)
    assert len(now) == (0 if cgd == "0" else 2)  # with a second capacitance across no resistor sends both away
    (zero,) = found["across"].zeros.came
    assert zero == pytest.approx(2e-3 / (found["across"].values["M1.c_comp"] + float(of.chain.get("device.N.cgd"))))


def test_a_degenerated_stage_takes_as_much_more():
    """1/gm and the emitter's resistor, but for the base current."""
    _, found = ways(TEXT, "Q2", "edge", 200e3)
    assert found["away"].values["Q2.r_comp"] == pytest.approx(13.8 + 47, rel=0.01)


def test_the_zero_lies_on_the_second_pole():
    left = ways(TEXT, "Q2", "edge", 200e3)[1]["left"]
    pole, place = left.on
    assert place == 2 and pole.value == left.figures.second.value
    assert pole.value.imag == 0.0 > pole.value.real
    assert left.zeros.came[0] == pytest.approx(pole.value, rel=2e-6)


def test_the_zero_goes_to_the_third_pole_where_the_second_can_not_be_had():
    """With y21 = 0 at the zero the stage falls in two, and the output side has its pole where s·C2 + G2 + gm = 0."""
    left = ways(PLAIN, "M1", "edge", 5e4)[1]["left"]
    pole, place = left.on
    assert place == 3
    assert pole.value.real == pytest.approx(-(2e-3 + 1 / 20e3) / 1e-12, rel=5e-6)
    assert left.zeros.came[0] == pytest.approx(pole.value, rel=2e-6)


def test_two_nodes_alone_are_the_poles_of_a_stage_that_has_no_others():
    for more in ("", 'c_comp = "2p2"\n'):
        now = ledger(parse(PLAIN.replace("c_load", f"{more}c_load"), "x.toml"))
        for alone, exact in zip(two_nodes(now, "M1"), upper_poles(now), strict=True):
            assert isclose(alone, exact.value, rel_tol=1e-9)
    assert two_nodes(ledger(parse(PHOTODIODE, "x.toml")), "U1") is None  # rf bridges it
    assert two_nodes(ledger(parse(TEXT, "x.toml")), "Q3").__class__ in (tuple, type(None))


def test_what_a_part_brings_to_a_list_of_zeros():
    found = brought([-1e3 + 0j, 2e6 + 0j, -5e8 + 0j], [-1.001e3 + 0j, 9e6 + 0j])
    assert (found.came, found.went) == ((2e6, -5e8), (9e6,))
    assert added([2.0 + 0j, 1j, -1j], [4.0 + 0j]) == 0.25


def test_an_edge_above_what_the_chain_has_is_told_with_figures():
    _, found = ways(TEXT, "Q1", "edge", 1e6)
    assert not found["across"].values and not found["ground"].values
    assert found["across"].why == ("without Q1.c_comp the upper edge lies at 400 kHz, below the wanted 1.00 MHz: "
                                   "a capacitor only lowers it")
    assert "without Q1.c_load" in found["ground"].why
    assert found["left"].why == found["away"].why == found["across"].why


def test_what_is_there_without_it_needs_no_capacitor():
    _, found = ways(PLAIN, "M1", "edge", edge_of(PLAIN, {"M1.c_load": 0.0}), "ground")
    assert "without M1.c_load" in found["ground"].why and "lies at" in found["ground"].why
    assert found["ground"].values == {}


def test_a_figure_that_is_lost_on_the_way_is_told():
    _, found = ways(PHOTODIODE, "U1", "edge", 200e3, "ground")
    why = found["ground"].why
    assert why.startswith("no value of U1.c_load brings the upper edge from 404 kHz to 200 kHz: with ")
    assert "with more the chain oscillates, and from " in why
    chain = parse(PHOTODIODE, "x.toml")
    gap = capacitor(chain, "U1.c_load", 200e3, lambda of: of.upper_hz).gap
    assert gap.above > 200e3 > gap.below
    assert ledger(changed(chain, {"U1.c_load": gap.before})).upper_hz == pytest.approx(gap.above)
    assert ledger(changed(chain, {"U1.c_load": 1.01 * gap.before})).unstable
    assert ledger(changed(chain, {"U1.c_load": gap.after})).upper_hz == pytest.approx(gap.below)


def test_an_edge_right_before_the_band_ends_is_found():
    """With the next value that is looked at the chain has no midband any more."""
    _, found = ways(TEXT, "Q1", "edge", 50e3, "across")
    assert edge_of(TEXT, found["across"].values) == pytest.approx(50e3, rel=EXACT)


def test_a_figure_that_leaps_is_told():
    """A figure with a step in it, as an edge has where a dip of the response comes through the half-power line."""
    chain = parse(PLAIN, "x.toml")
    step = 7e-12

    def leaping(of):
        farad = of.chain.get("M1.c_comp") or 0.0
        return 1e5 if farad < step else 1e4
    found = capacitor(chain, "M1.c_comp", 5e4, leaping)
    assert found.value is None
    assert found.jump[0] == pytest.approx(step, rel=1e-9) and found.jump[1:] == (pytest.approx(1e5), pytest.approx(1e4))


def test_of_several_values_the_least_is_taken():
    """A figure that falls, rises and falls again passes the wanted one three times."""
    chain = parse(PLAIN, "x.toml")

    def waving(of):
        x = log((of.chain.get("M1.c_comp") or 1e-30) / 1e-12)
        return 1e6 if x < -8 else 1e5 * (1.0 - 0.05 * x) if x < 0 else 1e5 * (1.0 + 0.2 * x) if x < 3 else 1e3
    found = capacitor(chain, "M1.c_comp", 1.1e5, waving)
    assert found.value == pytest.approx(1e-12 * 2.718281828459045**-2, rel=1e-6)


@pytest.mark.parametrize(("kind", "says"), [("Q3", "an emitter-follower has no capacitor from its output")])
def test_a_kind_without_one_says_so(kind, says):
    _, found = ways(TEXT, kind, "edge", 100e3)
    assert list(found) == ["across", "ground"]
    assert says in found["across"].why
    assert edge_of(TEXT, found["ground"].values) == pytest.approx(100e3, rel=EXACT)


@pytest.mark.parametrize(("name", "says"), [("Q9", "there is no stage"), ("q2", "did you mean Q2?")])
def test_no_such_stage(name, says):
    with pytest.raises(ProblemsFound) as found:
        task(TEXT, "x.toml", name, Wanted("edge", 1e5))
    assert says in str(found.value)


def test_a_stage_that_is_left_out():
    text = TEXT.replace('name        = "Q2"\n', 'name        = "Q2"\nleft_out = true\n')
    with pytest.raises(ProblemsFound, match="left out"):
        task(text, "x.toml", "Q2", Wanted("edge", 1e5))


def test_a_stop_ends_it_early():
    of = task(TEXT, "x.toml", "Q3", Wanted("edge", 1e5))
    done = []
    for step in options(of, lambda: bool(done)):
        done.append(step)
    assert [count for count, _, _ in done] == [1]


def test_the_margin_of_one_pole():
    now = ledger(parse(POLES.format(gain=1000, poles='"1k"'), "x.toml"))
    for beta in (0.002, 0.1, 1.0):
        found = loop(now, beta)
        rise = sqrt((1000 * beta) ** 2 - 1)
        assert found.gain == pytest.approx(1000 * beta)
        assert found.hz == pytest.approx(1e3 * rise, rel=1e-9)
        assert found.margin_deg == pytest.approx(180 - degrees(atan(rise)), rel=1e-9)
        assert found.lower_hz is None
    found = loop(now, 0.0009)
    assert (found.hz, found.why) == (None, NO_CROSSING)


@pytest.mark.parametrize("gain", [1e4, -1e4])
def test_the_margin_of_three_poles_falls_below_0(gain):
    """Whatever the chain's sign: the loop is closed so that it is negative at midband."""
    now = ledger(parse(POLES.format(gain=gain, poles='"1k", "10k", "100k"'), "x.toml"))
    for beta in (1e-3, 0.1, 1.0):
        found = loop(now, beta)
        turned = sum(degrees(atan(found.hz / pole)) for pole in (1e3, 1e4, 1e5))
        assert found.margin_deg == pytest.approx(180 - turned, rel=1e-9)
    assert found.margin_deg < 0.0 < loop(now, 1e-3).margin_deg


def test_the_margin_tells_whether_the_closed_loop_holds():
    """Of 1 + T with three like poles: it holds as long as T at midband is below 8 (any text on control)."""
    now = ledger(parse(POLES.format(gain=100, poles='"1k", "1k", "1k"'), "x.toml"))
    assert loop(now, 0.08).margin_deg == pytest.approx(0.0, abs=1e-6)
    assert loop(now, 0.0799).margin_deg > 0.0 > loop(now, 0.0801).margin_deg
    assert loop(now, 0.08).hz == pytest.approx(1e3 * sqrt(3), rel=1e-9)


def test_couplings_make_a_margin_at_the_lower_end():
    text = POLES.format(gain=100, poles='"1M"').replace('poles = ["1M"]', 'lower_poles = ["10", "10", "10"]')
    found = loop(ledger(parse(text, "x.toml")), 0.08)
    assert found.lower_hz == pytest.approx(10 / sqrt(3), rel=1e-9)
    assert found.lower_margin_deg == pytest.approx(0.0, abs=1e-6)
    assert (found.hz, found.why) == (None, NEVER_BELOW)


def test_the_50_digit_solution_agrees():
    """The chain with the solved values, drawn and solved once more from its text alone."""
    _, found = ways(TEXT, "Q2", "edge", 200e3)
    for name in ("away", "ground"):
        option = found[name]
        text = TEXT
        for path, value in option.values.items():
            line = f"{path.partition('.')[2]} = {value!r}\n"
            old = next((one for one in text.splitlines(True) if one.startswith("c_comp")), "")
            text = text.replace(old, line) if path == "Q2.c_comp" else text.replace('name        = "Q2"\n',
                                                                                   f'name        = "Q2"\n{line}')
        oracle = Oracle(tomllib.loads(text))
        taus = oracle.time_constants()
        seed = oracle.seed(taus)[2]
        assert float(oracle.edge(seed, 1, oracle.range(taus)[1])) == pytest.approx(200e3, rel=EXACT)
        ours = sorted(zero.hz for zero in option.figures.zeros)
        theirs = sorted(float(abs(zero.s) / (2 * mp.pi)) for zero in _zeros(oracle, 2) if abs(zero.s) > 2 * pi * seed)
        assert ours == pytest.approx(theirs, rel=1e-9)


def _zeros(oracle, line):
    from tests.independent.modes import zeros

    return [zero for zero in zeros(oracle.elements, oracle.nodes, oracle.load) if zero.owner() == line]


@pytest.mark.parametrize("name", ["oscillating", "follower-into-trap", "photodiode-bare", "noninverting"])
def test_odd_chains_are_answered(name):
    """Unstable ones among them: a way or a reason, never an exception."""
    text = (ROOT / "tests" / "independent" / "chains" / f"{name}.toml").read_text(encoding="utf-8")
    now = ledger(parse(text, "x.toml"))
    of = task(text, "x.toml", now.chain.stages[-1].name, Wanted("edge", (now.upper_hz or 1e5) / 3), 0.01)
    found = [option for _, _, option in options(of)]
    assert found
    for option in found:
        assert bool(option.values) != bool(option.why)
