"""The independent poles, zeros and leverage against themselves and against what is known without them."""

from __future__ import annotations

import tomllib
from functools import cache
from itertools import pairwise
from math import pi
from pathlib import Path

import numpy as np
import pytest

from tests.helpers import DEMOS
from tests.independent.leverage import Leverage
from tests.independent.linear import mp
from tests.independent.modes import Mode, exact_system, pieces, poles, zeros
from tests.independent.polynomial import Polynomial, roots
from tests.independent.solved import Solved

HERE = Path(__file__).parent
CHAINS = {p.stem: p for p in sorted([*DEMOS.glob("*.toml"), *(HERE / "chains").glob("*.toml")])}


@cache
def found(name: str) -> tuple[Solved, list[Mode], list[Mode]]:
    solved = Solved(tomllib.loads(CHAINS[name].read_text(encoding="utf-8")))
    return solved, poles(solved.elements), zeros(solved.elements, solved.nodes, solved.load)


@pytest.mark.parametrize("name", CHAINS)
def test_zeros_over_poles_are_the_response_to_35_digits(name):
    """The response comes from another solution of the nodal equations than the roots: one missing or moved shows."""
    solved, ps, zs = found(name)
    ratios = []
    for f in (1, 1e3, 1e5, 1e7, 1e10):
        s = mp.mpc(0, 2 * mp.pi * f)
        product = mp.mpf(1)
        for z in zs:
            product = product * (s - z.s)
        for p in ps:
            product = product / (s - p.s)
        ratios.append(solved.h(mp.mpf(f)) / product)
    assert max(abs(r / ratios[0] - 1) for r in ratios) < mp.mpf(10) ** -35


@pytest.mark.parametrize("name", CHAINS)
def test_sum_of_reciprocals_is_the_trace(name):
    """Σ1/p = -tr(G⁻¹C), each column by a solution of its own; where there is a pole at 0 there is no G⁻¹."""
    solved, ps, _ = found(name)
    if any(p.s == 0 for p in ps):
        return
    system = solved.full
    columns = {}
    for (row, column), value in system.C.items():
        if value != 0:
            columns.setdefault(column, {})[row] = value
    answers = system.voltages(mp.mpf(0), list(columns.values()))
    trace = sum(x[column] for column, x in zip(columns, answers, strict=True))
    assert abs(sum(1 / p.s for p in ps) + trace) < abs(trace) * mp.mpf(10) ** -30


@pytest.mark.parametrize("name", ["wire-break-listener", "photodiode-front", "oscillating", "trap-notch"])
def test_argument_principle(name):
    """arg det(G + sC) turns once around for every pole inside a circle: circles in the wide gaps between poles."""
    solved, ps, _ = found(name)
    system = exact_system(solved.elements)
    parts = [part for part in pieces(system, system.unknowns, system.unknowns) if part.degree]
    sizes = sorted(float(abs(p.s)) for p in ps)
    gaps = [(a * b) ** 0.5 for a, b in pairwise(sizes) if b > 4 * a]
    for radius in [*gaps[::3], sizes[-1] * 10]:
        points = [radius * mp.expj(mp.pi * k / 60) for k in range(61)]  # the other half is its mirror image
        turn = sum(mp.arg(b / a) for part in parts for a, b in pairwise([part.value(s) for s in points]))
        assert float(turn / mp.pi) == pytest.approx(sum(size < radius for size in sizes), abs=1e-9)


@pytest.mark.parametrize("name", CHAINS)
def test_shares_of_a_pole(name):
    """They sum to 1, and a pair's are alike."""
    for p in found(name)[1]:
        assert abs(sum(p.shares.values()) - 1) < mp.mpf(10) ** -15
    for p in found(name)[1]:
        if mp.im(p.s) > 0:
            (other,) = (q for q in found(name)[1] if abs(q.s - mp.conj(p.s)) < abs(p.s) * mp.mpf(10) ** -40)
            for line, share in p.shares.items():
                assert abs(share - other.shares[line]) < mp.mpf(10) ** -12


