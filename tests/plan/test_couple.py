"""The least capacitance for a lower edge: against closed forms, random allocations, every neighbour; never a miss."""

from __future__ import annotations

import itertools
from math import log, pi, sqrt

import numpy as np
import pytest
from scipy.optimize import brentq

from polebook import series
from polebook.book.ledger import ledger
from polebook.chain import read
from polebook.plan.couple import couple, lower_edge
from polebook.plan.couple_end import LowEnd, Mark
from polebook.plan.couple_least import least
from polebook.plan.couple_snap import snapped
from polebook.problem import ProblemsFound
from polebook.solve.edges import HALF_POWER
from tests.cli.helpers import CHAINS, PHOTODIODE, ROOT, SIX
from tests.published.checks import CHAINS as PUBLISHED

TEXTS = {path.stem: path.read_text(encoding="utf-8") for path in CHAINS.glob("*.toml")}
# gates take no current, so that no corner touches another; each coupling sees 1k ahead and what follows
GATE = """
[[stage]]
name = "J{0}"
kind = "common-source"
device = "J"
couple = "{1}"
rg = "{2}"
id = "1m"
rd = "1k"
"""
CARD = """
[device.J]
family = "jfet"
gm = "5m"
"""
FEEDBACK = """format = 1
[supply]
positive = "12"
[source]
kind = "voltage"
resistance = "600"
[[stage]]
name = "Q1"
kind = "common-emitter"
device = "VF"
couple = "10u"
rb1 = "56k"
rb2 = "12k"
rc = "2k2"
re = "33"
re_bypassed = "680"
ce = "100u"
rf = "10k"
c_rf = "10u"
[[stage]]
name = "P1"
kind = "ladder"
arms = [{ series_r = "1k" }, { shunt_l = "1", role = "low" }, { series_c = "10u" }]
[load]
couple = "10u"
resistance = "10k"
[device.VF]
family = "bjt"
polarity = "npn"
beta = 180
early_voltage = 75
rx = 30
ft = "600M"
ft_ic = "5m"
cob = "1p2"
cob_v = 5
"""


def gates(*ohms, farad="1u", more=""):
    stages = "".join(GATE.format(at + 1, farad, ohm) for at, ohm in enumerate(ohms))
    return f'format = 1\n{more}[source]\nkind = "voltage"\nresistance = "1k"\n{stages}{CARD}'


def end(text, edge):
    """The low end of a chain, its paths and the mark of the edge."""
    of = ledger(read.parse(text, "x.toml"))
    parts = [at for at, part in enumerate(of.solution.circuit.layout.parts) if (part.type, part.role) == ("C", "low")]
    return LowEnd(of.solution, parts, edge, 0.05), [Mark(edge, HALF_POWER)]


def test_like_corners_get_what_the_law_of_shrinkage_gives_them():
    for count in (1, 2, 4, 7):
        found = couple(gates(*["100k"] * count), "x.toml", 100.0)
        each = 1 / (2 * pi * 100.0 * 101e3 * sqrt(2 ** (1 / count) - 1))
        assert [one.farads["least"] for one in found.sized] == pytest.approx([each] * count, rel=1e-7)


def test_unlike_corners_that_do_not_touch_have_the_values_of_the_closed_form():
    """With q = corner/f: a sum of a/q is least at a given product of 1 + q² where a·(1 + q²)/q³ is one for all."""
    ohms = (11e3, 48e3, 1001e3)
    a = [1 / (2 * pi * 50.0 * ohm) for ohm in ohms]

    def q_of(one, level):
        return brentq(lambda q: log(one) + log(1 + q * q) - 3 * log(q) - level, 1e-6, 1e3, xtol=1e-14)

    level = brentq(lambda x: sum(log(1 + q_of(one, x) ** 2) for one in a) - log(2), -20, 15, xtol=1e-13)
    found = couple(gates("10k", "47k", "1M"), "x.toml", 50.0)
    expected = [one / q_of(one, level) for one in a]
    assert [one.farads["least"] for one in found.sized] == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("name", ["wire-break-listener", "rain-radar", "leaf-probe"])
def test_at_the_least_each_owns_what_it_has_of_the_capacitance(name):
    chain = read.parse(TEXTS[name], "x.toml")
    found = couple(TEXTS[name], "x.toml")
    paths = [one.path for one in found.sized]
    best = np.array([one.farads["least"] for one in found.sized])
    assert not any(one.bound for one in found.sized)
    low, _ = end(TEXTS[name], chain.numbers["target.lower"])
    slopes = low.slopes(best, found.edge_hz)
    assert slopes / slopes.sum() == pytest.approx(best / best.sum(), rel=2e-5)
    assert lower_edge(chain, paths, best) == pytest.approx(found.edge_hz, rel=1e-9)
    assert found.edges["least"] == pytest.approx(found.edge_hz, rel=1e-9)


