"""A. P. Malvino, D. J. Bates, Electronic Principles. Figures as worked in a public solution notebook of the book."""

from __future__ import annotations

from math import pi

from tests.published.checks import each_solver, exact, figures_of, poles_of, printed, real_hz, zeros_of


@each_solver
def test_common_source_from_its_data_sheet(read):
    """Examples 16-21 and 16-22: Ciss, Coss, Crss to the three capacitances, both Miller poles, both couplings.
    The exact edge lies 0.1 % lower than without the couplings, for 0.1 µF divides with the 121 pF of the gate."""
    f = figures_of(read, "CS-5")
    exact(f("M1.cgs.value"), 55e-12)
    exact(f("M1.cgd.value"), 5e-12)
    exact(f("M1.cds.value"), 20e-12)
    printed(f("n0.pole_hz"), 2.2e6, 0.01)
    exact(f("n0.pole_hz"), 2200515.4344958533)
    printed(f("n1.pole_hz"), 48e6, 0.005)
    exact(f("n1.pole_hz"), 48015856.59711765)
    printed(1 / (2 * pi * f("M1.couple.tau_s")), 2.39, 0.005)
    exact(1 / (2 * pi * f("M1.couple.tau_s")), 2.3851774866404543)
    printed(1 / (2 * pi * f("load.couple.tau_s")), 13.8, 0.005)
    exact(1 / (2 * pi * f("load.couple.tau_s")), 13.839560268860463)
    exact(f("overall.octc_upper_hz"), 2105583.9491488663)
    exact(f("overall.upper_edge_hz"), 2148991.6235952717, 2e-3)
    lower, second_lower, first, second = real_hz(poles_of(read, "CS-5"))
    printed(lower, 2.39, 0.005)
    printed(second_lower, 13.8, 0.005)
    exact(first, 2149895.0795926056, 2e-3)
    exact(second, 102159085.68822536, 2e-3)  # not 48 MHz: the poles split
    exact(real_hz(zeros_of(read, "CS-5"))[-1], -0.093 / (2 * pi * 5e-12))
