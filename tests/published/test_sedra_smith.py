"""A. S. Sedra, K. C. Smith, Microelectronic Circuits, 5th ed. Figures as worked in a public solution notebook of the
book; those marked "recalled" are the book's print from memory."""

from __future__ import annotations

from math import pi

from tests.published.checks import each_solver, exact, figures_of, poles_of, printed, real_hz, zeros_of


@each_solver
def test_common_source_by_miller(read):
    """Example 4.12. The input capacitance, 4.26 pF, is recalled."""
    f = figures_of(read, "CS-2")
    printed(f("overall.gain"), -7.0, 0.005)
    exact(f("overall.gain"), -6.9940476190476195)
    total = 1e-12 + f("M1.cgd.at_input")
    printed(total, 4.26e-12, 0.002)
    exact(total, 4.257142857142857e-12)
    exact(f("n0.farad"), 4.257142857142857e-12)
    printed(f("n0.pole_hz"), 382e3, 0.002)
    exact(f("n0.pole_hz"), 381808.23132141115)
    exact(f("overall.octc_upper_hz"), 379209.0545942195)
    exact(f("overall.upper_edge_hz"), 379815.25058404834, 1e-5)
    first, second = real_hz(poles_of(read, "CS-2"))
    exact(first, 379813.23578620504)
    exact(second, 238386464.15590608)
    exact(real_hz(zeros_of(read, "CS-2"))[0], -397887357.72973835)


@each_solver
def test_common_emitter_by_miller(read):
    """Example 5.18. The book's 754 kHz and 128 pF (load rounded to 3 kΩ) are recalled."""
    f = figures_of(read, "CE-2")
    exact(f("Q1.gm.value"), 0.04)
    exact(f("Q1.rpi.value"), 2500)
    exact(f("Q1.ro.value"), 100e3)
    printed(f("overall.gain"), -39, 0.01)
    exact(f("overall.gain"), -38.880815719513826)
    total = 7e-12 + f("Q1.cmu.at_input")
    printed(total, 128e-12, 0.005)
    exact(total, 1.2740298507462687e-10)
    printed(f("n0.pole_hz"), 754e3, 0.008)
    exact(f("n0.pole_hz"), 759301.0880079482)
    exact(f("overall.octc_upper_hz"), 748639.5018135537)
    exact(f("overall.upper_edge_hz"), 749210.7328277571, 1e-5)
    first, second = real_hz(poles_of(read, "CE-2"))
    exact(first, 749209.8225198223)
    exact(second, 983460818.2267256)
    exact(real_hz(zeros_of(read, "CE-2"))[0], -6366197723.675814)


@each_solver
def test_active_load_by_three_methods(read):
    """Example 6.9: Miller 27 % high, time constants 5 % low, and exact. Gain, input capacitance, Στ and the poles are
    recalled."""
    f = figures_of(read, "CS-3")
    printed(f("overall.gain"), -12.3, 0.005)
    exact(f("overall.gain"), -12.275)
    total = 20e-15 + f("M1.cgd.at_input")
    printed(total, 86.5e-15, 0.006)
    exact(total, 8.6375e-14)
    printed(f("n0.pole_hz"), 184e6, 0.006)
    exact(f("n0.pole_hz"), 184260426.15559515)
    printed(f("M1.cgs.tau_s"), 200e-12, 0.001)
    printed(f("M1.cgd.tau_s") / 5e-15, 142e3, 0.01)
    exact(f("M1.cgd.tau_s") / 5e-15, 142570)
    printed(f("M1.c_load.tau_s"), 246e-12, 0.005)
    exact(f("M1.c_load.tau_s"), 245.5e-12)
    printed(1 / (2 * pi * f("overall.octc_upper_hz")), 1.16e-9, 0.01)
    printed(f("overall.octc_upper_hz"), 137e6, 0.01)
    exact(f("overall.octc_upper_hz"), 137397973.92143598)
    exact(f("overall.upper_edge_hz"), 145072706.79231945, 1e-6)
    first, second = real_hz(poles_of(read, "CS-3"))
    printed(first, 145.3e6, 0.01)
    exact(first, 145582805.099439)
    printed(second, 2.45e9, 0.02)
    exact(second, 2443884549.777968)
    (zero,) = real_hz(zeros_of(read, "CS-3"))
    printed(zero, -40e9, 0.01)
    exact(zero, -39788735772.97383)


