"""Every build against solutions of that build alone: the ledger, and two that share nothing with it."""

import tomllib
from dataclasses import replace
from math import log

import mpmath
import numpy as np
import pytest

from polebook.book import targets
from polebook.circuit.build import values
from polebook.plan.spread.alone import alone, with_numbers
from polebook.plan.spread.block import Engine
from polebook.plan.spread.draws import drawn
from polebook.plan.spread.figures import figures
from polebook.plan.spread.judge import met
from polebook.plan.spread.linear import as_filed, slopes
from polebook.plan.spread.nominal import nominal
from polebook.plan.spread.stability import UNTOLD as UNTOLD_NOMINAL
from polebook.plan.spread.states import GOOD, NO_BAND, NO_GAIN, UNSTABLE, UNTOLD
from tests.independent.built import table
from tests.independent.dense_spread import HALF_POWER, edge, matrices
from tests.independent.leverage import Leverage
from tests.laws.chains import BY_NAME, chain
from tests.plan.spread_chains import LOW_PASS, RESONANT, TWO, parsed, run

SEED = 11
SLOW = {"trap-notch", "follower-into-trap"}  # a lossless trap in the band: most builds are solved alone
EDGES = ("lower_edge_hz", "upper_edge_hz")


def same(result, of, builds):
    """Holds the given builds of a spread against the ledger of each."""
    numbers = of.built(SEED, 0, max(builds) + 1)
    for k in builds:
        state, ledger = alone(with_numbers(of.chain, {path: float(x[k]) for path, x in numbers.items()}))
        assert result.state[k] == state, k
        for figure in result.figures:
            single = None if ledger is None else figure.single(ledger)
            ours = result.columns[figure.name][k]
            assert np.isnan(ours) == (single is None), (k, figure.name)
            if single is not None:
                rel, off = (1e-11, 0.0) if figure.ratio else (0.0, 1e-7 if figure.name == "peaking_db" else 1e-11)
                assert ours == pytest.approx(single, rel=rel, abs=off), (k, figure.name)


@pytest.mark.parametrize("name", [name for name in BY_NAME if name not in SLOW])
def test_a_build_is_what_the_ledger_says_of_it(name):
    """Temperature, rails and matching among the draws."""
    of = chain(name)
    numbers = {**of.numbers, "tolerance.supply": 0.03, "tolerance.matching": 0.05}
    wider = with_numbers(of, numbers)
    result = run(wider, 60, seed=SEED, temperature=(-20.0, 60.0))
    same(result, drawn(wider, (-20.0, 60.0)), range(0, 60, 12))


def test_builds_on_either_side_of_stability_are_told_apart():
    """A pair of poles near the axis, and a lossless trap: half of the builds oscillate."""
    of = chain("follower-into-trap")
    result = run(of, 300, seed=SEED)
    assert 100 < (result.state == UNSTABLE).sum() < 200
    assert (result.state == UNTOLD).sum() == 0
    same(result, drawn(of), range(0, 300, 12))


def test_builds_that_latch_are_unstable():
    """Feedback down to d.c. that turns positive: a real pole passes through 0."""
    of = with_numbers(chain("direct-coupled"), {"tolerance.supply": 0.05, "tolerance.resistor": 0.05})
    result = run(of, 2000, seed=SEED, temperature=(-20.0, 70.0))
    found = np.nonzero(result.state == UNSTABLE)[0].tolist()
    assert found
    same(result, drawn(of, (-20.0, 70.0)), [*found[:5], 0, 1])


def test_a_notch_in_the_band_ends_it():
    of = chain("trap-notch")
    result = run(of, 24, seed=SEED)
    assert result.alone
    same(result, drawn(of), range(24))


def test_poles_on_the_axis_make_no_build_unstable():
    """A lossless trap at a stiff node: its poles have no positive real part, and the response does not feel it."""
    trap = LOW_PASS.replace("[{ series_r", '[{ shunt_l = "10u", shunt_c = "1n" }, { series_r')
    of = parsed(trap)
    result = run(of, 50, seed=SEED)
    assert result.failures() == {}
    assert result.alone == 0
    same(result, drawn(of), range(0, 50, 7))


SHARP = {
    "two sharp peaks": '{ series_l = "1u" }, { shunt_c = "1n" }, { series_l = "0.3u" }, { shunt_c = "0.2n" }',
    "sharp peaks far above the band": '{ series_r = "1k" }, { shunt_c = "100p" }, { series_l = "0.1u" }, '
                                      '{ shunt_c = "5p" }, { series_l = "0.05u" }, { shunt_c = "3p" }',
    "one peak": '{ series_l = "10u" }, { shunt_c = "100p" }',
    "a notch": '{ series_r = "1k" }, { shunt_l = "10u", shunt_c = "100p", shunt_r = "2", role = "high" }, '
               '{ shunt_c = "20p" }',
}


@pytest.mark.parametrize("name", SHARP)
@pytest.mark.parametrize("times", [1, 4])
def test_resonances_wander_far_beyond_their_width(name, times):
    """Peaks and notches of some per cent in width, moved by up to 40 %."""
    of = parsed(RESONANT.replace("ARMS", SHARP[name]),
                tolerance=f"inductor = {0.1 * times}\ncapacitor = {0.1 * times}")
    result = run(of, 90, seed=SEED, workers=1)
    same(result, drawn(of), range(0, 90, 8))
    if name != "two sharp peaks":
        assert result.alone == 0


def test_builds_without_a_band_are_told_from_those_with_one():
    of = chain("band-pass")
    result = run(of, 400, seed=SEED)
    assert 100 < (result.state == NO_BAND).sum() < 300
    assert result.failures() == {"no_band": int((result.state == NO_BAND).sum())}
    odd = np.nonzero(result.state == NO_BAND)[0].tolist()
    same(result, drawn(of), [*odd[:6], *range(0, 400, 60)])