def test_shares_are_how_a_pole_moves():
    """-∂ln p/∂ln of all of a stage's C and L together, by solving the poles again."""
    solved, ps, _ = found("wire-break-listener")
    step = mp.mpf(10) ** -15
    keys = {e.key for e in solved.elements if e.reactive}
    for line in {line for line, _ in keys}:
        again = poles(Solved(solved.doc, {key: 1 + step for key in keys if key[0] == line}).elements)
        for p, q in zip(ps, again, strict=True):
            moved = -mp.re(mp.log(q.s / p.s)) / mp.log(1 + step)
            assert abs(moved - p.shares[line]) < mp.mpf(10) ** -12


def test_roots_of_known_polynomials():
    known = [mp.mpf(x) for x in ("-1e-9", "-1", "-1.001", "-1.0011", "-4e7", "3e12", "-8e12")]
    known += [mp.mpc(-1, 50), mp.mpc(-1, -50), mp.mpc(0, 3), mp.mpc(0, -3)]
    with mp.workdps(200):
        c = [mp.mpf(1)]
        for x in known:
            c = [(c[k - 1] if k else 0) - x * (c[k] if k < len(c) else 0) for k in range(len(c) + 1)]
        c = [mp.re(x) for x in c]
    assert len(roots(c)) == len(known)
    for x in roots(c):
        assert min(abs(x - y) / abs(y) for y in known) < mp.mpf(10) ** -48


def test_roots_beside_numpy():
    rng = np.random.default_rng(7)
    for _ in range(10):
        c = rng.normal(size=9)
        ours = np.sort_complex([complex(x) for x in roots([mp.mpf(float(x)) for x in c])])
        np.testing.assert_allclose(ours, np.sort_complex(np.roots(c[::-1])), rtol=1e-9)


def test_degree_counts_what_cancels_exactly():
    """Three equal capacitors in a loop have two poles, not three; one resistor holds nothing: two at 0, and one."""
    third = mp.fdiv(1, 3, dps=50)
    nodes = ("a", "b")
    with mp.workdps(1500):
        C = {(r, c): 2 * third if r == c else -third for r in nodes for c in nodes}
        assert Polynomial({("a", "a"): third}, C, nodes, nodes).degree == 2
        C["b", "b"] = C["a", "a"] = third
        singular = Polynomial({("a", "a"): third}, C, nodes, nodes)
    assert (singular.order, singular.degree) == (1, 1)


RC = """
[source]
kind = "voltage"
resistance = 1000
[[stage]]
name = "L"
kind = "ladder"
arms = [{ shunt_c = 1e-9 }, { series_r = 2000 }, { shunt_c = 3e-9 }]
"""


def test_two_section_ladder_by_hand():
    """1 + s·(R1C1 + (R1 + R2)C2) + s²·R1C1R2C2 = 0."""
    solved = Solved(tomllib.loads(RC))
    expected = np.roots([1e-6 * 6e-6, 1e-6 + 9e-6, 1])
    np.testing.assert_allclose(sorted(float(p.s) for p in poles(solved.elements)), sorted(expected), rtol=1e-12)
    assert zeros(solved.elements, solved.nodes, solved.load) == []


def test_leverage_of_a_low_pass_by_hand():
    """One pole at 1/(2πRC) with R = 1 kΩ ∥ 3 kΩ: shares of R1, R2 and C; the divider's gain is R2/(R1 + R2)."""
    doc = tomllib.loads("""
[source]
kind = "voltage"
resistance = 1000
[[stage]]
name = "L"
kind = "ladder"
arms = [{ shunt_r = 3000 }, { shunt_c = "1n" }]
""")
    lever = Leverage(doc, {"lower_edge": None, "upper_edge": 1 / (2 * pi * 750e-9)})
    expected = {("source", "resistance"): (-0.25, -0.75), ("L", "arm1"): (0.25, -0.25), ("L", "arm2"): (0, -1)}
    for (stage, part), (gain, upper) in expected.items():
        row = lever.of_row(stage, part)
        assert (row["gain"], row["upper_edge"]) == pytest.approx((gain, upper), abs=1e-10)
        assert row["lower_edge"] is None
