"""T. H. Lee, The Design of CMOS Radio-Frequency Integrated Circuits, table of shunt peaking (also Mohan and others,
IEEE Journal of Solid-State Circuits 35(3), 2000): figures recalled from memory, exact ones from |Z| of the circuit."""

from __future__ import annotations

from math import log10, pi, sqrt

import pytest

from tests.published.checks import each_solver, exact, figures_of, poles_of, printed, zeros_of

# |Z/R|² = (1 + y/4)/(1 + y²/4) at m = 1/2, greatest at y = 2√5 - 4 (y: square of the frequency over 1/(RC))
LEVEL_PEAK = sqrt((1 + (sqrt(5) / 2 - 1)) / (1 + (sqrt(5) - 2) ** 2))

CASES = {  # name: printed bandwidth multiplier, its share, exact multiplier, highest |Z|/R
    "no": (1.0, 1e-6, 1.0, 1.0),
    "delay": (1.6, 0.02, 1.572148048472388, 1.0),
    "flat": (1.72, 0.003, 1.7220472229250614, 1.0),
    "wide": (1.85, 0.003, 1.8477590650225735, None),
    "level": (1.8, 0.01, 1.7989074399476188, LEVEL_PEAK),
}


@each_solver
@pytest.mark.parametrize("case", CASES)
def test_bandwidth_multiplier(read, case):
    figure, share, multiplier, peak = CASES[case]
    f = figures_of(read, f"SHUNT-1-{case}")
    bandwidth = f("overall.upper_edge_hz") * 2 * pi * 1e3 * 1e-12
    printed(bandwidth, figure, share)
    exact(bandwidth, multiplier, 1e-7 if case == "wide" else 1e-9)
    if peak is not None:
        assert f("overall.peaking_db") == pytest.approx(20 * log10(peak), rel=1e-8, abs=1e-12)
    assert f("M1.owns_upper") == pytest.approx(1, rel=1e-9)
    poles, zeros = poles_of(read, f"SHUNT-1-{case}"), zeros_of(read, f"SHUNT-1-{case}")
    if case == "no":
        exact(poles[0], -1 / (1e3 * 1e-12))
        assert zeros == []
        return
    m = f("M1.l_peak.value") / (1e3**2 * 1e-12)
    exact(zeros[0], -1e3 / f("M1.l_peak.value"))
    exact(sum(poles), zeros[0].real)  # s² + s·R/L + 1/(LC)
    exact(abs(poles[0]) / (2 * abs(poles[0].real)), sqrt(m))  # Q, a pair for m over 1/4
    exact(abs(poles[0]) ** 2, 1 / (f("M1.l_peak.value") * 1e-12))


@each_solver
def test_peak_of_the_widest(read):
    """About 1.5 dB at L = 0.707·R²C."""
    f = figures_of(read, "SHUNT-1-wide")
    exact(f("overall.peaking_db"), 20 * log10(1.190320683815307), 1e-3)