def test_a_device_that_is_cut_off_passes_nothing():
    of = with_numbers(chain("mosfets"), {"tolerance.device": 0.6, "tolerance.supply": 0.2})
    result = run(of, 400, seed=SEED)
    cut = np.nonzero(result.state == NO_GAIN)[0].tolist()
    assert cut
    assert result.outside["M2"] >= len(cut)
    assert all(np.isnan(column[cut]).all() for column in result.columns.values())
    same(result, drawn(of), cut[:3])


@pytest.mark.parametrize("name", [name for name in BY_NAME if name not in SLOW and name != "oscillating"])
def test_a_build_is_what_fifty_digits_say_of_it(name):
    """Bias, cards, network and edges drawn up and solved anew from the file's table (tests/independent)."""
    of = drawn(chain(name))
    result = run(chain(name), 40, seed=SEED)
    doc = tomllib.loads(BY_NAME[name].read_text(encoding="utf-8"))
    numbers = of.built(SEED, 0, 40)
    for k in np.nonzero(result.state == GOOD)[0].tolist()[:3]:
        told = {name: float(result.columns[name][k]) for name in EDGES}
        ours = {name: None if np.isnan(hz) else hz for name, hz in told.items()}
        again = Leverage(table(doc, {path: float(x[k]) for path, x in numbers.items()}), ours)
        assert result.columns["gain_db"][k] == pytest.approx(20 * float(mpmath.log10(abs(again.solved.gain))), abs=1e-9)
        for name, x in again.edges.items():
            assert log(ours[name]) == pytest.approx(float(x), abs=1e-9)


def test_a_thousand_builds_are_those_of_a_dense_monte_carlo():
    """The nodal matrix of every build, stamped part by part and given to LAPACK (tests/independent/dense_spread)."""
    of = nominal(drawn(chain("six-stage")))
    result = run(chain("six-stage"), 1000, seed=SEED)
    parts = values(of.circuit, of.drawn.built(SEED, 0, 1000))
    built = matrices(of.circuit.layout, parts, 1000)
    level = result.columns["gain_db"] / 20 * log(10)
    slope = slopes(of.ledger, of.drawn, as_filed(of.drawn), result.figures)

    def loss(x):
        return np.log(np.abs(built.transfer(np.exp(x)))) - level - HALF_POWER

    for name, outward in zip(EDGES, (-1.0, 1.0), strict=True):
        start = np.full(1000, log(result.nominal[name]))
        for draw in of.drawn.draws:
            start += slope[name][draw.name] * draw.off(SEED, 0, 1000)
        assert np.log(result.columns[name]) == pytest.approx(edge(loss, start, outward), abs=1e-9)


JUDGED = ["six-stage", "frost-line-sounder", "photodiode-front", "stated-currents", "direct-mixed"]


@pytest.mark.parametrize("name", JUDGED)
def test_builds_are_judged_as_the_ledger_judges_them(name):
    of = chain(name)
    nominal_result = run(of, 1, seed=SEED)
    wanted = {}
    for target, figure in (("gain", "gain_db"), ("lower", "lower_edge_hz"), ("upper", "upper_edge_hz"),
                           ("peaking", "peaking_db")):
        told = nominal_result.nominal[figure]
        wanted[f"target.{target}"] = 10 ** (told / 20) if target == "gain" else told if told else 1.0
    wanted["target.gain_tolerance"] = 0.1
    of = with_numbers(of, wanted)
    result = run(of, 60, seed=SEED)
    split = drawn(of)
    numbers = split.built(SEED, 0, 60)
    judging = {figure.target: figure.name for figure in result.figures}
    seen = set()
    for k in range(0, 60, 4):
        _, ledger = alone(with_numbers(split.chain, {path: float(x[k]) for path, x in numbers.items()}))
        for target in targets.NAMES[:4]:
            told = next(one.met for one in ledger.targets if one.name == target)
            ours = met(of, target, result.columns[judging[target]], result.state)[k]
            assert bool(told) == ours, (k, target)
            seen.add((target, bool(ours)))
    assert len(seen) >= 5


def test_a_build_without_figures_misses_its_targets():
    of = with_numbers(chain("oscillating"), {"target.gain": 10.0, "target.upper": 1.0})
    result = run(of, 50)
    assert result.failures() == {"unstable": 50}
    assert set(result.nominal.values()) == {None}
    assert run(of, 5, corners=True).corners == ()
    assert {name: share.share for name, share in result.yields().shares.items()} == {"all": 0, "gain": 0, "upper": 0}


def test_where_the_nominal_chain_cannot_be_told_every_build_is_solved_alone():
    of = nominal(drawn(chain("leaf-probe")))
    asked = figures(chain("leaf-probe"))
    blind = Engine(replace(of, right=UNTOLD_NOMINAL), 8).run(of.drawn, SEED, 0, 8, asked)
    told = Engine(of, 8).run(of.drawn, SEED, 0, 8, asked)
    assert (blind.alone, told.alone) == (8, 0)
    for name, column in told.columns.items():
        assert blind.columns[name] == pytest.approx(column, rel=1e-11, abs=1e-7, nan_ok=True)


def test_a_stated_current_stands_and_is_told():
    result = run(parsed(TWO), 10)
    (caution,) = [problem for problem in result.cautions if "stated" in problem.what]
    assert "Q2" in caution.what
    assert "Q1" not in caution.what
    assert caution.severity == "caution"
    assert not any("stated" in problem.what for problem in run(chain("six-stage"), 10).cautions)
