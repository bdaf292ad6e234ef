"""T. L. Floyd, Electronic Devices, chapter 10. Figures as worked in a public solution notebook of the book."""

from __future__ import annotations

from math import pi

from tests.published.checks import each_solver, exact, figures_of, printed


@each_solver
def test_output_coupling_and_emitter_bypass(read):
    """Examples 10.5 and 10.6."""
    f = figures_of(read, "LF-7")
    coupling, bypass = (1 / (2 * pi * f(f"{part}.tau_s")) for part in ("load.couple", "Q1.ce"))
    printed(coupling, 79.6, 0.002)
    exact(coupling, 79.57747154594767)
    printed(bypass, 75.9, 0.002)
    exact(bypass, 75.89396031467717)


@each_solver
def test_two_like_stages(read):
    """Example 10.18; the two edges are recalled, the bandwidth 50 710.65 Hz was seen. The book holds the two ends
    apart; in one chain each moves the other by some ten-thousandths."""
    f = figures_of(read, "SHRINK-2")
    printed(f("overall.lower_edge_hz"), 777, 0.001)
    exact(f("overall.lower_edge_hz"), 776.8869870150186, 2e-4)
    printed(f("overall.upper_edge_hz"), 51.5e3, 0.001)
    exact(f("overall.upper_edge_hz"), 51487.54023244661, 2e-4)
    printed(f("overall.upper_edge_hz") - f("overall.lower_edge_hz"), 50.7e3, 0.001)
    exact(f("overall.node_upper_hz"), 51487.54023244661)
