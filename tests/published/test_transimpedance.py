"""Photodiode amplifiers of two operational-amplifier data sheets (Texas Instruments: OPA656, December 2001, revised
February 2024; OPA657, SBOS197E, page 11). Printed are the usual formulas, exact the two-pole solution, once as kept
(an integrator for the amplifier) and once with the 120 dB of open-loop gain that the chain files state."""

from __future__ import annotations

from math import pi, sqrt

from tests.published.checks import each_solver, exact, figures_of, printed


def two_pole_edge(gbw: float, rf: float, cf: float, c_in: float, a0: float = 1e6) -> float:
    """Hz: |D|² = 2·D(0)² with D(s) = 1 + s·rf·cf + (1 + s·rf·(cf + c_in))·(1/a0 + s/(2π·gbw))."""
    rate = 2 * pi * gbw
    d0, d1, d2 = 1 + 1 / a0, rf * cf + 1 / rate + rf * (cf + c_in) / a0, rf * (cf + c_in) / rate
    b = d1**2 - 2 * d0 * d2  # d2²·w⁴ + b·w² = d0²
    return sqrt((sqrt(b**2 + 4 * d2**2 * d0**2) - b) / (2 * d2**2)) / (2 * pi)


@each_solver
def test_100_kohm_front(read):
    """f = √(GBW/(2π·RF·C)) leaves CF out of the input's total; with it the edge lies 1.2 % lower."""
    f = figures_of(read, "TIA-1")
    formula = sqrt(230e6 / (2 * pi * 100e3 * 23.3e-12))
    printed(formula, 3.96e6, 0.002)
    printed(f("overall.upper_edge_hz"), 3.96e6, 0.015)
    exact(f("overall.upper_edge_hz"), 3915937.8552920874, 1e-4)
    exact(f("overall.upper_edge_hz"), two_pole_edge(230e6, 100e3, 5.678571600890922e-13, 23.3e-12))
    exact(f("overall.gain"), -100e3 / (1 + 1e-6))
    printed(f("n0.pole_hz"), 2.8e6, 0.005)  # 1/(2π·RF·CF)
    exact(f("n0.pole_hz"), 2802728.4725427297, 1e-4)


@each_solver
def test_100_kohm_front_with_a_larger_capacitor(read):
    """The same with CF = 0.6 pF, exact."""
    f = figures_of(read, "TIA-1-0p6")
    exact(f("overall.upper_edge_hz"), 3697877.93850662, 1e-4)
    exact(f("overall.upper_edge_hz"), two_pole_edge(230e6, 100e3, 0.6e-12, 23.3e-12))


@each_solver
def test_200_kohm_front(read):
    """Printed as "approximately 5 MHz" by the formula; the amplifier's 5.2 pF are recalled from memory."""
    f = figures_of(read, "TIA-2")
    printed(sqrt(1.6e9 / (2 * pi * 200e3 * 50e-12)), 5e6, 0.05)
    printed(f("overall.upper_edge_hz"), 5e6, 0.1)
    exact(f("overall.upper_edge_hz"), 5479628.26916707, 5e-4)
    exact(f("overall.upper_edge_hz"), two_pole_edge(1.6e9, 200e3, 0.2e-12, 55.2e-12))