@each_solver
def test_lower_corners_of_a_common_emitter(read):
    """Example 5.19, with the capacitors it settles on (27.6 µF, 2.1 µF, 1.2 µF). The resistances are recalled;
    the book sees 72 Ω at the emitter by 1/gm + R/(beta + 1), the exact figure is (rpi + R)/(beta + 1)."""
    f = figures_of(read, "LF-2")
    seen_by_ce = f("Q1.ce.tau_s") / 27.6e-6
    printed(seen_by_ce, 72, 0.005)
    exact(seen_by_ce, (2500 + 1 / (1 / 5e3 + 1 / 100e3)) / 101)
    printed(f("Q1.couple.tau_s") / 2.1e-6, 7440, 0.003)
    exact(f("Q1.couple.tau_s") / 2.1e-6, 7439.0243902439015)
    printed(f("load.couple.tau_s") / 1.2e-6, 13e3, 0.001)
    for part, corner_hz in (("Q1.ce", 80), ("Q1.couple", 10), ("load.couple", 10)):
        printed(1 / (2 * pi * f(f"{part}.tau_s")), corner_hz, 0.025)
    exact(f("overall.sctc_lower_hz"), 100.59153033165627)
    exact(f("overall.lower_edge_hz"), 90.88692447623872, 1e-7)
    corners = (0.6450401961151233, 10.202239941788156, 89.74425019375296)
    for pole, hz in zip(real_hz(poles_of(read, "LF-2")), corners, strict=True):
        exact(pole, hz, 1e-7)  # kept with an ideal current source at the emitter


@each_solver
def test_lower_corners_that_do_not_act_on_each_other(read):
    """Example 4.13, with the capacitors it settles on (1.6 µF, 3.3 nF, 0.53 µF) for 100, 10 and 10 Hz."""
    f = figures_of(read, "LF-3")
    for part, corner_hz in (("M1.cs", 100), ("M1.couple", 10), ("load.couple", 10)):
        printed(1 / (2 * pi * f(f"{part}.tau_s")), corner_hz, 0.01)
    exact(f("overall.sctc_lower_hz"), 119.52924482971224)
    exact(f("overall.lower_edge_hz"), 101.4450874019549, 2e-6)
    # rounding the capacitors to two digits moved the corners from 100, 10 and 10 Hz
    tau_s = [1.6e-6 / (1e-3 + 1e-12), 3.3e-9 * 4.8e6, 0.53e-6 * 30e3]
    for pole, tau in zip(real_hz(poles_of(read, "LF-3")), sorted(tau_s, reverse=True), strict=True):
        exact(pole, 1 / (2 * pi * tau), 1e-7)
    for pole, hz in zip(real_hz(poles_of(read, "LF-3")), (10.01, 10.05, 99.47), strict=True):
        printed(pole, hz, 0.01)


@each_solver
def test_common_gate(read):
    """Example 6.11: with ro between output and source, what the input is worth depends on the load."""
    f = figures_of(read, "CG-1")
    printed(f("M1.open_gain"), 28, 0.001)
    exact(f("M1.open_gain"), 28)
    printed(f("M1.input_ohm"), 4.2e3, 0.005)
    exact(f("M1.input_ohm"), 4214.285714285715)
    printed(f("M1.output_ohm"), 298e3, 0.002)
    exact(f("M1.output_ohm"), 298e3)
    printed(f("overall.gain"), 7, 0.01)
    exact(f("overall.gain"), 7.035175879396984)
    printed(f("overall.octc_upper_hz"), 366e6, 0.005)
    exact(f("overall.octc_upper_hz"), 366996913.96624774)
    exact(f("overall.upper_edge_hz"), 376034151.3919128, 1e-6)


