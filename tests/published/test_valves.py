"""Valve stages: an EF86 stage (ampbooks.com, pentode tutorial 3), and a 12AX7 stage from its data sheet's figures
(recalled from memory) with the usual formula for a valve's Miller capacitance."""

from __future__ import annotations

from math import pi

from tests.published.checks import each_solver, exact, figures_of, printed


@each_solver
def test_cathode_bypass_and_grid_stopper(read):
    """The source leaves out the anode resistance, so the card has it out of the way."""
    f = figures_of(read, "TRIODE-2")
    seen_by_ck = f("V1.ck.tau_s") / 53e-6
    printed(seen_by_ck, 368, 0.002)
    exact(seen_by_ck, 367.713004484305, 1e-6)
    printed(1 / (2 * pi * f("V1.ck.tau_s")), 8.2, 0.01)
    exact(f("V1.gain"), -100, 1e-6)
    total = 5e-12 + f("V1.cga.at_input")
    printed(total, 10e-12, 0.006)
    exact(total, 10.05e-12, 1e-6)
    printed(f("n0.pole_hz"), 100e3, 0.006)


@each_solver
def test_miller_capacitance_of_a_triode(read):
    f = figures_of(read, "TRIODE-3")
    printed(f("overall.gain"), -61.5, 0.002)
    exact(f("overall.gain"), -61.53846153846154)
    total = 1.6e-12 + f("V1.cga.at_input")
    printed(total, 108e-12, 0.01)
    exact(total, 1.0791538461538462e-10)
    exact(f("n0.pole_hz"), 21688.417062499102)
