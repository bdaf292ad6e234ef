"""S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed. Figures as worked in a public
solution notebook of the book."""

from __future__ import annotations

from tests.published.checks import each_solver, exact, figures_of, poles_of, printed, real_hz, zeros_of


@each_solver
def test_a_shunt_capacitor_splits_no_poles(read):
    """Example 8.8: 159 nF across the first stage's 100 kΩ make it the dominant pole, 10 Hz, and leave the others."""
    f = figures_of(read, "COMP-4")
    printed(f("n1.pole_hz"), 10, 0.001)
    exact(f("n1.pole_hz"), 1 / (1 / 10 + 1 / 100e3))
    exact(f("A2.pole1.pole_hz"), 1e6)
    exact(f("A3.pole1.pole_hz"), 10e6)
    exact(f("overall.gain"), 1e5)
    first, second, third = real_hz(poles_of(read, "COMP-4"))
    printed(first, 10, 0.001)
    exact(first, 1 / (1 / 10 + 1 / 100e3), 1e-12)
    exact(second, 1e6, 1e-12)
    exact(third, 10e6, 1e-12)
    assert zeros_of(read, "COMP-4") == []


@each_solver
def test_half_the_compensation_for_half_the_feedback(read):
    """Example 8.8: 79.6 nF put the dominant pole at 20 Hz."""
    f = figures_of(read, "COMP-4-half")
    printed(f("A1.c_load.value"), 79.6e-9, 0.001)
    first, second, third = real_hz(poles_of(read, "COMP-4-half"))
    printed(first, 20, 0.001)
    exact(first, 1 / (1 / 20 + 1 / 100e3))
    exact(second, 1e6)
    exact(third, 10e6)
