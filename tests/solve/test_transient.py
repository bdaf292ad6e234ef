"""Transients of known functions: by residues, by the matrix exponential, and what is read off them."""

from __future__ import annotations

from math import atan2, exp, log, pi, sqrt

import mpmath
import numpy as np
import pytest
import scipy.linalg
from scipy.special import gammainc

from polebook.solve import transient as module
from polebook.solve.instants import MOST
from polebook.solve.marks import marks
from polebook.solve.orthonormal import basis, expand, matrix, residues, widths
from polebook.solve.transient import Transient, transient

WITHIN = (0.01, 0.001)


def of(poles, zeros=()) -> Transient:
    """The step response of 1 at s = 0 with those poles and zeros, less its final value."""
    p, z = np.array(poles, dtype=complex), np.array(zeros, dtype=complex)

    def transform(s):
        h = np.ones_like(s)
        for root in z:
            h = h * (1 - s / root)
        for root in p:
            h = h / (1 - s / root)
        return (h - 1) / s

    return transient(p, transform)


def pair(zeta, rate=1.0):
    root = complex(-zeta, sqrt(1 - zeta * zeta)) * rate
    return [root, root.conjugate()]


@pytest.mark.parametrize("count", [1, 2, 3, 4, 5, 8, 24, 60])
@pytest.mark.parametrize("rate", [1.0, 3.7e6])
def test_like_poles_make_an_incomplete_gamma_function(count, rate):
    """y = P(n, t/tau); K. Pearson's incomplete gamma function, any text on probability (Erlang)."""
    found = of([-rate] * count)
    assert (found.residues is None) == (count > 1)
    t = np.concatenate([[0.0], np.geomspace(1e-4, 300.0, 200)])
    np.testing.assert_allclose(1 + found.at(t / rate), gammainc(count, t), atol=1e-12, rtol=0)


def test_rise_of_like_poles_against_the_roots_of_the_incomplete_gamma_function():
    for count in (1, 2, 5, 24, 60):
        with mpmath.workdps(30):
            ends = [mpmath.findroot(lambda t, y=y, n=count: mpmath.gammainc(n, 0, t, regularized=True) - y,
                                    (0.5 * count, 1.5 * count), solver="anderson") for y in (0.1, 0.9)]
        found = marks(of([-1.0] * count), WITHIN)
        assert found.rise_s == pytest.approx(float(ends[1] - ends[0]), rel=1e-11)
        assert found.top == 1.0 and found.top_s is None and found.dip == 0.0


@pytest.mark.parametrize("zeta", [0.02, 0.1, 0.3, 0.5, 0.7, 0.9])
def test_a_pair_overshoots_by_its_damping(zeta):
    """exp(-pi·zeta/sqrt(1 - zeta²)) at pi/omega_d: any text on control."""
    found = marks(of(pair(zeta, 2e7)), WITHIN)
    damped = sqrt(1 - zeta * zeta)
    assert found.top - 1 == pytest.approx(exp(-pi * zeta / damped), abs=1e-12)
    assert found.top_s == pytest.approx(pi / damped / 2e7, rel=1e-5)


@pytest.mark.parametrize("zeta", [1e-4, 0.003, 0.05, 0.3, 0.6])
def test_settling_of_a_pair(zeta):
    """At the time found the response is off by the share, and never again by more, the envelope and every peak told."""
    rate = 5e6
    response = of(pair(zeta, rate))
    found = marks(response, WITHIN)
    damped = sqrt(1 - zeta * zeta)
    phase = atan2(zeta, damped)
    for share in WITHIN:
        t = found.settled_s[share]

        def error(x):
            return exp(-zeta * rate * x) * np.cos(damped * rate * x - phase) / damped

        assert abs(error(t)) == pytest.approx(share, rel=1e-7)
        period = 2 * pi / damped / rate
        after = np.linspace(t, t + 2 * period, 40001)[1:]
        assert np.abs(np.exp(-zeta * rate * after) * np.cos(damped * rate * after - phase)).max() / damped < share
    assert found.low_s < found.high_s < found.top_s


def test_a_ring_too_long_to_follow_is_told_as_such():
    """Two pairs that beat: the highest point comes late, and a quality of a thousand million takes too many points."""
    response = of([*pair(1e-9), *pair(1e-9, 1.001)])
    found = marks(response, WITHIN)
    assert found.rise_s is not None and found.rise_s < 3.0
    assert MOST * 0.35 < 1e9
    assert found.top is None or found.top > 1.9


def test_one_pole():
    found = marks(of([-4.0]), WITHIN)
    assert found.rise_s == pytest.approx(log(9) / 4, rel=1e-12)
    assert found.settled_s[0.01] == pytest.approx(log(100) / 4, rel=1e-12)
    assert found.settled_s[0.001] == pytest.approx(log(1000) / 4, rel=1e-12)


def test_something_that_passes_at_once():
    """A pole at -1 with a zero at -z starts at 1/z."""
    half = marks(of([-1.0], [-2.0]), WITHIN)
    assert half.start == pytest.approx(0.5, abs=1e-12) and half.low_s == 0.0
    assert half.high_s == pytest.approx(log(5), rel=1e-12)  # 1 - exp(-t)/2 = 0.9
    over = marks(of([-1.0], [-0.5]), WITHIN)
    assert (over.start, over.top, over.rise_s) == (pytest.approx(2.0), pytest.approx(2.0), 0.0)
    assert over.settled_s[0.01] == pytest.approx(log(100), rel=1e-12)
    assert over.top_s == 0.0
    near = marks(of([-1.0], [-1 / 1.005]), WITHIN)
    assert near.settled_s == {0.01: 0.0, 0.001: pytest.approx(log(5), rel=1e-9)}