@pytest.mark.parametrize("name", ["wire-break-listener", "six-stage"])
def test_no_random_allocation_with_the_same_edge_has_a_smaller_total(name):
    """500 of them: 250 far away, 250 within 10 % of the least, each scaled to the edge."""
    rng = np.random.default_rng(8)
    found = couple(TEXTS[name], "x.toml")
    best = np.array([one.farads["least"] for one in found.sized])
    low, (mark,) = end(TEXTS[name], found.edge_hz)
    totals = []
    for at in range(500):
        spread = 3.0 if at % 2 else 0.1
        drawn = best * np.exp(rng.uniform(-spread, spread, best.size))
        scale = brentq(lambda x, drawn=drawn: low.loss(drawn * np.exp(x), mark.hz) - mark.bound, -4, 4, xtol=1e-8)
        totals.append(float(drawn.sum() * np.exp(scale)))
    assert min(totals) > best.sum()
    assert min(totals) < best.sum() * 1.005  # the draw comes near enough to tell


def test_what_a_book_takes_is_near_the_least():
    """Sedra and Smith, example 5.19: 80 % of the corner to the bypass, 10 % to each coupling. At the same exact edge
    that is within 1 % of the least."""
    text = (PUBLISHED / "LF-2.toml").read_text(encoding="utf-8")
    found = couple(text, "x.toml", ledger(read.parse(text, "x.toml")).lower_hz)
    assert found.totals["now"] == pytest.approx(30.9e-6)
    assert 0.99 * found.totals["now"] < found.totals["least"] < found.totals["now"]
    assert found.sized[1].owns == pytest.approx(0.89, abs=0.01)


@pytest.mark.parametrize("row", ["E3", "E6", "E12"])
@pytest.mark.parametrize("name", ["shellac-desk", "frost-line-sounder", "rain-radar"])
def test_what_fits_is_the_least_of_all_neighbours(name, row):
    """Every combination of values up to three steps either way (two for four parts) is tried."""
    edge = read.parse(TEXTS[name], "x.toml").numbers["target.lower"]
    low, marks = end(TEXTS[name], edge)
    best = least(low, marks)
    found = snapped(low, best, row, marks)
    reach = 3 if best.size < 4 else 2
    choices = []
    for farad, floor in zip(best.tolist(), low.least.tolist(), strict=True):
        values = [series.at_least(farad, row)]
        for _ in range(reach):
            values = [series.down(values[0], row), *values, series.up(values[-1], row)]
        choices.append([value for value in values if value >= floor])
    fitting = [sum(one) for one in itertools.product(*choices)
               if sum(one) < found.sum() * (1 - 1e-9) and low.held(np.array(one), marks)]
    assert low.held(found, marks)
    assert all(series.holds(value, row) for value in found.tolist())
    assert fitting == []


@pytest.mark.parametrize(("row", "factor"), [("E3", 0.3), ("E6", 4.0), ("E48", 1.3)])
@pytest.mark.parametrize("name", sorted(TEXTS))
def test_what_is_proposed_never_misses_the_edge(name, row, factor):
    """As the file would be read with the proposal in it."""
    text = TEXTS[name] + f'\n[preferred]\ncapacitor = "{row}"\n'
    edge = factor * read.parse(text, "x.toml").numbers["target.lower"]
    found = couple(text, "x.toml", edge)
    after = ledger(read.parse(found.proposal.edit.apply(text), "x.toml"))
    assert after.lower_hz == found.edges["value"]
    assert 0.0 < after.lower_hz <= edge
    assert all(series.holds(one.farads["value"], row) for one in found.sized)
    assert found.totals["least"] <= found.totals["value"] * (1 + 1e-9)
    assert after.lower_hz > 0.6 * edge or row == "E3" or any(one.bound for one in found.sized)


def test_the_two_rules_are_what_they_say():
    found = couple(gates("100k", "220k"), "x.toml", 20.0)
    first, second = found.sized
    assert first.ohm == pytest.approx(101e3)
    assert first.farads["each"] == series.at_least(2 / (2 * pi * 20.0 * 101e3), "E12")
    assert second.farads["like"] == series.at_least(1 / (2 * pi * 20.0 * 221e3 * sqrt(sqrt(2) - 1)), "E12")
    assert found.edges["each"] < 20.0  # each at half the edge: 0.64 of it at most