@each_solver
def test_common_source_beside_cascode_at_a_resistive_source(read):
    """Example 6.12, source of 10 kΩ. The estimates 155 MHz and 244 MHz are recalled."""
    f = figures_of(read, "CASC-2-source")
    printed(f("overall.gain"), -12.5, 0.001)
    exact(f("overall.gain"), -12.5)
    printed(1 / (2 * pi * f("overall.octc_upper_hz")), 1.025e-9, 0.001)
    printed(f("overall.octc_upper_hz"), 155e6, 0.003)
    exact(f("overall.octc_upper_hz"), 155273115.2116052)
    exact(f("overall.upper_edge_hz"), 160620063.67257532, 1e-6)
    f = figures_of(read, "CASC-2-cascode")
    printed(f("overall.gain"), -23.5, 0.003)
    exact(f("overall.gain"), -23.484848484848495)
    printed(f("M1.k"), -1.5, 0.02)
    middle = f("M1.mid.ohm")  # the 20 kΩ of the lower device beside the upper one's input
    printed(1 / (1 / middle - 1 / 20e3), 1300, 0.02)
    exact(1 / (1 / middle - 1 / 20e3), 1290.3225806451612)
    printed(f("M1.output_ohm"), 640e3, 0.001)
    exact(f("M1.output_ohm"), 640e3)
    printed(1 / (2 * pi * f("overall.octc_upper_hz")), 653e-12, 0.015)
    printed(f("overall.octc_upper_hz"), 244e6, 0.015)
    exact(f("overall.octc_upper_hz"), 243717546.26601136)
    exact(f("overall.upper_edge_hz"), 311943879.8346066, 1e-6)


@each_solver
def test_common_source_beside_cascode_at_an_ideal_source(read):
    """Example 6.12, without source resistance."""
    f = figures_of(read, "CASC-2-source-0")
    printed(1 / (2 * pi * f("overall.octc_upper_hz")), 150e-12, 0.001)
    exact(1 / (2 * pi * f("overall.octc_upper_hz")), 150e-12)
    f = figures_of(read, "CASC-2-cascode-0")
    printed(f("overall.gain"), -388, 0.003)
    exact(f("overall.gain"), -387.5)
    printed(1 / (2 * pi * f("overall.octc_upper_hz")), 5.11e-9, 0.005)
    printed(f("overall.octc_upper_hz"), 31.1e6, 0.005)
    exact(f("overall.octc_upper_hz"), 31149590.763149478, 1e-7)
    exact(f("overall.upper_edge_hz"), 31257372.510731235, 1e-6)


@each_solver
def test_miller_split_of_a_resistor(read):
    """Example 6.7. The gain of -49.7 is recalled; exact is -49.75."""
    f = figures_of(read, "MILLER-1-R")
    printed(f("A1.r_bridge.at_input"), 9.9e3, 0.001)
    exact(f("A1.r_bridge.at_input"), 9900.990099009901)
    printed(f("A1.r_bridge.at_output"), 0.99e6, 0.001)
    exact(f("A1.r_bridge.at_output"), 990099.0099009901)
    exact(f("A1.input_ohm"), 9900.990099009901)
    printed(f("overall.gain"), -49.7, 0.002)
    exact(f("overall.gain"), -49.75124378109453)


@each_solver
def test_miller_split_of_a_capacitor(read):
    """Example 6.7. The two halves are recalled."""
    f = figures_of(read, "MILLER-1-C")
    exact(f("A1.c_bridge.at_input"), 101e-12)
    exact(f("A1.c_bridge.at_output"), 1.01e-12)
    printed(f("overall.upper_edge_hz"), 157.6e3, 0.001)
    exact(f("overall.upper_edge_hz"), 157579.151576134)
    exact(f("n0.pole_hz"), 157579.151576134)


@each_solver
def test_second_pole_of_a_two_stage_amplifier(read):
    """Example 9.1: 637 MHz of Gm2 = 3.2 mA/V into 0.8 pF, C for 75°, and the resistor 1/Gm2 that would send the zero
    away, 863 MHz on the right without it: printed 316 Ω, of 3.16 mA/V not yet rounded."""
    f = figures_of(read, "COMP-3")
    printed(1 / f("M6.gm.value"), 316, 0.015)
    printed(f("M6.c_comp.value"), 0.6e-12, 0.03)
    _, second = real_hz(poles_of(read, "COMP-3"))
    printed(second, 637e6, 0.002)
    exact(second, 636619772.3675814, 2e-4)
    (zero,) = real_hz(zeros_of(read, "COMP-3"))
    exact(zero, -f("M6.gm.value") / (2 * pi * f("M6.c_comp.value")))