def test_a_zero_on_the_right_sends_it_the_wrong_way():
    """(1 - s)/(1 + s)²: y = 1 - exp(-t) - 2·t·exp(-t), least at t = 1/2, where it is 1 - 2/sqrt e."""
    found = marks(of([-1.0, -1.0], [1.0]), WITHIN)
    assert found.dip == pytest.approx(1 - 2 / sqrt(exp(1)), abs=1e-12)
    assert found.dip_s == pytest.approx(0.5, rel=1e-5)
    assert found.start == 0.0
    flat = marks(of([-1.0], [1.0]), WITHIN)  # all-pass: starts at -1
    assert (flat.start, flat.dip, flat.dip_s) == (pytest.approx(-1.0), pytest.approx(-1.0), 0.0)


def test_first_crossings_where_it_is_not_monotonic():
    """A quick small part shoots over 10 % and falls back before the slow rest comes: the first crossing counts."""
    response = of([-1e3, -2e3, -1.0], [-0.2, -5e5])
    found = marks(response, WITHIN)
    t = np.geomspace(1e-7, 1.0, 400001)
    y = 1 + response.at(t)
    for level, at in ((0.1, found.low_s), (0.9, found.high_s)):
        k = int(np.nonzero(y >= level)[0][0])
        assert t[k - 1] < at <= t[k]


@pytest.mark.parametrize("digits", range(1, 13))
def test_poles_that_come_together(digits):
    """-1 and -1 - 10^-d among others, against 40-digit partial fractions."""
    gap = 10.0 ** -digits
    poles = [-1.0, -1.0 - gap, -1.0 + gap, -30.0, *pair(0.4, 2.0)]
    found = of(poles, [-7.0])
    t = [0.0, 0.05, 0.7, 2.0, 6.0, 15.0]
    np.testing.assert_allclose(found.at(np.array(t)), [_exact(poles, [-7.0], x) for x in t], atol=1e-11, rtol=0)
    assert (found.residues is None) == (digits >= 3)


def _exact(poles, zeros, t):
    with mpmath.workdps(60):
        p = [mpmath.mpc(x) for x in poles]
        total = mpmath.mpf(0)
        for k, root in enumerate(p):
            a = mpmath.mpf(1)
            for z in zeros:
                a *= 1 - root / mpmath.mpc(z)
            for j, other in enumerate(p):
                a = a / (1 - root / other) if j != k else a
            total -= a * mpmath.exp(root * t)
        return float(total.real)


def test_residues_and_matrix_are_one_function(monkeypatch):
    poles, zeros = [-1.0, -3.0, -50.0, -4e4, *pair(0.2, 7.0), *pair(0.6, 900.0)], [-2.0, 60.0]
    t = np.concatenate([[0.0], np.geomspace(1e-6, 30.0, 300)])
    one = of(poles, zeros)
    monkeypatch.setattr(module, "LOSS", 0.0)
    other = of(poles, zeros)
    assert one.residues is not None and other.residues is None
    np.testing.assert_allclose(one.at(t), other.at(t), atol=1e-13)
    np.testing.assert_allclose(one.at(t), [_exact(poles, zeros, x) for x in t], atol=1e-13)
    for found in (one, other):  # nothing later exceeds the bound, and it falls
        rests = [found.rest(x) for x in t]
        assert all(np.abs(found.at(t[k:])).max() <= rest * (1 + 1e-12) for k, rest in enumerate(rests))
        assert rests == sorted(rests, reverse=True)


def test_the_matrix_is_that_of_the_orthonormal_functions():
    """(s - A)^-1·b = phi(s), and exp(tA)·b agrees with a general matrix exponential; A never lets anything grow."""
    poles = np.array([-1.0, -1.0, -2.0, *pair(0.3, 3.0), -40.0], dtype=complex)
    a, b = matrix(poles), widths(poles)
    for s in (0.3 + 2j, -0.1 - 5j, 11.0 + 0j):
        np.testing.assert_allclose(np.linalg.solve(s * np.eye(6) - a, b), basis(poles, np.array([s]))[0], rtol=1e-12)
    assert np.linalg.eigvalsh(a + a.conj().T).max() < 1e-12
    found = of(poles)
    assert found.residues is None
    c = expand(poles, lambda s: (np.prod([1 / (1 - s / p) for p in poles], axis=0) - 1) / s).coefficients
    for t in (0.01, 0.4, 3.0):
        assert found.one(t) == pytest.approx(float((c @ scipy.linalg.expm(t * a) @ b).real), abs=1e-13)


def test_residues_sum_to_the_initial_value():
    for poles, zeros, start in (([-1.0, -2.0, -9.0], [], 0.0), ([-1.0, -2.0], [-4.0, -8.0], 2 / 32)):
        found = of(poles, zeros)
        assert found.residues.sum().real == pytest.approx(start - 1.0, abs=1e-13)


def test_an_expansion_says_how_far_it_misses():
    """A pole that is not among those given, or one in the wrong place, shows."""
    poles = np.array([-1.0, -5.0], dtype=complex)

    def transform(s):
        return (1 / ((1 + s) * (1 + s / 5)) - 1) / s

    assert expand(poles, transform).miss < 1e-14
    assert expand(poles[:1], transform).miss > 1e-3
    assert 1e-8 < expand(poles * (1 + 1e-6), transform).miss < 1e-4
    assert expand(np.append(poles, -77.0), transform).miss < 1e-13  # one too many does no harm
    _, total = residues(expand(poles, transform))
    assert total < 3.0


def test_nothing_live_is_there_at_once():
    found = marks(transient(np.zeros(0, dtype=complex), lambda s: s), WITHIN)
    assert (found.start, found.rise_s, found.top, found.settled_s) == (1.0, 0.0, 1.0, {0.01: 0.0, 0.001: 0.0})
