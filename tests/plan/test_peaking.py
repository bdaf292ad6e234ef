"""Peaking coils: flat where the 50-digit solution is flat, widest where neither more nor less is wider."""

from __future__ import annotations

import tomllib
from functools import cache

import pytest

from polebook import series
from polebook.book.ledger import ledger
from polebook.chain.read import parse
from polebook.plan.compensate_search import changed
from polebook.plan.peaking import NAMES, coil_task, coils
from polebook.plan.peaking_shape import flatness
from polebook.problem import ProblemsFound
from tests.cli.helpers import LISTENER, ROOT
from tests.independent.linear import mp
from tests.independent.solved import Solved

SOUNDER = (ROOT / "chains" / "frost-line-sounder.toml").read_text(encoding="utf-8")
TEXT = LISTENER.read_text(encoding="utf-8")
TWO = """format = 1
[source]
kind = "voltage"
resistance = "2k"
capacitance = "4p"
[[stage]]
name = "M1"
kind = "common-source"
device = "N"
rd = "2k2"  # ours
c_load = "1p"
[[stage]]
name = "M2"
kind = "common-source"
device = "N"
rd = "1k"
c_load = "2p"
[device.N]
family = "mosfet"
gm = "4m"
ro = "30k"
cgs = "p4"
cgd = "60f"
cdb = "p2"
"""


@cache
def found(text, stage):
    of = coil_task(text, "x.toml", stage)
    return of, {coil.name: coil for _, _, coil in coils(of)}


def exact(henry):
    """The 50-digit solution of the two-stage chain with a coil at its first stage."""
    line = f"l_peak = {henry!r}\n" if henry else ""
    return Solved(tomllib.loads(TWO.replace('rd = "2k2"  # ours\n', f'rd = "2k2"\n{line}')))


def bend(solved):
    """|H(f)|²/gain² - 1 over f² at a frequency far below all corners: half its second derivative at 0."""
    f = mp.mpf(10)
    return float((abs(solved.h(f) / solved.gain) ** 2 - 1) / f**2)


def delay_bend(solved):
    """What the phase φ has of f³, by (φ(2f) - 2·φ(f))/(6·f³): the second derivative of the delay but for a factor."""
    f = mp.mpf(10)
    once, twice = (mp.arg(solved.h(k * f) / solved.gain) for k in (1, 2))
    return float((twice - 2 * once) / (6 * f**3))


def test_flat_is_flat_in_50_digits():
    _, coil = found(TWO, "M1")
    assert abs(bend(exact(coil["flat"].henry))) < 1e-9 * abs(bend(exact(0)))
    assert bend(exact(0)) < 0.0 < bend(exact(1.01 * coil["flat"].henry))


def test_the_delay_is_flat_in_50_digits():
    _, coil = found(TWO, "M1")
    assert abs(delay_bend(exact(coil["delay"].henry))) < 1e-9 * abs(delay_bend(exact(0)))


@pytest.mark.parametrize(("text", "stage"), [(TWO, "M1"), (SOUNDER, "Q1")])
def test_the_widest_is_a_maximum(text, stage):
    of, coil = found(text, stage)
    best = coil["wide"].figures.edge_hz

    def edge(share):
        return ledger(changed(of.chain, {of.path: share * coil["wide"].henry})).upper_hz
    for step in (0.3, 1e-2, 1e-4):
        assert edge(1 - step) < best > edge(1 + step)
    assert coil["flat"].figures.edge_hz < best
    assert edge(1 + 1e-7) == pytest.approx(best, rel=1e-12)  # level there
    assert coil["wide"].factor == pytest.approx(best / of.without.upper_hz)


def test_with_little_else_in_the_chain_the_factors_are_near_the_published_ones():
    """The first stage's node has most of the time constants of the demo; the coil for the whole chain is larger."""
    of, coil = found(SOUNDER, "Q1")
    assert of.node == "n1" and 0.6 < of.share < 0.8
    assert coil["flat"].m == pytest.approx(0.414, rel=0.1)
    assert 1.5 < coil["flat"].factor < 1.72
    assert coil["flat"].figures.peaking_db == pytest.approx(0.0, abs=1e-9)
    assert coil["delay"].figures.overshoot_percent < 0.1 * coil["flat"].figures.overshoot_percent + 0.1


def test_a_flat_middle_may_rise_further_out():
    """Where other nodes lose more than this one, the coil has to make up for them, and shows."""
    of, coil = found((ROOT / "chains" / "six-stage.toml").read_text(encoding="utf-8"), "Q3")
    assert of.share < 0.3
    assert coil["flat"].m > 1.0
    assert coil["flat"].figures.peaking_db > 0.2


def test_the_coil_to_buy_is_verified_as_a_file():
    of, coil = found(SOUNDER, "Q1")
    for name in NAMES:
        (key,) = coil[name].bought.keys
        assert key.value == series.nearest(coil[name].henry, of.chain.preferred["inductor"])
        after = coil[name].bought.edit.apply(SOUNDER)
        assert ledger(parse(after, "x.toml")).upper_hz == coil[name].bought_figures.edge_hz
        assert "a little under half of R²C" in after


def test_the_shape_is_that_of_poles_and_zeros():
    """c_k of a chain is (sum of 1/p^k - sum of 1/z^k)/k, here over the exact ones."""
    now = ledger(parse(TWO, "x.toml"))
    roots, zeros = ([root.value for root in now.poles.roots], [root.value for root in now.zeros])
    found = flatness(now)
    exact = [sum((1 / p**k).real for p in roots) - sum((1 / z**k).real for z in zeros) for k in (2, 3)]
    assert found[1] / found[0] ** 1.5 == pytest.approx(exact[1] / 3 / (exact[0] / 2) ** 1.5, rel=1e-8)


@pytest.mark.parametrize(
    ("text", "stage", "says"),
    [
        (TEXT, "Q3", "takes no l_peak"),
        (TEXT, "Q7", "there is no stage"),
        (TWO.replace('rd = "2k2"  # ours\n', ""), "M1", "no output resistor"),
        (TWO[:TWO.index('[[stage]]\nname = "M2"')].replace('c_load = "1p"\n', "")
         + '[device.N]\nfamily = "mosfet"\ngm = "4m"\n', "M1", "no capacitance"),
    ],
)
def test_what_takes_no_coil_says_why(text, stage, says):
    with pytest.raises(ProblemsFound, match=says):
        coil_task(text, "x.toml", stage)


def test_a_stop_ends_it_early():
    of, _ = found(TWO, "M1")
    done = []
    for step in coils(of, lambda: bool(done)):
        done.append(step)
    assert [count for count, _, _ in done] == [1]


def test_a_chain_that_rises_already_needs_none():
    text = TWO.replace('rd = "1k"\n', 'rd = "1k"\nl_peak = "20u"\n')
    _, coil = found(text, "M1")
    assert coil["flat"].henry is None
    assert coil["flat"].why == "without a coil the response rises already at the upper end of the band"
