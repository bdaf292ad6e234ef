"""S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed. Figures as worked in a public
solution notebook of the book."""

from __future__ import annotations

from tests.published.checks import each_solver, exact, figures_of, printed


@each_solver
def test_a_shunt_capacitor_splits_no_poles(read):
    """Example 8.8: 159 nF across the first stage's 100 kΩ make it the dominant pole, 10 Hz, and leave the others."""
    f = figures_of(read, "COMP-4")
    printed(f("n1.pole_hz"), 10, 0.001)
    exact(f("n1.pole_hz"), 1 / (1 / 10 + 1 / 100e3))
    exact(f("A2.pole1.pole_hz"), 1e6)
    exact(f("A3.pole1.pole_hz"), 10e6)
    exact(f("overall.gain"), 1e5)
