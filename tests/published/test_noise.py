"""Noise figures and totals of textbooks, of the program and of the independent solution. Figures marked "notebook" are
as worked in a public solution notebook of the book; those marked "recalled" were not seen in print."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from math import log10, sqrt

import pytest

from polebook.book.ledger import ledger
from polebook.chain.read import parse
from tests.independent.linear import mp
from tests.independent.noise import Noise
from tests.published.checks import exact, printed

HEAD = 'format = 1\n[source]\nkind = "voltage"\nresistance = '


class Program:
    """What the program says of a chain."""

    def __init__(self, text: str) -> None:
        self.noise = ledger(parse(text, "chain.toml")).noise

    def density(self, hz: float) -> float:
        return float(self.noise.over([hz]).input[0])

    def figure_db(self, hz: float) -> float:
        assert self.noise.reference_hz == hz
        return self.noise.figure_db

    def total(self, low: float, high: float) -> float:
        band = self.noise.totals.band
        assert band.from_hz == low and (band.to_hz == high or band.to_hz == float("inf"))
        return self.noise.output_rms


class Independent:
    """What the independent solution says of it."""

    def __init__(self, text: str) -> None:
        self.noise = Noise(tomllib.loads(text))

    def density(self, hz: float) -> float:
        return float(self.noise.input_density(mp.mpf(hz)))

    def figure_db(self, hz: float) -> float:
        return float(self.noise.figure_db(mp.mpf(hz)))

    def total(self, low: float, high: float) -> float:
        return self.noise.total(low, high, count=4001)


Solver = Callable[[str], Program | Independent]
each_solver = pytest.mark.parametrize("solve", [Program, Independent])


def resistor(ohm: float, celsius: float, low: float, high: float) -> str:
    """A resistor alone, at the input of an amplifier without noise of its own."""
    return (f'{HEAD}{ohm}\n[supply]\ntemperature = {celsius}\n[[stage]]\nname = "B"\nkind = "block"\ngain = 1\n'
            f"poles = [1e15]\n[target]\nreference = {sqrt(low * high)}\nnoise_from = {low}\nnoise_to = {high}\n")


@each_solver
def test_three_stages_in_cascade(solve: Solver):
    """R. Blake, Electronic Communication Systems, example 1.12 (notebook): power gains 10, 25, 30, factors 2, 4, 5."""
    blocks = "".join(f'[[stage]]\nname = "B{k}"\nkind = "block"\ngain = {sqrt(gain)}\ngain_into = 50\nrin = 50\n'
                     f"rout = 50\nnf = {10 * log10(factor)}\n" for k, (gain, factor) in
                     enumerate(((10, 2), (25, 4), (30, 5))))
    one = solve(f"{HEAD}50\n{blocks}[load]\nresistance = 50\ncapacitance = 1e-15\n[target]\nreference = 1000\n")
    factor = 10 ** (one.figure_db(1000) / 10)
    printed(factor, 2.316, 1e-4)
    exact(factor, 2 + 3 / 10 + 4 / 250, 1e-8)
    printed(290 * (factor - 1), 382, 2e-3)


@each_solver
def test_a_resistor_over_a_megahertz(solve: Solver):
    """D. Roddy and J. Coolen, Electronic Communications, example 4.2.1 (notebook): 50 Ω at 290 K, 1 MHz: 0.89 µV."""
    one = solve(resistor(50, 16.85, 1.0, 1e6 + 1))
    printed(one.total(1.0, 1e6 + 1), 0.89e-6, 6e-3)
    printed(one.total(1.0, 1e6 + 1), sqrt(4 * 1.38e-23 * 290 * 50 * 1e6), 1e-3)


@each_solver
def test_a_resistor_over_the_audio_band(solve: Solver):
    """S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed., example 7.4 (notebook)."""
    one = solve(resistor(10e3, 25, 20.0, 20e3))
    printed(one.density(632.0), 1.28e-8, 3e-3)
    printed(one.total(20.0, 20e3), 1.81e-6, 3e-3)


@each_solver
def test_an_inverting_amplifier_with_two_corners(solve: Solver):
    """S. Franco, as above, examples 7.7 and 7.9 (notebook): 100 kΩ and 200 kΩ about a 741-like amplifier with 68 kΩ at
    the other input; 20 nV with a corner at 200 Hz, 0.5 pA at 2 kHz, 1 MHz of gain-bandwidth, from 0.1 Hz: 154 µV."""
    one = solve(f'{HEAD}0\n[[stage]]\nname = "U"\nkind = "inverting"\ndevice = "A"\nrg = "100k"\nrf = "200k"\n'
                'r_bias = "68k"\nvout = 0\n[target]\nreference = 1000\nnoise_from = 0.1\nnoise_to = "100M"\n'
                '[device.A]\nfamily = "opamp"\ngbw = "1M"\na0 = "2e5"\nrout = 0\nen = "20n"\nen_corner = 200\n'
                'in = "p5"\nin_corner = "2k"\n')
    total = one.total(0.1, 1e8)
    printed(total, 154e-6, 1e-2)
    printed(total, 153.71e-6, 1e-3)  # an integral that takes the loop gain for infinite
    printed(20 * log10(1 / sqrt(2) / total), 73.2, 5e-3)  # a signal of 1 V peak at the output


@each_solver
@pytest.mark.parametrize(("ohm", "volts"), [(1e3, 4e-6), (100e3, 40e-6), (10e6, 400e-6)])
def test_resistors_with_a_round_constant(solve: Solver, ohm: float, volts: float):
    """W. D. Stanley and J. M. Jeffords, Electronic Communications, example 12.1 (notebook): 4kT taken as
    16e-21 V²/(Ω Hz), which is 16.57 °C; over 1 MHz."""
    one = solve(resistor(ohm, 4e-21 / 1.380649e-23 - 273.15, 1.0, 1e6 + 1))
    exact(one.total(1.0, 1e6 + 1), volts, 1e-6)


@each_solver
@pytest.mark.parametrize(("n", "factor", "share"), [(1, 1.57, 1e-3), (2, 1.22, 1e-3), (3, 1.155, 1e-3), (4, 1.13, 2e-3),
                                                    (5, 1.11, 4e-3)])
def test_noise_bandwidth_of_like_poles(solve: Solver, n: int, factor: float, share: float):
    """C. D. Motchenbacher and J. A. Connelly, Low-Noise Electronic System Design (recalled): over the edge."""
    one = solve(f'{HEAD}"1k"\n[[stage]]\nname = "B"\nkind = "block"\ngain = 1\npoles = [{", ".join(["1e5"] * n)}]\n'
                "[target]\nreference = 100\nnoise_from = 0.01\nnoise_to = 1e10\n")
    edge = 1e5 * sqrt(2 ** (1 / n) - 1)
    printed((one.total(0.01, 1e10) / one.density(100.0)) ** 2 / edge, factor, share)
