"""D. A. Neamen, Electronic Circuit Analysis and Design, chapter 7. Figures as worked in a public solution notebook of
the book; those marked "recalled" are from memory."""

from __future__ import annotations

from math import log10, pi

from tests.published.checks import each_solver, exact, figures_of, poles_of, printed, real_hz, zeros_of


@each_solver
def test_one_coupling_and_one_shunt_capacitor(read):
    """Examples 7.1 and 7.2. The two corners act on each other by some millionths."""
    f = figures_of(read, "RC-1")
    printed(f("overall.lower_edge_hz"), 14.5, 0.005)
    exact(f("overall.lower_edge_hz"), 14.468588128520546, 1e-5)
    printed(f("overall.upper_edge_hz"), 58.3e6, 0.003)
    exact(f("overall.upper_edge_hz"), 58356986.14730533, 1e-5)
    printed(f("overall.gain_db"), -0.83, 0.005)
    exact(f("overall.gain_db"), 20 * log10(10 / 11))
    exact(f("source.couple.tau_s"), 0.011)
    printed(f("L1.arm2.tau_s"), 2.73e-9, 0.002)
    exact(f("L1.arm2.tau_s"), 2.727272727272727e-09)
    lower, upper = real_hz(poles_of(read, "RC-1"))
    printed(lower, 14.5, 0.005)
    exact(lower, 14.468595317613039)
    printed(upper, 58.3e6, 0.003)
    exact(upper, 58356957.148960166)
    assert zeros_of(read, "RC-1") == [0]


@each_solver
def test_input_coupling_with_emitter_resistor(read):
    """Example 7.3. The input resistance and the gain are recalled."""
    f = figures_of(read, "LF-5")
    printed(f("Q1.input_ohm"), 6770, 0.003)
    exact(f("Q1.input_ohm"), 6775.044327377193)
    printed(f("overall.lower_edge_hz"), 23.2, 0.005)
    exact(f("overall.lower_edge_hz"), 23.149659403487593, 1e-7)
    printed(f("overall.gain"), -4.72, 0.005)
    exact(f("overall.gain"), -4.7109843563991465)


@each_solver
def test_output_coupling_of_a_follower(read):
    """Example 7.5."""
    f = figures_of(read, "LF-8")
    printed(f("Q1.output_ohm"), 35.5, 0.003)
    exact(f("Q1.output_ohm"), 35.4837074361767)
    printed(f("overall.lower_edge_hz"), 15.9, 0.005)
    exact(f("overall.lower_edge_hz"), 15.859219917218677)


@each_solver
def test_bipolar_cascode(read):
    """Example 7.16: a Miller factor of two at the input. The printed gain and time constant take alpha as 1."""
    f = figures_of(read, "CASC-3")
    tau_s = 1 / (2 * pi * f("n0.pole_hz"))
    printed(tau_s, 4.16e-9, 0.005)
    exact(tau_s, 4.156237297355198e-09, 1e-3)  # kept with K = -1
    printed(f("n0.pole_hz"), 38.3e6, 0.005)
    printed(1 / (2 * pi * f("n1.pole_hz")), 13.3e-9, 0.003)
    exact(1 / (2 * pi * f("n1.pole_hz")), 1.3333333333333332e-08)
    printed(f("n1.pole_hz"), 11.9e6, 0.006)
    printed(f("overall.gain"), -126, 0.01)
    exact(f("overall.gain"), -125.46023216279885)
    printed(f("Q1.k"), -1, 0.01)
    exact(f("overall.octc_upper_hz"), 8614469.570090747)
    exact(f("overall.upper_edge_hz"), 10908566.217032898, 1e-6)
    first, second, third = real_hz(poles_of(read, "CASC-3"))
    printed(first, 11.9e6, 0.006)
    exact(first, 11936620.731892154)
    printed(second, 38.3e6, 0.05)  # the middle node's pole, far above, draws it down by 3 %
    exact(second, 37178302.18552845)
    exact(third, 184824271.3745359)
