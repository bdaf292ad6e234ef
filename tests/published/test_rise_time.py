"""Rise times in print, of one pole and of like poles in a row. Each is asked of the program and of the independent
solution beside it.

One pole: A. P. Malvino and D. J. Bates, Electronic Principles, example 16-18 (1 us is 350 kHz), and S. Franco, Design
With Operational Amplifiers and Analog Integrated Circuits, example 6.15 (96.8 MHz: 3.6 ns; 75 MHz: 4.7 ns; 23.1 MHz:
15.2 ns): seen as worked in public solution notebooks of the books. The limit 0.34 for many poles in a row and the
addition of squares (G. E. Valley and H. Wallman, Vacuum Tube Amplifiers, chapter 2) are recalled from memory; exact
figures of like poles are from the roots of 1 - exp(-t)·sum of t^k/k!.
"""

from __future__ import annotations

import tomllib
from functools import cache
from math import log, pi, sqrt

import pytest

from polebook.book.ledger import ledger
from polebook.book.pulse import rise_by_edge, rise_by_nodes
from polebook.chain.read import load, parse
from tests.independent.pulse import figures
from tests.independent.solved import Solved
from tests.published.checks import CHAINS, exact, printed

ONE = """
format = 1
[source]
kind = "voltage"
resistance = 1000
[[stage]]
name = "P"
kind = "ladder"
arms = [{{ shunt_c = {farad!r} }}]
"""
# by 0.35/f, which is 0.0009 too long
IN_PRINT = {96.8e6: (3.6e-9, 0.01), 75e6: (4.7e-9, 0.01), 23.1e6: (15.2e-9, 0.0045), 350e3: (1e-6, 0.001)}
EXACT = {1: 2.1972245773362196, 2: 3.3579085614778172, 3: 4.220255009584887, 4: 4.936013505430953, 5: 5.56099856008997}
BY_SQUARES = {1: 2.1972245773362196, 2: 3.1073447968483734, 3: 3.805704603585384, 4: 4.394449154672439,
              5: 4.913143516757031}
TIMES_EDGE = {1: 0.3496991525660617, 2: 0.3439546259251854, 3: 0.3424361077010004, 4: 0.34171591248007654,
              5: 0.3412919119226599}


def program(text: str) -> float:
    return ledger(parse(text, "one.toml")).pulse.rise_time_s


def independent(text: str) -> float:
    return float(figures(Solved(tomllib.loads(text)))["rise_time_s"])


@pytest.mark.parametrize("solver", [program, independent])
@pytest.mark.parametrize("edge", IN_PRINT)
def test_one_pole(solver, edge):
    rise = solver(ONE.format(farad=1 / (2 * pi * 1e3 * edge)))
    printed(rise, *IN_PRINT[edge])
    printed(rise * edge, 0.3497, 0.0002)
    printed(rise * 2 * pi * edge, 2.2, 0.002)
    exact(rise, log(9) / (2 * pi * edge), 1e-11)
    exact(rise_by_edge(edge), rise, 1e-11)


@cache
def in_a_row(count):
    path = CHAINS / f"SHRINK-1-{count}.toml"
    return ledger(load(str(path))), Solved(tomllib.loads(path.read_text(encoding="utf-8")))


@pytest.mark.parametrize("count", EXACT)
def test_like_poles_in_a_row(count):
    found, chain = in_a_row(count)
    tau = 1 / (2 * pi * min(site.pole_hz for site in found.sites if site.pole_hz))
    ours, theirs = found.pulse.rise_time_s, float(figures(chain)["rise_time_s"])
    for rise in (ours, theirs):
        exact(rise / tau, EXACT[count])
        exact(rise * found.upper_hz, TIMES_EDGE[count])
    exact(rise_by_nodes(found.sites) / tau, BY_SQUARES[count])
    exact(rise_by_nodes(found.sites) / tau, sqrt(count) * log(9))


def test_many_poles_come_to_the_limit():
    """Each pole more brings the product nearer to 0.34; five are within half a per cent."""
    products = [in_a_row(count)[0].pulse.rise_time_s * in_a_row(count)[0].upper_hz for count in EXACT]
    assert products == sorted(products, reverse=True)
    printed(products[-1], 0.34, 0.005)
    assert products[-1] > 0.33962444625382665  # that of a Gaussian response
