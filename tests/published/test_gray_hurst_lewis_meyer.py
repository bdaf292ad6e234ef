"""P. R. Gray, P. J. Hurst, S. H. Lewis, R. G. Meyer, Analysis and Design of Analog Integrated Circuits, 5th ed.,
chapters 7 and 9. The exact edges were solved from the stated circuits (agreeing to 1e-6 with the values kept here)."""

from __future__ import annotations

from math import atan, degrees, pi, sqrt

import pytest

from tests.published.checks import each_solver, exact, figures_of, poles_of, printed, real_hz, zeros_of


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
    first, second = real_hz(poles_of(read, "CE-1"))
    exact(first, 1698777.963321708)
    exact(second, 490718397.41921)
    (zero,) = real_hz(zeros_of(read, "CE-1"))
    exact(zero, -12242687930.145798)  # gm/cmu, on the right


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
    first, second = real_hz(poles_of(read, "CS-1"))
    exact(first, 3685377.786229008)
    exact(second, 536237119.74190253)
    (zero,) = real_hz(zeros_of(read, "CS-1"))
    exact(zero, -4501581580.785531)


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
    for found, rate in zip(poles_of(read, "EF-1"), (-3117093902.966519, -6317521481.648864), strict=True):
        exact(found, rate)


@each_solver
def test_pole_and_zero_of_an_emitter_follower(read):
    """The same without Cmu. Printed are the pole with 28 Ω for 27.93 Ω, and -gm/Cpi for the zero; the exact zero is
    -(gm + 1/rpi)/Cpi, whose distance from the pole is what a follower's bandwidth hangs on."""
    (pole,), (zero,) = poles_of(read, "EF-1-0"), zeros_of(read, "EF-1-0")
    printed(pole, -3.57e9, 0.015)
    exact(pole, -3580419580.41957)
    printed(zero, -3.85e9, 0.012)
    exact(zero, -3884615384.615385)
    f = figures_of(read, "EF-1-0")
    exact(f("Q1.cpi.tau_s"), -1 / pole.real)  # one capacitance: its time constant is the pole


@each_solver
def test_two_common_sources(read):
    """Section 7.3.3, example: the open-circuit time constants of a cascade beside its exact edge, poles and zeros.
    The book's numerical solution prints 205 kHz for the first pole and for the edge: 206.3 and 205.8 kHz."""
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
    poles = poles_of(read, "CSCS-1")
    corners = zip(real_hz(poles), (205e3, 4.02e6, 39.98e6), (0.008, 0.003, 0.001), strict=True)
    for pole, figure, share in corners:
        printed(pole, figure, share)
    for pole, hz in zip(real_hz(poles), (206304.71082538166, 4022771.211154375, 39980630.49243563), strict=True):
        exact(pole, hz)
    exact(-sum(1 / p.real for p in poles), 815e-9)  # of an exact set of poles, the sum of the time constants
    zeros = real_hz(zeros_of(read, "CSCS-1"))
    for zero, figure, share in zip(zeros, (-477e6, -955e6), (0.002, 0.001), strict=True):
        printed(zero, figure, share)
    exact(zeros[0], -477464829.275686)
    exact(zeros[1], -954929658.551372)


@each_solver
def test_large_feedback_capacitance(read):
    """Section 7.3.6, example: open-circuit time constants and their sum; the second pole from the short-circuit ones,
    200 ns of the feedback capacitor and 312 ps of the gate."""
    f = figures_of(read, "SCTC-1")
    exact(f("M1.cgd.tau_s"), 6.4e-6)
    exact(f("M1.cgs.tau_s"), 10e-9)
    printed(2 * pi * f("overall.octc_upper_hz"), 156e3, 0.002)
    exact(2 * pi * f("overall.octc_upper_hz"), 156006.24024960998)
    first, second = poles_of(read, "SCTC-1")
    printed(first, -156e3, 0.002)
    exact(first, -156013.8347321723)
    printed(second, -3.20e9, 0.003)
    exact(second, -3204843986.1652813)
    printed(second, -3.21e9, 0.003)  # the sum of 1/200 ns and 1/312 ps, which is that of both poles
    exact(first + second, -(1 / 200e-9 + 1 / 312.5e-12))
    exact(1 / first + 1 / second, -(6.4e-6 + 10e-9))


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
    poles = real_hz(poles_of(read, f"SHRINK-1-{n}"))
    assert len(poles) == 2 * n
    for low, high in zip(poles[:n], poles[n:], strict=True):  # like poles, none drawn to its neighbours
        exact(low, 1e-6, 1e-12)
        exact(high, 1e6, 1e-12)
    assert zeros_of(read, f"SHRINK-1-{n}") == [0] * n
    for k in range(1, n + 1):
        exact(f(f"A{k}.owns_upper"), 1 / n, 1e-6)
        exact(f(f"A{k}.owns_lower"), 1 / n, 1e-6)


@each_solver
def test_a_nulling_resistor_sends_the_zero_away(read):
    """Section 9.4.3, example: 3.2 pF for 45° with gm1 = 1 mA/V and R = 1/gm6 = 645 Ω. Second pole and zero by the
    formulas gm6·C/(C1·C2 + C·(C1 + C2)) and gm6/C; the 10 MΩ of the chain file, which the book does not state, leave
    the first right to 0.03 % and do not reach the second."""
    f = figures_of(read, "COMP-2")
    exact(f("M6.c_comp.value"), 3.2e-12)
    printed(f("M6.r_comp.value"), 1 / f("M6.gm.value"), 0.002)
    (zero,) = real_hz(zeros_of(read, "COMP-2-0"))
    exact(zero, -77090675.5601368)
    _, second = real_hz(poles_of(read, "COMP-2-0"))
    exact(second, 46479540.61091621, 3e-4)
    exact(1e-3 / (2 * pi * f("M6.c_comp.value")), 49735919.716217294)  # gm1/C, near enough to the second pole for 45°
    (away,) = real_hz(zeros_of(read, "COMP-2"))
    exact(away, -1 / (2 * pi * f("M6.c_comp.value") * (1 / 1.55e-3 - 645)))  # printed 645 Ω, not 645.16 Ω: 308 GHz
    _, _, third = real_hz(poles_of(read, "COMP-2"))
    printed(third, 2056265414.623971, 0.06)  # 1/(R·C1), as the book has it


@each_solver
def test_a_doublet_of_an_octave(read):
    """Sections 7.2.2 and 7.3.5: a pole and a zero at twice its frequency turn the phase back by 19.47° between them,
    printed -19.4°; the tail's 1 MΩ and 1 pF printed as 166 kHz, exact 159.2 kHz."""
    (pole,), (zero,) = real_hz(poles_of(read, "DIFF-2")), real_hz(zeros_of(read, "DIFF-2"))
    exact(zero / pole, 2)
    between = sqrt(pole * zero)
    phase = degrees(atan(between / zero) - atan(between / pole))
    printed(phase, -19.4, 0.005)
    exact(phase, -19.4712206344907)
    (tail,) = real_hz(poles_of(read, "DIFF-2-tail"))
    printed(tail, 166e3, 0.05)
    exact(tail, 159154.94309189534)