def test_only_what_is_free_moves():
    found = couple(TEXTS["six-stage"], "x.toml", 5000.0, ["load.couple", "Q3.ce"])
    assert [one.path for one in found.sized] == ["Q3.ce", "load.couple"]
    before = read.parse(TEXTS["six-stage"], "x.toml").numbers
    after = read.parse(found.proposal.edit.apply(TEXTS["six-stage"]), "x.toml").numbers
    assert {path for path in before if before[path] != after[path]} == {"Q3.ce", "load.couple"}


def test_the_file_says_what_is_free():
    text = TEXTS["six-stage"].replace('name   = "Q1"', 'name   = "Q1"\nfree = ["cb", "rc"]', 1)
    assert [one.path for one in couple(text, "x.toml").sized] == ["Q1.cb"]
    assert [one.path for one in couple(text, "x.toml", free=["Q3.couple"]).sized] == ["Q3.couple"]


def test_a_bypass_that_alone_can_never_lose_three_decibels_does_not_vanish():
    """Without the bound the valve's ck would go: all of it costs less than the budget."""
    found = couple(TEXTS["shellac-desk"], "x.toml")
    (bypass,) = [one for one in found.sized if one.bound]
    assert bypass.path == "V1.ck"
    assert bypass.farads["least"] == pytest.approx(1 / (2 * pi * found.edge_hz * bypass.ohm), rel=1e-6)


@pytest.mark.parametrize("edge", [300.0, 500.0, 2000.0])
def test_feedback_through_a_capacitor_does_not_buy_the_edge_with_a_rise(edge):
    found = couple(FEEDBACK, "x.toml", edge)
    assert found.proposal.after.lower_hz <= edge
    assert found.proposal.after.solution.band.peaking_db <= 0.1 + 1e-6
    assert {one.path for one in found.sized} >= {"P1.arms.3.series_c", "Q1.c_rf"}


def test_the_rise_that_the_file_allows_is_used():
    """Where the feedback may lift the low end by 1 dB, less capacitance will do."""
    text = FEEDBACK.replace("[device.VF]", '[target]\npeaking = "1 dB"\n[device.VF]')
    wide, tight = couple(text, "x.toml", 500.0), couple(FEEDBACK, "x.toml", 500.0)
    assert wide.totals["least"] <= tight.totals["least"] * (1 + 1e-9)
    assert wide.proposal.after.solution.band.peaking_db <= 1.0 + 1e-6


def test_with_every_value_at_its_lower_limit():
    found = couple(TEXTS["wire-break-listener"], "x.toml")
    assert found.tolerance == 0.05
    assert found.low_hz == pytest.approx(found.edges["value"] / 0.95, rel=1e-3)  # all of the low end is theirs


def refused(text, *args):
    with pytest.raises(ProblemsFound) as found:
        couple(text, "x.toml", *args)
    (problem,) = found.value.problems
    return f"{problem.what}|{problem.why}|{problem.fix}"


def test_what_cannot_be_is_told():
    assert "no lower edge is wanted" in refused(gates("1k"))
    assert "did you mean Q1.couple?" in refused(TEXTS["six-stage"], 5000.0, ["Q1.cuple"])
    assert "lies above the band" in refused(TEXTS["six-stage"], 3e6)
    told = refused(FEEDBACK, 100.0)
    assert "221 Hz" in told and "P1.arm2 owns 100 %" in told and "change P1.arm2" in told
    assert "free Q4.couple too" in refused(TEXTS["six-stage"], 1500.0, ["Q1.couple"])
    assert "nothing to size" in refused(gates("1k").replace('couple = "1u"\n', ""), 20.0)
    unstable = (ROOT / "tests/independent/chains/oscillating.toml").read_text(encoding="utf-8")
    assert "no edges" in refused(unstable.replace("[[stage]]", '[[stage]]\ncouple = "1u"', 1), 20.0)


def test_a_coupling_that_sees_a_short_is_left_alone():
    """Behind an ideal source into a gate that takes nothing a coupling has no corner."""
    text = gates("100k", "100k").replace('rg = "100k"\n', "", 1)
    found = couple(text, "x.toml", 20.0)
    assert found.left == ("J1.couple",)
    assert [one.path for one in found.sized] == ["J2.couple"]


def test_the_photodiode_keeps_its_other_targets():
    found = couple(PHOTODIODE.read_text(encoding="utf-8"), "x.toml")
    assert found.proposal.met
    assert found.totals["value"] < 0.2 * found.totals["now"]
    assert couple(SIX.read_text(encoding="utf-8"), "x.toml").proposal.met
