"""P. R. Gray, P. J. Hurst, S. H. Lewis, R. G. Meyer, Analysis and Design of Analog Integrated Circuits, 5th ed.,
chapter 7. The exact edges were solved from the stated circuits (agreeing to 1e-6 with the values kept here)."""

from __future__ import annotations

from math import pi

import pytest

from tests.published.checks import each_solver, exact, figures_of, printed


@each_solver
def test_common_emitter(read):
    """Section 7.2.1.1, example. The gain printed there (-64.1) leaves out the 1 kΩ source and is not used."""
    f = figures_of(read, "CE-1")
    exact(f("Q1.gm.value"), 0.038461538461538464)
    printed(f("Q1.rpi.value"), 2600, 0.001)
    exact(f("Q1.rpi.value"), 2600)
    printed(f("Q1.cpi.value"), 14.8e-12, 0.005)
    exact(f("Q1.cpi.value"), 1.4803359912682243e-11)
    printed(f("Q1.cmu.at_input"), 96.7e-12, 0.003)
    exact(f("Q1.cmu.at_input"), 9.665384615384615e-11)
    printed(f("n0.pole_hz"), 1.74e6, 0.005)
    exact(f("n0.pole_hz"), 1739165.7815132309)
    printed(f("overall.octc_upper_hz"), 1.70e6, 0.005)
    printed(2 * pi * f("overall.octc_upper_hz"), 10.7e6, 0.007)
    exact(f("overall.octc_upper_hz"), 1692917.3907971617)
    exact(f("overall.upper_edge_hz"), 1698758.2268189702, 1e-6)
    exact(f("overall.gain"), -131.57894736842107)


@each_solver
def test_common_source(read):
    """Section 7.2.1.2, example."""
    f = figures_of(read, "CS-1")
    printed(f("M1.gm.value"), 14.1e-3, 0.005)
    exact(f("M1.gm.value"), 0.01414213562373095)
    printed(f("M1.cgd.at_input"), 35.7e-12, 0.005)
    exact(f("M1.cgd.at_input"), 3.5855339059327375e-11)
    printed(f("n0.pole_hz"), 3.9e6, 0.01)
    exact(f("n0.pole_hz"), 3883502.898049286)
    printed(2 * pi * f("overall.octc_upper_hz"), 23.1e6, 0.005)
    printed(f("overall.octc_upper_hz"), 3.7e6, 0.015)
    exact(f("overall.octc_upper_hz"), 3660222.3065269906)
    printed(f("overall.gain"), -70.5, 0.005)
    exact(f("overall.gain"), -70.71067811865476)
    exact(f("overall.upper_edge_hz"), 3685206.4743994325, 1e-6)


@each_solver
def test_emitter_follower(read):
    """Section 7.2.3.1, examples. The printed output resistance is 1/gm + RS/beta; exact is (rpi + RS)/(beta + 1)."""
    f = figures_of(read, "EF-1")
    printed(f("overall.gain"), 0.986, 0.001)
    exact(f("overall.gain"), 0.986328125)
    printed(f("Q1.cpi.tau_s") / 10e-12, 28, 0.015)
    exact(f("Q1.cpi.tau_s") / 10e-12, 27.9296875)
    printed(f("Q1.output_ohm"), 28, 0.015)
    exact(f("Q1.output_ohm"), 2800 / 101)
    printed(f("overall.upper_edge_hz"), 725e6, 0.02)
    exact(f("overall.upper_edge_hz"), 722297986.9977866, 1e-5)


@each_solver
def test_two_common_sources(read):
    """Section 7.3.3, example: the open-circuit time constants of a cascade beside its exact edge."""
    f = figures_of(read, "CSCS-1")
    taus = {
        "M1.cgs": 50e-9, "M1.cgd": 320e-9, "M1.cdb": 20e-9,
        "M2.cgs": 100e-9, "M2.cgd": 315e-9, "M2.cdb": 10e-9,
    }  # fmt: skip
    for part, tau_s in taus.items():
        exact(f(f"{part}.tau_s"), tau_s)
    exact(1 / (2 * pi * f("overall.octc_upper_hz")), 815e-9)
    printed(f("overall.octc_upper_hz"), 196e3, 0.005)
    exact(f("overall.octc_upper_hz"), 195282.13876306178)
    printed(f("overall.upper_edge_hz"), 205e3, 0.005)
    exact(f("overall.upper_edge_hz"), 205760.31089799857, 1e-6)
    exact(f("overall.gain"), 900)


@each_solver
def test_large_feedback_capacitance(read):
    """Section 7.3.6, example: its open-circuit time constants and their sum."""
    f = figures_of(read, "SCTC-1")
    exact(f("M1.cgd.tau_s"), 6.4e-6)
    exact(f("M1.cgs.tau_s"), 10e-9)
    printed(2 * pi * f("overall.octc_upper_hz"), 156e3, 0.002)
    exact(2 * pi * f("overall.octc_upper_hz"), 156006.24024960998)


SHRINKAGE = {  # n: printed, its share, exact √(2^(1/n) - 1), exact growth of lower corners
    1: (1.0, 1e-6, 1.0, 1.0),
    2: (0.64, 0.006, 0.6435942529055827, 1.5537739740300371),
    3: (0.51, 0.003, 0.5098245285339587, 1.9614591767006195),
    4: (0.435, 0.001, 0.43497944204608224, 2.2989592227534716),
    5: (0.386, 0.002, 0.38561425673467403, 2.5932651154235216),
}


@each_solver
@pytest.mark.parametrize("n", SHRINKAGE)
def test_shrinkage_of_like_stages(read, n):
    """Equations 7.128 and 7.129 print n = 2 (0.64, and 0.5 by the open-circuit sum, 22 % low); the values for
    n = 3, 4, 5 are those of the usual textbook table, recalled from memory."""
    figure, share, shrunk, grown = SHRINKAGE[n]
    f = figures_of(read, f"SHRINK-1-{n}")
    printed(f("overall.upper_edge_hz") / 1e6, figure, share)
    exact(f("overall.upper_edge_hz") / 1e6, shrunk)
    exact(f("overall.shrinkage"), shrunk)
    exact(f("overall.lower_edge_hz") / 1e-6, grown)
    exact(f("overall.node_upper_hz") / 1e6, shrunk)
    exact(f("overall.octc_upper_hz") / 1e6, 1 / n)
    exact(f("overall.sctc_lower_hz") / 1e-6, n)
    if n == 2:
        printed(1 - f("overall.octc_upper_hz") / f("overall.upper_edge_hz"), 0.22, 0.02)
    for k in range(1, n + 1):
        exact(f(f"A{k}.owns_upper"), 1 / n, 1e-6)
        exact(f(f"A{k}.owns_lower"), 1 / n, 1e-6)
